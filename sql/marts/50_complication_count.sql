-- Grain: one row a run and kind that its source carries, zeros included. Hours at risk by the rule of the kind; a run that
-- is not at risk says why. Onsets up to hour 0 are states before support and take the run out of the set at risk.
-- Events after the end but within the window stand in a column of their own and enter no rate.
with carried as (
  select
    m.run_key, m.person_key, m.source_key, m.run_year, m.pathway, m.end_kind, m.arterial_return, m.right_sided_monitoring,
    m.support_h, m.entry_h, m.has_unknown_entry, k.kind, k.label, k.family, k.window_h, k.from_h, k.at_risk,
    c.events_kept, c.looked_until_h,
    s.on_rrt_at_zero, h.dialysis_dependent, x.missing_kind
  from mart.run m
  cross join vocabulary.complication_kind k
  join lateral (
    select events_kept, looked_until_h from record.complication_coverage c
    where c.source_key = m.source_key and c.kind = k.kind and c.valid_from_year <= m.run_year
    order by c.valid_from_year desc limit 1
  ) c on true
  left join record.pre_support_state s using (run_key)
  left join record.history h using (run_key)
  left join record.missing_value x on x.run_key = m.run_key and x.field = 'complication.' || k.kind
), counted as (
  select
    c.*,
    count(e.onset_h) filter (where e.onset_h <= 0) as n_before,
    count(e.onset_h) filter (where e.onset_h > 0 and e.onset_h <= c.support_h and e.onset_h > c.entry_h and e.onset_h >= c.from_h) as n_on_support,
    count(e.onset_h) filter (where e.onset_h > 0 and e.onset_h < c.from_h) as n_too_early,
    count(e.onset_h) filter (where e.onset_h > c.support_h and e.onset_h <= c.support_h + c.window_h) as n_after_end,
    min(e.onset_h) filter (where e.onset_h > greatest(0, c.entry_h) and e.onset_h >= c.from_h and e.onset_h <= c.support_h) as first_onset_h
  from carried c left join mart.complication_episode e on e.run_key = c.run_key and e.kind = c.kind
  group by all
), judged as (
  select *,
    case
      when missing_kind in ('not_recorded', 'set_aside') then 'not recorded'
      when missing_kind = 'not_applicable' then 'does not apply'
      when has_unknown_entry then 'transferred in at an unknown time'
      when n_before > 0 then 'present before support'
      when at_risk = 'femoral' and arterial_return is null then 'return site not recorded'
      when at_risk = 'femoral' and arterial_return <> 'femoral' then 'other return site'
      when at_risk = 'monitored' and right_sided_monitoring is null then 'monitoring not recorded'
      when at_risk = 'monitored' and not right_sided_monitoring then 'no right-sided monitoring'
      when at_risk = 'no_rrt' and (on_rrt_at_zero or dialysis_dependent) then 'on renal replacement at start'
      when support_h is null then 'end of support not recorded'
      when support_h <= greatest(from_h, entry_h) then 'support ended before being at risk'
    end as not_at_risk_because
  from counted
)
select
  run_key, person_key, source_key, run_year, pathway, end_kind, kind, label, family, events_kept, looked_until_h, window_h,
  not_at_risk_because is null as is_at_risk, not_at_risk_because,
  n_on_support::integer as n_events, n_before::integer as n_before, n_after_end::integer as n_after_end,
  n_too_early::integer as n_too_early, first_onset_h,
  greatest(from_h, entry_h, 0.0) as at_risk_from_h,
  case when not_at_risk_because is null then support_h - greatest(from_h, entry_h, 0.0) else 0.0 end as hours_at_risk,
  case when not_at_risk_because is null
    then coalesce(first_onset_h, support_h) - greatest(from_h, entry_h, 0.0) else 0.0 end as hours_to_first,
  support_h
from judged
order by run_key, kind

-- Grain: one row a support run. What was known when it began, how it ended, and what became of the person.
select
  r.run_key, r.person_key, r.source_key, r.nth_run,
  coalesce(r.nth_run = 1 and not p.order_is_uncertain, false) as is_first_run,
  r.run_year, r.age_years, r.age_years - r.age_is_uncertain::integer as age_low_years, r.age_topcoded,
  p.sex_recorded, p.height_cm, r.weight_kg,
  r.weight_kg / (p.height_cm / 100.0) ** 2 as bmi_kg_m2,
  i.indication_group, s.had_arrest, coalesce(s.extracorporeal_cpr, false) as is_extracorporeal_cpr,
  r.intended_pathway, r.plan_is_from_start,
  coalesce(r.transferred_in, r.entry_h > 0, false) as is_transferred_in,
  coalesce(r.transferred_in, false) and r.entry_h is null as has_unknown_entry,
  coalesce(r.entry_h, 0.0) as entry_h,
  c.arterial_return, c.leg_cannula, c.right_sided_monitoring,
  e.end_kind, k.pathway, k.cause, e.end_h, e.open_days,
  coalesce(e.end_h, e.open_days * 24.0) as support_h,
  o.is_alive_at_discharge, o.is_still_inpatient, o.discharge_h, o.discharge_to,
  n.value as cpc,
  r.observable_to_day_30, r.observable_to_day_90, r.observable_to_day_180, r.observable_to_day_365,
  lead(r.hours_from_first_run) over (partition by r.person_key order by r.hours_from_first_run, r.run_key)
    - (r.hours_from_first_run + e.end_h) as supported_again_after_h
from record.support_run r
join record.person p using (person_key)
left join record.indication i on i.run_key = r.run_key and i.is_primary
left join record.pre_support_state s on s.run_key = r.run_key
left join record.cannulation c on c.run_key = r.run_key
left join record.support_end e on e.run_key = r.run_key
left join vocabulary.end_kind k on k.end_kind = e.end_kind
left join record.hospital_outcome o on o.run_key = r.run_key
left join record.neuro_outcome n on n.run_key = r.run_key and n.scale = 'cpc'
order by r.run_key

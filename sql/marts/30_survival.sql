-- Grain: one row a support run. From the start of support to death, or to the last time at which the person is known to
-- be alive. What a date beside a death is, and whether no death means alive, is what the source declares.
-- Who is known to be dead without a date is censored when last known alive, and no register makes them live on.
-- time_low_h, time_high_h: both ends where only the day of the news of a death is known.
with known as (
  select
    m.*, d.vital_status_date, d.no_death_means, f.vital_status, f.death_h as told_h, f.contact_h,
    case
      when m.end_kind = 'death' then m.end_h
      when m.is_alive_at_discharge = false then coalesce(m.discharge_h, case when m.end_kind = 'withdrawal' then m.end_h end)
      when m.end_kind = 'withdrawal' and m.is_alive_at_discharge is null and m.discharge_h is null
           and f.vital_status is distinct from 'alive' then m.end_h
    end as in_hospital_death_h,
    greatest(
      m.entry_h,
      case when m.end_kind = 'death' then 0.0 else coalesce(m.support_h, 0.0) end,
      case when m.is_alive_at_discharge then coalesce(m.discharge_h, 0.0) else 0.0 end,
      coalesce(f.contact_h, 0.0)
    ) as last_alive_h
  from mart.run m
  join record.source d using (source_key)
  left join record.follow_up f using (run_key)
), settled as (
  select
    k.*,
    in_hospital_death_h is not null or (told_h is not null and coalesce(vital_status, 'dead') = 'dead') as died,
    coalesce(in_hospital_death_h, told_h) as death_h,
    in_hospital_death_h is null and told_h is not null and vital_status_date = 'day of news' as is_news,
    case
      when no_death_means <> 'alive' then 0.0
      when is_alive_at_discharge = false or vital_status = 'dead' then 0.0
      when observable_to_day_365 then 8760.0
      when observable_to_day_180 then 4320.0
      when observable_to_day_90 then 2160.0
      when observable_to_day_30 then 720.0
      else 0.0
    end as registered_alive_h
  from known k
)
select
  run_key, person_key, source_key, is_first_run, run_year, is_extracorporeal_cpr, intended_pathway, plan_is_from_start,
  pathway, end_kind, entry_h, has_unknown_entry, is_transferred_in, died,
  case when died then death_h else greatest(last_alive_h, registered_alive_h) end as time_h,
  case when died and is_news then least(last_alive_h, death_h) when died then death_h
       else greatest(last_alive_h, registered_alive_h) end as time_low_h,
  case when died then death_h else greatest(last_alive_h, registered_alive_h) end as time_high_h,
  is_news, is_alive_at_discharge, is_still_inpatient, no_death_means,
  observable_to_day_30, observable_to_day_90, observable_to_day_180, observable_to_day_365,
  not died and is_alive_at_discharge is null and end_kind not in ('open', 'transfer_out') as is_unknown_after_end
from settled
order by run_key

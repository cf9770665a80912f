-- Grain: one row a run and stay: on support, off support in hospital, discharged, dead. next_state is empty where
-- observation stopped. Only runs whose times are known; intervals of one run are contiguous.
with times as (
  select run_key, person_key, entry_h, end_kind, support_h,
    s.died, s.time_h as last_h,
    case when m.is_alive_at_discharge then m.discharge_h end as discharge_h
  from mart.run m join mart.survival s using (run_key, person_key, entry_h, end_kind)
  where m.support_h > m.entry_h
), bounded as (
  select *, end_kind in ('open', 'transfer_out') as stops, died and last_h <= support_h + 0.02 as dies_on_support,
    case when discharge_h >= support_h and discharge_h <= last_h then discharge_h end as left_h
  from times
)
select run_key, person_key, 'on support' as state, entry_h as from_h, support_h as to_h,
  case when dies_on_support then 'dead' when stops then null
    when left_h = support_h then 'discharged' when last_h > support_h or left_h is not null then 'in hospital' end as next_state
from bounded
union all
select run_key, person_key, 'in hospital', support_h, coalesce(left_h, last_h),
  case when left_h is not null then 'discharged' when died then 'dead' end
from bounded where not stops and not dies_on_support and coalesce(left_h, last_h) > support_h
union all
select run_key, person_key, 'discharged', left_h, last_h, case when died then 'dead' end
from bounded where not stops and not dies_on_support and left_h is not null and last_h > left_h
order by run_key, from_h

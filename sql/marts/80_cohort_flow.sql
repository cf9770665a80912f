-- Grain: one row a source and stage of who is counted, in order.
with runs as (
  select source_key, count(*) as n_runs, count(distinct person_key) as n_persons from mart.run group by source_key
), aside as (
  select source_key, count(*) as n_runs from record.set_aside_run group by source_key
), attempts as (
  select source_key, count(*) as n from record.cannulation_attempt group by source_key
)
select s.source_key, v.stage_no, v.stage, v.n::integer as n
from record.source s
left join runs r using (source_key) left join aside a using (source_key) left join attempts t using (source_key)
cross join lateral (values
  (1, 'runs named by the source', coalesce(r.n_runs, 0) + coalesce(a.n_runs, 0)),
  (2, 'runs set aside whole', coalesce(a.n_runs, 0)),
  (3, 'runs in the store', coalesce(r.n_runs, 0)),
  (4, 'persons in the store', coalesce(r.n_persons, 0)),
  (5, 'attempts that never reached flow', case when s.attempts = 'included' then coalesce(t.n, 0) end)
) as v(stage_no, stage, n)
order by s.source_key, v.stage_no

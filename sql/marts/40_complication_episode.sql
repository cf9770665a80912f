-- Grain: one row an episode of one kind in one run. A record within the gap of the one before belongs to its episode.
with marked as (
  select
    e.run_key, e.kind, e.onset_h,
    case when e.onset_h - lag(e.onset_h) over (partition by e.run_key, e.kind order by e.onset_h) < k.gap_h then 0 else 1 end as is_first
  from record.complication_event e join vocabulary.complication_kind k using (kind)
  where e.onset_h is not null
), numbered as (
  select *, sum(is_first) over (partition by run_key, kind order by onset_h rows unbounded preceding) as episode_no from marked
)
select run_key, kind, episode_no::integer as episode_no, min(onset_h) as onset_h, count(*)::integer as n_records
from numbered group by all order by run_key, kind, episode_no

-- Grain: as staging.typed. Local moments become UTC, by the offset in the cell or else by the declared zone; a time that
-- a change of clocks skipped or repeated is marked.
with zoned as (
  select t.*, p.zone,
    p.zone <> 'in cell' and t.offset_minutes is null and t.local_moment is not null and p.kind in ('moment', 'moment_before') as has_zone
  from staging.typed t
  join staging.piece p using (piece_no)
)
select
  sheet_no, line, run_no, piece_no, word, missing_word, coded, received, local_moment, defect,
  case
    when has_zone then (local_moment at time zone zone) at time zone 'UTC'
    else local_moment - to_minutes(coalesce(offset_minutes, 0))
  end as utc,
  case
    when not has_zone then null
    when ((local_moment at time zone zone) at time zone zone) <> local_moment then 'CELL.TIME-SKIPPED'
    when (((local_moment at time zone zone) + interval 1 hour) at time zone zone) = local_moment
      or (((local_moment at time zone zone) - interval 1 hour) at time zone zone) = local_moment then 'CELL.TIME-REPEATED'
  end as clock
from zoned

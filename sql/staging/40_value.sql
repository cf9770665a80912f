-- Grain: as staging.moment. Canonical value of every cell: unit conversion, hours from the start of support to the
-- minute, completed years of age; then the hard limits. Nothing is clipped and nothing is filtered.
with timed as (
  select
    m.*, p.* exclude (piece_no, sheet_no),
    s.start_utc, s.start_local::date as start_day,
    round((epoch_us(m.utc) - epoch_us(s.start_utc)) / 60000000.0) / 60.0 as hours
  from staging.moment m
  join staging.piece p using (piece_no)
  left join staging.run_start s on s.run_no = m.run_no
), canonical as (
  select
    t.*,
    case t.kind
      when 'moment' then t.hours
      when 'moment_before' then -t.hours
      when 'birth_date' then year(t.start_day) - year(t.local_moment)
        - (strftime(t.start_day, '%m%d') < strftime(t.local_moment, '%m%d'))::integer
      when 'birth_year' then year(t.start_day) - t.received
      when 'year_of' then year(t.local_moment)
      when 'duration' then round((t.received * t.factor + t.shift) * 60.0) / 60.0
      else t.received * t.factor + t.shift
    end as amount
  from timed t
)
select
  sheet_no, line, run_no, piece_no, field, target_table, target_column, kind, word, received,
  case when defect is null and missing_word is null then coalesce(coded, case when kind = 'word' then word end) end as coded,
  case when defect is null and missing_word is null then amount end as amount,
  nullif(missing_word, 'defect') as missing_word,
  clock,
  coalesce(
    defect,
    case
      when missing_word is not null or target_column = 'start' then null
      when clock = 'CELL.TIME-SKIPPED' then clock
      when kind in ('birth_date', 'birth_year') and (amount < 0 or amount > 130) then 'CELL.BIRTH'
      when kind in ('integer', 'scale', 'birth_year') and received <> floor(received) then 'CELL.WHOLE'
      when kind in ('moment', 'moment_before') and (amount < hard_low or amount > hard_high) then 'CELL.TIME'
      when amount < hard_low or amount > hard_high then 'CELL.LIMIT'
    end
  ) as defect
from canonical

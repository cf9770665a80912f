-- Grain: one row a cell and piece of it, of one chunk. Trims, and says why a value is missing. Never filters rows.
select
  c.sheet_no, c.line, c.run_no, c.piece_no, c.number, c.moment, c.problem,
  trim(c.text, ' ' || chr(9) || chr(160)) as word,
  case
    when c.problem is not null then null
    when c.number is not null or c.moment is not null then null
    when coalesce(trim(c.text, ' ' || chr(9) || chr(160)), '') = '' then p.blank
    when m.token is not null then 'not recorded'
  end as missing_word
from staging.cell c
join staging.piece p using (piece_no)
left join staging.missing_token m
  on m.piece_no = c.piece_no and m.token = trim(c.text, ' ' || chr(9) || chr(160))

-- Grain: one row a defect of a cell. The value itself is not here: only its length and shape (letters a, digits 9).
select
  v.sheet_no, v.line, v.run_no, v.piece_no, p.header, v.field,
  coalesce(v.defect, v.clock, case when m.token is not null then 'CELL.TOKEN' end, 'CELL.UNUSUAL') as code,
  case
    when v.defect is null then 'note'
    when p.effect = 'run' and p.row_is <> 'run' then 'row'
    when p.effect = 'row' and p.row_is = 'run' then 'cell'
    else p.effect
  end as effect,
  regexp_replace(regexp_replace(regexp_replace(regexp_replace(
    left(coalesce(v.word, ''), 40), '[^\P{L}\p{Lu}]', 'a', 'g'), '\p{Lu}', 'A', 'g'), '\p{N}', '9', 'g'), '[^ -~]', '?', 'g') as shape,
  case when v.defect = 'CELL.LIMIT' and v.received is not null then (
    select string_agg(distinct u.received_unit, ' or ' order by u.received_unit)
    from vocabulary.unit_conversion u
    join vocabulary.analyte a on a.analyte = v.target_column and a.quantity = u.quantity
    where v.target_table = 'measurement'
      and abs(u.factor - p.factor) > 1e-9 * abs(p.factor)
      and v.received * u.factor + u.shift between a.plausible_low and a.plausible_high
  ) end as plausible_as
from staging.value v
join staging.piece p using (piece_no)
left join vocabulary.analyte a on v.target_table = 'measurement' and a.analyte = v.target_column
left join staging.missing_token m on m.piece_no = v.piece_no and m.token = v.word and v.missing_word is not null
where v.defect is not null
   or v.clock = 'CELL.TIME-REPEATED'
   or m.token is not null
   or (v.amount is not null and (v.amount < a.plausible_low or v.amount > a.plausible_high))

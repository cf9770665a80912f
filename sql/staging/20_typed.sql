-- Grain: as staging.text. Reads codes, numbers and local moments by the declared grammar; says what could not be read.
-- A moment is first rewritten into one fixed order, because month or day first is a property of the column. `none` is a
-- reason for a missing value, except in a list that has it as a value. Where offsets stand in the cells, none may lack one.
with known_code as (
  select c.*, c.value in ('not recorded', 'not applicable', 'none') and not exists (
      select 1 from vocabulary.field f join vocabulary.code_value v on v.list = f.list and v.value = c.value
      where f.field = p.field) as is_missing
  from staging.code c join staging.piece p using (piece_no)
), worded as (
  select
    t.*, p.* exclude (piece_no, sheet_no),
    t.missing_word is null and t.problem is null as is_there,
    y.* exclude (piece_no),
    regexp_replace(regexp_replace(t.word, '[AaPp][Mm]', 'AA'), '[0-9]', '9', 'g') as seen_shape,
    -- Marks become fixed signs, so that one constant form reads every declared way of writing numbers.
    case when contains(t.word, '.') and p.decimal_mark <> '.' and p.thousands_mark <> '.' or contains(t.word, '~') then ''
      else replace(case when p.thousands_mark = '_' then t.word else replace(t.word, p.thousands_mark, '~') end, p.decimal_mark, '.')
    end as number_text
  from staging.text t
  join staging.piece p using (piece_no)
  left join staging.moment_layout y using (piece_no)
), rewritten as (
  select
    *,
    -- A pattern of fixed width is read by place; only others pay for a regular expression a cell.
    case
      when not is_timed or not is_there then null
      when shape is not null then
        case when seen_shape = shape then
          word[year_at:year_at + 3] || '-' || word[month_at:month_at + 1] || '-' || word[day_at:day_at + 1] || ' '
          || case when hour_at > 0 then word[hour_at:hour_at + 1] else '00' end || ':'
          || case when minute_at > 0 then word[minute_at:minute_at + 1] else '00' end || ':'
          || case when second_at > 0 then word[second_at:second_at + 1] else '00' end
          || case when half_at > 0 then ' ' || word[half_at:half_at + 1] else '' end
        end
      when moment_form <> '' and regexp_full_match(word, moment_form) then regexp_replace(word, moment_form, moment_rewrite)
    end as fixed_text,
    case when is_timed and is_there and moment_offset <> '' and regexp_full_match(word, moment_form)
      then replace(regexp_replace(word, moment_form, moment_offset), ':', '') end as offset_text,
    regexp_full_match(number_text, '-?(?:[0-9]{1,15}|[0-9]{1,3}(?:~[0-9]{3}){1,4})(?:\.[0-9]{1,15})?') as is_number_text
  from worded
), parsed as (
  select
    r.*, k.value as code, coalesce(k.is_missing, false) as is_missing_code,
    coalesce(r.moment, try_strptime(r.fixed_text, ['%Y-%m-%d %H:%M:%S', '%Y-%m-%d %I:%M:%S %p'])::timestamp) as read_moment,
    case
      when r.number is not null then r.number
      when k.value is not null then try_cast(k.value as double)
      when r.is_number_text then try_cast(replace(r.number_text, '~', '') as double)
    end as read_number,
    case
      when r.offset_text is null then null
      when r.offset_text = 'Z' then 0
      else (case when r.offset_text[1] = '-' then -1 else 1 end)
           * (r.offset_text[2:3]::integer * 60 + r.offset_text[4:5]::integer)
    end as offset_minutes
  from rewritten r
  left join known_code k
    on k.piece_no = r.piece_no and k.text = case when r.ignore_case then lower(r.word) else r.word end
)
select
  sheet_no, line, run_no, piece_no, word,
  case when missing_word is not null then missing_word
       when is_missing_code then code end as missing_word,
  case when is_coded and is_there and not is_missing_code then code end as coded,
  case when is_counted and is_there then read_number end as received,
  case when is_timed and is_there then read_moment end as local_moment,
  offset_minutes,
  case
    when problem is not null then 'CELL.' || upper(problem)
    when missing_word = 'defect' then 'CELL.EMPTY'
    when missing_word is not null or is_missing_code then null
    when is_coded and code is null then 'CELL.CODE'
    when is_timed and (read_moment is null or number is not null) then 'CELL.DATE'
    when kind in ('moment', 'moment_before') and zone = 'in cell' and offset_minutes is null then 'CELL.DATE'
    when is_counted and (read_number is null or moment is not null) then 'CELL.NUMBER'
    when kind = 'word' and not regexp_full_match(word, '[A-Za-z0-9][A-Za-z0-9 ._+-]{0,23}') then 'CELL.WORD'
  end as defect
from parsed

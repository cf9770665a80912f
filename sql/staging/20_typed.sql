-- Grain: as staging.text. Reads codes, numbers and local moments by the declared grammar; says what could not be read.
-- A moment is first rewritten into one fixed order, because month or day first is a property of the column. `none` is a
-- reason for a missing value, except in a list that has it as a value. Where offsets stand in the cells, none may lack one.
with known_code as (
  select c.*, c.value in ('not recorded', 'not applicable', 'none') and not exists (
      select 1 from vocabulary.field f join vocabulary.code_value v on v.list = f.list and v.value = c.value
      where f.field = p.field) as is_missing
  from staging.code c join staging.piece p using (piece_no)
), rewritten as (
  select
    t.*, p.* exclude (piece_no, sheet_no),
    t.missing_word is null and t.problem is null as is_there,
    case when p.is_timed and p.moment_form <> '' and regexp_full_match(t.word, p.moment_form)
      then regexp_replace(t.word, p.moment_form, p.moment_rewrite) end as fixed_text,
    case when p.is_timed and p.moment_offset <> '' and regexp_full_match(t.word, p.moment_form)
      then replace(regexp_replace(t.word, p.moment_form, p.moment_offset), ':', '') end as offset_text,
    regexp_full_match(t.word, p.number_form) as is_number_text
  from staging.text t
  join staging.piece p using (piece_no)
), parsed as (
  select
    r.*, k.value as code, coalesce(k.is_missing, false) as is_missing_code,
    coalesce(r.moment, try_strptime(r.fixed_text, ['%Y-%m-%d %H:%M:%S', '%Y-%m-%d %I:%M:%S %p'])::timestamp) as read_moment,
    case
      when r.number is not null then r.number
      when k.value is not null then try_cast(k.value as double)
      when r.is_number_text then try_cast(replace(replace(r.word, r.thousands_mark, ''), r.decimal_mark, '.') as double)
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

-- Grain: one row a run, quantity and window that a published score asks for. Worst value of the window asked for; where
-- there is none, a value before support without a time, else one of another time before support. fit says which.
-- The usual value at home is never a value before support. Pulse pressure only from one reading, the oxygen ratio only
-- from one window.
with place as (
  select * from (values
    ('pre_worst_6h',     'pre_worst_6h',  1), ('pre_worst_6h',     'pre_last',      1), ('pre_worst_6h',     'pre_undated', 2),
    ('pre_worst_6h',     'pre_worst_24h', 3), ('pre_worst_6h',     'arrest',        3), ('pre_worst_6h',     'shock_onset', 3),
    ('pre_worst_6h',     'admission',     3),
    ('pre_worst_24h',    'pre_worst_24h', 1), ('pre_worst_24h',    'pre_worst_6h',  1), ('pre_worst_24h',    'pre_last',    1),
    ('pre_worst_24h',    'pre_undated',   2),
    ('pre_worst_24h',    'arrest',        3), ('pre_worst_24h',    'shock_onset',   3), ('pre_worst_24h',    'admission',   3),
    ('hospital_arrival', 'admission',     1), ('hospital_arrival', 'arrest',        1), ('hospital_arrival', 'pre_undated', 2),
    ('hospital_arrival', 'shock_onset',   3), ('hospital_arrival', 'pre_worst_24h', 3), ('hospital_arrival', 'pre_worst_6h', 3),
    ('hospital_arrival', 'pre_last',      3)
  ) as t(asked, window_label, place)
), wanted as (
  select * from (values
    ('pre_worst_6h', 'lactate'), ('pre_worst_6h', 'ph_arterial'), ('pre_worst_6h', 'bicarbonate'), ('pre_worst_6h', 'sbp'),
    ('pre_worst_6h', 'dbp'), ('pre_worst_6h', 'map'), ('pre_worst_6h', 'peak_inspiratory_pressure'),
    ('pre_worst_6h', 'pulse_pressure'), ('pre_worst_6h', 'dopamine'), ('pre_worst_6h', 'dobutamine'),
    ('pre_worst_6h', 'adrenaline'), ('pre_worst_6h', 'noradrenaline'), ('pre_worst_6h', 'milrinone'),
    ('pre_worst_6h', 'vasopressin'), ('pre_worst_6h', 'levosimendan'),
    ('pre_worst_24h', 'creatinine'), ('pre_worst_24h', 'bilirubin_total'), ('pre_worst_24h', 'alt'), ('pre_worst_24h', 'ast'),
    ('pre_worst_24h', 'platelets'), ('pre_worst_24h', 'prothrombin_activity'), ('pre_worst_24h', 'map'),
    ('pre_worst_24h', 'gcs_total'), ('pre_worst_24h', 'urine_day'), ('pre_worst_24h', 'pao2_fio2'),
    ('pre_worst_24h', 'dopamine'), ('pre_worst_24h', 'dobutamine'), ('pre_worst_24h', 'adrenaline'),
    ('pre_worst_24h', 'noradrenaline'),
    ('hospital_arrival', 'ph_arterial')
  ) as t(asked, quantity)
), taken as (
  select m.run_key, m.analyte as quantity, m.window_label, m.value, a.worst
  from record.measurement m join vocabulary.analyte a using (analyte)
  union all
  select run_key, drug, window_label, dose, 'max' from record.vasoactive_dose
  union all
  select s.run_key, 'pulse_pressure', s.window_label, s.value - d.value, 'min'
  from record.measurement s
  join record.measurement d on d.run_key = s.run_key and d.window_label = s.window_label and d.reading = s.reading
  where s.analyte = 'sbp' and d.analyte = 'dbp'
  union all
  select p.run_key, 'pao2_fio2', p.window_label, p.value / f.value, 'min'
  from record.measurement p join record.measurement f on f.run_key = p.run_key and f.window_label = p.window_label
  where p.analyte = 'pao2' and f.analyte = 'fio2'
), placed as (
  select t.*, w.asked, p.place, min(p.place) over (partition by t.run_key, t.quantity, w.asked) as best
  from taken t join wanted w using (quantity) join place p on p.asked = w.asked and p.window_label = t.window_label
)
select run_key, quantity, asked,
  case when any_value(worst) = 'max' then max(value) else min(value) end as value,
  case best when 1 then 'own' when 2 then 'undated' else 'other' end as fit
from placed where place = best
group by run_key, quantity, asked, best
order by run_key, quantity, asked

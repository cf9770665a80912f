-- Where the median of a whole column lies in adults on V-A support, canonical unit. Grain: one row a field. Used to test
-- a declared unit and to guess one in a draft; wide on purpose, so that only a wrong unit leaves it (project choice).
select * from (values
  ('measurement.lactate',          1.0,  15.0), ('measurement.creatinine',     55.0, 500.0), ('measurement.bilirubin_total', 4.0, 90.0),
  ('measurement.glucose',          4.0,  20.0), ('measurement.haemoglobin',    65.0, 150.0), ('measurement.platelets',      50.0, 400.0),
  ('measurement.fibrinogen',       1.0,   7.0), ('measurement.albumin',        12.0,  48.0), ('measurement.urea',            3.0,  35.0),
  ('measurement.pao2',            50.0, 450.0), ('measurement.paco2',          22.0,  80.0), ('measurement.sbp',            50.0, 140.0),
  ('measurement.dbp',             28.0,  95.0), ('measurement.map',            38.0, 105.0), ('measurement.fio2',           0.21,   1.0),
  ('measurement.lvef',             8.0,  60.0), ('measurement.temperature',    30.0,  39.0), ('measurement.sao2',           55.0, 100.0),
  ('measurement.spo2',            55.0, 100.0), ('measurement.lvot_vti',        3.0,  22.0), ('measurement.lateral_s_prime', 2.0,  14.0),
  ('measurement.peak_inspiratory_pressure', 12.0, 40.0),
  ('support_run.weight_kg',       55.0, 115.0), ('person.height_cm',          150.0, 195.0),
  ('weaning_step.lvef_percent',    8.0,  65.0), ('weaning_step.lvot_vti_cm',    3.0,  22.0), ('weaning_step.flow_l_min',     0.5,   5.5),
  ('arrest_episode.low_flow_min', 10.0, 110.0)
) as t(field, low, high)

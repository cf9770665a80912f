-- Why support was begun. Grain: one row a group; exactly one primary group a run. Arrest is a flag, never a group,
-- so that groups stay mutually exclusive; `arrest_without_cause` is for sources that record nothing but the arrest.
select * from (values
  ('acute_myocardial_infarction',          'acute myocardial infarction'),
  ('decompensated_chronic_heart_failure',  'decompensated chronic heart failure'),
  ('myocarditis',                          'myocarditis'),
  ('refractory_ventricular_arrhythmia',    'refractory ventricular arrhythmia'),
  ('post_cardiotomy',                      'after cardiac surgery'),
  ('primary_graft_dysfunction_heart',      'graft dysfunction after heart transplantation'),
  ('pulmonary_embolism',                   'pulmonary embolism'),
  ('valve_disease_acute',                  'acute valve disease'),
  ('procedure_complication',               'complication of a procedure'),
  ('septic_cardiomyopathy',                'septic cardiomyopathy'),
  ('toxic_or_drug',                        'poisoning or drug'),
  ('accidental_hypothermia',               'accidental hypothermia'),
  ('pulmonary_hypertension_rv_failure',    'pulmonary hypertension, right heart failure'),
  ('peripartum',                           'peripartum cardiomyopathy'),
  ('congenital_adult',                     'congenital heart disease in an adult'),
  ('arrest_without_cause',                 'cardiac arrest, cause not recorded'),
  ('other',                                'other'),
  ('unknown',                              'unknown')
) as t(indication_group, label)

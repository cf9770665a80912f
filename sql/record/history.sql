-- One row per run: state known before the acute illness.
create table record.history (
  run_key text primary key,
  chronic_kidney_disease boolean,
  ckd_stage integer check (ckd_stage between 1 and 5),
  dialysis_dependent boolean,
  prior_myocardial_infarction boolean,
  prior_cabg boolean,
  prior_cardiac_surgery boolean,
  prior_stroke boolean,
  congenital_heart_disease boolean,
  heart_transplant_recipient boolean,
  lung_transplant_recipient boolean,
  left_main_disease boolean,
  diabetes boolean,
  hypertension boolean,
  peripheral_artery_disease boolean,
  aortic_regurgitation_grade integer check (aortic_regurgitation_grade between 0 and 4),
  immunosuppressed boolean,
  frailty_scale integer check (frailty_scale between 1 and 9),
  durable_vad_before boolean
);
comment on table record.history is 'One row per run: state before the acute illness';
comment on column record.history.run_key is 'the run';
comment on column record.history.chronic_kidney_disease is 'kidney damage or GFR below 60 for 3 months or more';
comment on column record.history.ckd_stage is 'stage 1 to 5';
comment on column record.history.dialysis_dependent is 'on long-term dialysis';
comment on column record.history.prior_myocardial_infarction is 'earlier myocardial infarction';
comment on column record.history.prior_cabg is 'earlier coronary bypass surgery';
comment on column record.history.prior_cardiac_surgery is 'earlier cardiac surgery of any kind';
comment on column record.history.prior_stroke is 'earlier stroke';
comment on column record.history.congenital_heart_disease is 'congenital heart disease';
comment on column record.history.heart_transplant_recipient is 'had a heart transplant before this run';
comment on column record.history.lung_transplant_recipient is 'had a lung transplant before this run';
comment on column record.history.left_main_disease is 'left main coronary disease';
comment on column record.history.diabetes is 'diabetes';
comment on column record.history.hypertension is 'hypertension';
comment on column record.history.peripheral_artery_disease is 'peripheral artery disease';
comment on column record.history.aortic_regurgitation_grade is 'grade 0 to 4; it worsens distension on support';
comment on column record.history.immunosuppressed is 'immunosuppressed';
comment on column record.history.frailty_scale is 'clinical frailty, 1 to 9';
comment on column record.history.durable_vad_before is 'a durable pump was in place before'

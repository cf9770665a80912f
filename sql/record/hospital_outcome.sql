-- One row per run: how the hospital stay ended.
create table record.hospital_outcome (
  run_key text primary key,
  discharge_h double,
  is_alive_at_discharge boolean,
  is_still_inpatient boolean not null default false,
  discharge_to text,
  icu_discharge_h double,
  rrt_at_discharge boolean
);
comment on table record.hospital_outcome is 'How the hospital stay ended';
comment on column record.hospital_outcome.run_key is 'the run';
comment on column record.hospital_outcome.discharge_h is 'discharge or death in hospital after hour 0; unit h';
comment on column record.hospital_outcome.is_alive_at_discharge is 'left hospital alive; empty if unknown';
comment on column record.hospital_outcome.is_still_inpatient is 'in hospital at the extract';
comment on column record.hospital_outcome.discharge_to is 'where to';
comment on column record.hospital_outcome.icu_discharge_h is 'left intensive care after hour 0; unit h';
comment on column record.hospital_outcome.rrt_at_discharge is 'on renal replacement at discharge'

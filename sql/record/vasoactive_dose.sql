-- Long: one row per run, drug and time (or window).
create table record.vasoactive_dose (
  run_key text not null,
  drug text not null,
  window_label text not null,
  dose_no integer not null,
  at_h double,
  dose double not null check (dose >= 0),
  unit_as_received text not null,
  primary key (run_key, drug, window_label, dose_no)
);
comment on table record.vasoactive_dose is 'Vasoactive doses; ug/kg/min, vasopressin [iU]/kg/min';
comment on column record.vasoactive_dose.run_key is 'the run';
comment on column record.vasoactive_dose.drug is 'drug';
comment on column record.vasoactive_dose.window_label is 'see vocabulary.window_label';
comment on column record.vasoactive_dose.dose_no is 'order of the rows of this run, drug and window';
comment on column record.vasoactive_dose.at_h is 'time relative to hour 0; unit h';
comment on column record.vasoactive_dose.dose is 'dose; unit ug/kg/min, vasopressin [iU]/kg/min';
comment on column record.vasoactive_dose.unit_as_received is 'unit declared by the mapping'

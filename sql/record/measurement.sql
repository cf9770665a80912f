-- Long: one row per run, analyte and time (or window).
create table record.measurement (
  run_key text not null,
  analyte text not null,
  window_label text not null,
  measurement_no integer not null,
  measured_h double,
  value double not null,
  bound_sign text,
  unit_as_received text not null,
  value_as_received double not null,
  site text,
  reading text,
  primary key (run_key, analyte, window_label, measurement_no)
);
comment on table record.measurement is 'One row per run, analyte and time or window; value in the canonical unit of vocabulary.analyte';
comment on column record.measurement.run_key is 'the run';
comment on column record.measurement.analyte is 'see vocabulary.analyte';
comment on column record.measurement.window_label is 'see vocabulary.window_label';
comment on column record.measurement.measurement_no is 'order of the rows of this run, analyte and window';
comment on column record.measurement.measured_h is 'time of the sample relative to hour 0; unit h';
comment on column record.measurement.value is 'value in the canonical unit';
comment on column record.measurement.bound_sign is 'the analyser gave a limit';
comment on column record.measurement.unit_as_received is 'unit declared by the mapping';
comment on column record.measurement.value_as_received is 'value in that unit';
comment on column record.measurement.site is 'where it was drawn or read';
comment on column record.measurement.reading is 'values of one reading carry the same word, so that pulse pressure is paired'

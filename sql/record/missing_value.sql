-- One row per run and field that has no value, with the reason. A value that was set aside is here too.
create table record.missing_value (
  run_key text not null,
  field text not null,
  missing_kind text not null,
  primary key (run_key, field)
);
comment on table record.missing_value is 'Why a value is not there';
comment on column record.missing_value.run_key is 'the run';
comment on column record.missing_value.field is 'the field, see vocabulary.field';
comment on column record.missing_value.missing_kind is 'see vocabulary.missing_kind'

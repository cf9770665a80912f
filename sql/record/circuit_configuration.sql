-- Intervals: which circuit ran from when to when.
create table record.circuit_configuration (
  run_key text not null,
  interval_no integer not null,
  config text not null,
  from_h double not null,
  to_h double,
  primary key (run_key, interval_no)
);
comment on table record.circuit_configuration is 'Circuit configuration intervals; letters before the middle drain, after it return';
comment on column record.circuit_configuration.run_key is 'the run';
comment on column record.circuit_configuration.interval_no is 'order of the intervals of this run';
comment on column record.circuit_configuration.config is 'configuration, never guessed from a bare string';
comment on column record.circuit_configuration.from_h is 'begin; unit h';
comment on column record.circuit_configuration.to_h is 'end; unit h'

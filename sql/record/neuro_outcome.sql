-- One row per run and scale: neurological outcome.
create table record.neuro_outcome (
  run_key text not null,
  scale text not null,
  value integer not null,
  assessed_at text,
  primary key (run_key, scale),
  check ((scale = 'cpc' and value between 1 and 5) or (scale = 'mrs' and value between 0 and 6))
);
comment on table record.neuro_outcome is 'Neurological outcome';
comment on column record.neuro_outcome.run_key is 'the run';
comment on column record.neuro_outcome.scale is 'cpc: cerebral performance category; mrs: modified Rankin scale';
comment on column record.neuro_outcome.value is 'the raw grade';
comment on column record.neuro_outcome.assessed_at is 'when it was assessed'

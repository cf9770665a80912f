-- One row per run that was refused: it stays countable, so that bounds can be given, but has no data here.
create table record.set_aside_run (
  run_key text primary key,
  person_key text not null,
  source_key text not null,
  nth_run integer,
  run_year integer
);
comment on table record.set_aside_run is 'Runs that were refused and hold no data here';
comment on column record.set_aside_run.run_key is 'random surrogate';
comment on column record.set_aside_run.person_key is 'the person';
comment on column record.set_aside_run.source_key is 'which source';
comment on column record.set_aside_run.nth_run is 'order among the runs of this person, empty if not knowable';
comment on column record.set_aside_run.run_year is 'calendar year of the start, if it was readable; unit a'

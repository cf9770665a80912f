-- One primary row per run, any number of secondary rows.
create table record.indication (
  run_key text not null,
  is_primary boolean not null default true,
  indication_group text not null,
  primary key (run_key, is_primary, indication_group)
);
comment on table record.indication is 'Why support was begun: one primary row per run, any number of secondary rows';
comment on column record.indication.run_key is 'the run';
comment on column record.indication.is_primary is 'the one primary reason';
comment on column record.indication.indication_group is 'see vocabulary.indication_group'

-- One row per run: the last that is known of the person.
create table record.follow_up (
  run_key text primary key,
  vital_status text,
  contact_h double,
  death_h double,
  contact_kind text
);
comment on table record.follow_up is 'The last that is known of the person';
comment on column record.follow_up.run_key is 'the run';
comment on column record.follow_up.vital_status is 'alive or dead at that contact';
comment on column record.follow_up.contact_h is 'last contact of the living, floored to 0, 30, 90, 180 or 365 days so that no shared date can be recovered; unit h';
comment on column record.follow_up.death_h is 'the date beside a death after hour 0: day of death or day of news, as the source declares; unit h';
comment on column record.follow_up.contact_kind is 'how the news came'

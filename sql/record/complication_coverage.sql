-- One row per source, kind and validity: what the source means by an event column, as its mapping declares.
create table record.complication_coverage (
  source_key text not null,
  kind text not null,
  events_kept text not null,
  looked_until_h double not null check (looked_until_h >= 0),
  definition text not null,
  valid_from_year integer not null,
  primary key (source_key, kind, valid_from_year)
);
comment on table record.complication_coverage is 'What a source means by its complication columns';
comment on column record.complication_coverage.source_key is 'the source';
comment on column record.complication_coverage.kind is 'see vocabulary.complication_kind';
comment on column record.complication_coverage.events_kept is 'all events, or only the first of each run';
comment on column record.complication_coverage.looked_until_h is 'hours after the end of support up to which the source looks; unit h';
comment on column record.complication_coverage.definition is 'whose definition';
comment on column record.complication_coverage.valid_from_year is 'first calendar year of this declaration; unit a'

-- One row per source: what its mapping declares and no value shows. Dates stand in the ledger only.
create table record.source (
  source_key text primary key,
  plan_written text not null,
  vital_status_date text not null,
  no_death_means text not null,
  attempts text not null,
  period_from_year integer not null,
  period_to_year integer not null
);
comment on table record.source is 'What a source means, as its mapping declares';
comment on column record.source.source_key is 'key of the source in its mapping';
comment on column record.source.plan_written is 'whether the intended pathway was written at the start or overwritten later';
comment on column record.source.vital_status_date is 'what the date beside a death is';
comment on column record.source.no_death_means is 'whether absence of a death up to the check date means alive';
comment on column record.source.attempts is 'whether attempts without flow are in the source';
comment on column record.source.period_from_year is 'first year covered; unit a';
comment on column record.source.period_to_year is 'last year covered; unit a'

-- One row per attempt that never reached flow: hour 0 does not exist, so it is not in any run denominator.
create table record.cannulation_attempt (
  attempt_key text primary key,
  person_key text,
  source_key text not null,
  attempt_year integer,
  reason text
);
comment on table record.cannulation_attempt is 'Cannulation attempts that never reached flow';
comment on column record.cannulation_attempt.attempt_key is 'random surrogate';
comment on column record.cannulation_attempt.person_key is 'the person';
comment on column record.cannulation_attempt.source_key is 'which source';
comment on column record.cannulation_attempt.attempt_year is 'calendar year; unit a';
comment on column record.cannulation_attempt.reason is 'listed reason, if mapped'

-- One row per person. Nothing here was derived from an identifier; the surrogate is random.
create table record.person (
  person_key text primary key check (regexp_full_match(person_key, '[0-9a-f]{32}')),
  sex_recorded text,
  height_cm double check (height_cm between 100 and 250),
  order_is_uncertain boolean not null default false
);
comment on table record.person is 'One row per person';
comment on column record.person.person_key is 'random surrogate, 128 bit';
comment on column record.person.sex_recorded is 'sex as recorded by the source';
comment on column record.person.height_cm is 'body height; unit cm';
comment on column record.person.order_is_uncertain is 'a run of this person has no usable start, so it is not known which run was first'

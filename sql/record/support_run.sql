-- One row per support run: one continuous V-A support period. Hour 0 is the first sustained pump flow.
create table record.support_run (
  run_key text primary key check (regexp_full_match(run_key, '[0-9a-f]{32}')),
  person_key text not null,
  source_key text not null,
  nth_run integer check (nth_run >= 1),
  hours_from_first_run double check (hours_from_first_run >= 0),
  run_year integer not null check (run_year between 1990 and 2200),
  age_years integer check (age_years between 18 and 90),
  age_is_uncertain boolean not null default false,
  age_topcoded boolean not null default false,
  weight_kg double check (weight_kg between 20 and 400),
  cannulated_where text,
  transferred_in boolean,
  entry_h double check (entry_h >= 0),
  intended_pathway text,
  plan_is_from_start boolean not null default false,
  decision_h double check (decision_h <= 0),
  cannulation_start_h double check (cannulation_start_h <= 0),
  is_standby boolean,
  converted_from_vv boolean,
  observable_to_day_30 boolean not null,
  observable_to_day_90 boolean not null,
  observable_to_day_180 boolean not null,
  observable_to_day_365 boolean not null
);
comment on table record.support_run is 'One row per support run';
comment on column record.support_run.run_key is 'random surrogate, 128 bit';
comment on column record.support_run.person_key is 'the person supported';
comment on column record.support_run.source_key is 'which source, by its key in the mapping';
comment on column record.support_run.nth_run is 'order among the runs of this person, fixed before any row was set aside; empty if not knowable';
comment on column record.support_run.hours_from_first_run is 'start of this run after the start of the first run of this person; unit h';
comment on column record.support_run.run_year is 'calendar year of the start; unit a';
comment on column record.support_run.age_years is 'age at start in completed years, 90 stands for 90 and over; unit a';
comment on column record.support_run.age_is_uncertain is 'the source has a birth year only: the age may be one year less';
comment on column record.support_run.age_topcoded is 'age was 90 or more';
comment on column record.support_run.weight_kg is 'body mass at start; unit kg';
comment on column record.support_run.cannulated_where is 'place of cannulation';
comment on column record.support_run.transferred_in is 'arrived at this centre on support';
comment on column record.support_run.entry_h is 'arrival at this centre after hour 0, for runs transferred in on support: they are observed from then; unit h';
comment on column record.support_run.intended_pathway is 'bridge aimed at, see vocabulary.intended_pathway';
comment on column record.support_run.plan_is_from_start is 'the plan was written when support began and not overwritten: it is known at time zero';
comment on column record.support_run.decision_h is 'decision to support, before hour 0; unit h';
comment on column record.support_run.cannulation_start_h is 'skin puncture, before hour 0; unit h';
comment on column record.support_run.is_standby is 'procedural standby, planned in theatre';
comment on column record.support_run.converted_from_vv is 'hour 0 is a conversion from V-V';
comment on column record.support_run.observable_to_day_30 is 'the source could have seen day 30 of this run';
comment on column record.support_run.observable_to_day_90 is 'the source could have seen day 90 of this run';
comment on column record.support_run.observable_to_day_180 is 'the source could have seen day 180 of this run';
comment on column record.support_run.observable_to_day_365 is 'the source could have seen day 365 of this run'

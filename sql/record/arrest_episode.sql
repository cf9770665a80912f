-- Zero or more rows per run: cardiac arrests before support.
create table record.arrest_episode (
  run_key text not null,
  episode_no integer not null,
  arrest_onset_h double,
  no_flow_min double check (no_flow_min between 0 and 120),
  low_flow_min double check (low_flow_min between 0 and 360),
  call_to_arrival_min double check (call_to_arrival_min between 0 and 360),
  witnessed boolean,
  bystander_cpr boolean,
  first_rhythm text,
  shockable_on_arrival boolean,
  rosc_before_pump boolean,
  primary key (run_key, episode_no)
);
comment on table record.arrest_episode is 'Cardiac arrests before support';
comment on column record.arrest_episode.run_key is 'the run';
comment on column record.arrest_episode.episode_no is 'order of the rows of this run';
comment on column record.arrest_episode.arrest_onset_h is 'onset relative to hour 0; unit h';
comment on column record.arrest_episode.no_flow_min is 'without compressions; unit min';
comment on column record.arrest_episode.low_flow_min is 'compressions until flow; unit min';
comment on column record.arrest_episode.call_to_arrival_min is 'emergency call to hospital arrival; unit min';
comment on column record.arrest_episode.witnessed is 'witnessed';
comment on column record.arrest_episode.bystander_cpr is 'compressions by a bystander';
comment on column record.arrest_episode.first_rhythm is 'first rhythm';
comment on column record.arrest_episode.shockable_on_arrival is 'shockable rhythm on hospital arrival';
comment on column record.arrest_episode.rosc_before_pump is 'circulation returned before the pump ran'

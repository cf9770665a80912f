-- One row per unloading episode of the left ventricle.
create table record.lv_unloading_episode (
  run_key text not null,
  episode_no integer not null,
  strategy text not null,
  intent text,
  from_h double,
  to_h double,
  primary key (run_key, episode_no)
);
comment on table record.lv_unloading_episode is 'Unloading of the left ventricle';
comment on column record.lv_unloading_episode.run_key is 'the run';
comment on column record.lv_unloading_episode.episode_no is 'order of the rows of this run';
comment on column record.lv_unloading_episode.strategy is 'how';
comment on column record.lv_unloading_episode.intent is 'why; without it and the time a comparison is biased';
comment on column record.lv_unloading_episode.from_h is 'from; unit h';
comment on column record.lv_unloading_episode.to_h is 'to; unit h'

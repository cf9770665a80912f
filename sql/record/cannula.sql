-- One row per cannula.
create table record.cannula (
  run_key text not null,
  cannula_no integer not null,
  role text not null,
  vessel text,
  side text,
  size_fr double check (size_fr between 3 and 36),
  technique text,
  placed_h double,
  removed_h double,
  removal_technique text,
  primary key (run_key, cannula_no)
);
comment on table record.cannula is 'One row per cannula';
comment on column record.cannula.run_key is 'the run';
comment on column record.cannula.cannula_no is 'order of the cannulae of this run';
comment on column record.cannula.role is 'what it does';
comment on column record.cannula.vessel is 'vessel';
comment on column record.cannula.side is 'side';
comment on column record.cannula.size_fr is 'outer size; unit [Ch]';
comment on column record.cannula.technique is 'how it was placed';
comment on column record.cannula.placed_h is 'placed; unit h';
comment on column record.cannula.removed_h is 'removed; unit h';
comment on column record.cannula.removal_technique is 'how it was removed'

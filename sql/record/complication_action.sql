-- One row per action taken on a complication.
create table record.complication_action (
  run_key text not null,
  action_no integer not null,
  kind text not null,
  action text not null,
  at_h double,
  quantity double,
  primary key (run_key, action_no)
);
comment on table record.complication_action is 'Actions on complications';
comment on column record.complication_action.run_key is 'the run';
comment on column record.complication_action.action_no is 'order of the rows of this run';
comment on column record.complication_action.kind is 'kind of the complication acted on';
comment on column record.complication_action.action is 'what was done';
comment on column record.complication_action.at_h is 'when; unit h';
comment on column record.complication_action.quantity is 'how much, in the unit of the action'

-- One row per recorded event. Episodes are counted in the marts, by rule and not by row.
create table record.complication_event (
  run_key text not null,
  event_no integer not null,
  kind text not null,
  onset_h double,
  onset_precision_h double check (onset_precision_h >= 0),
  grade_scale text,
  grade text,
  consequence text,
  resolved_h double,
  primary key (run_key, event_no)
);
comment on table record.complication_event is 'Complication events as recorded';
comment on column record.complication_event.run_key is 'the run';
comment on column record.complication_event.event_no is 'order of the events of this run';
comment on column record.complication_event.kind is 'see vocabulary.complication_kind';
comment on column record.complication_event.onset_h is 'onset after hour 0; unit h';
comment on column record.complication_event.onset_precision_h is 'the onset is known to plus or minus this; unit h';
comment on column record.complication_event.grade_scale is 'scale of the native grade, or "source words"';
comment on column record.complication_event.grade is 'native grade; never turned into a consequence';
comment on column record.complication_event.consequence is 'harmonised consequence, only if the source states it';
comment on column record.complication_event.resolved_h is 'resolved; unit h'

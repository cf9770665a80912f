-- One row per run that has ended, or is known to be open.
create table record.support_end (
  run_key text primary key,
  end_h double check (end_h > 0),
  end_kind text not null,
  end_planned boolean,
  decannulation_place text,
  arterial_repair text,
  device_implanted text,
  device_implant_h double,
  transplant_h double,
  withdrawal_reason text,
  death_cause_group text,
  organ_donation boolean,
  open_days integer check (open_days between 0 and 365)
);
comment on table record.support_end is 'How and when support ended';
comment on column record.support_end.run_key is 'the run';
comment on column record.support_end.end_h is 'end of support after hour 0, empty while open; unit h';
comment on column record.support_end.end_kind is 'see vocabulary.end_kind';
comment on column record.support_end.end_planned is 'elective end';
comment on column record.support_end.decannulation_place is 'where the cannulae came out';
comment on column record.support_end.arterial_repair is 'how the artery was closed';
comment on column record.support_end.device_implanted is 'device in place at the end';
comment on column record.support_end.device_implant_h is 'implant after hour 0; unit h';
comment on column record.support_end.transplant_h is 'transplant after hour 0; unit h';
comment on column record.support_end.withdrawal_reason is 'why support was withdrawn';
comment on column record.support_end.death_cause_group is 'cause of death on support';
comment on column record.support_end.organ_donation is 'organs were donated';
comment on column record.support_end.open_days is 'whole days on support at the extract, capped at 365, for open runs; unit d'

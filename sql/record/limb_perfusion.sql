-- One row per limb with, or deliberately without, a backflow cannula.
create table record.limb_perfusion (
  run_key text not null,
  limb_no integer not null,
  intent text,
  placed_h double,
  backflow_flow_ml_min double check (backflow_flow_ml_min between 0 and 1500),
  patency_lost_h double,
  reason_none text,
  primary key (run_key, limb_no)
);
comment on table record.limb_perfusion is 'Limb perfusion';
comment on column record.limb_perfusion.run_key is 'the run';
comment on column record.limb_perfusion.limb_no is 'order of the rows of this run';
comment on column record.limb_perfusion.intent is 'why the leg cannula was placed';
comment on column record.limb_perfusion.placed_h is 'placed; unit h';
comment on column record.limb_perfusion.backflow_flow_ml_min is 'flow in the leg cannula; unit mL/min';
comment on column record.limb_perfusion.patency_lost_h is 'lost patency; unit h';
comment on column record.limb_perfusion.reason_none is 'why there was none'

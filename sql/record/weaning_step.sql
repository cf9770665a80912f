-- One row per step of a weaning study; steps of one study share study_h.
create table record.weaning_step (
  run_key text not null,
  step_no integer not null,
  study_h double,
  flow_l_min double check (flow_l_min between 0 and 10),
  map_mmhg double check (map_mmhg between 0 and 250),
  cvp_mmhg double check (cvp_mmhg between -10 and 60),
  lvef_percent double check (lvef_percent between 0 and 90),
  lvot_vti_cm double check (lvot_vti_cm between 0 and 45),
  lateral_s_prime_cm_s double check (lateral_s_prime_cm_s between 0 and 30),
  result text,
  primary key (run_key, step_no)
);
comment on table record.weaning_step is 'Steps of weaning studies; steps of one study share study_h';
comment on column record.weaning_step.run_key is 'the run';
comment on column record.weaning_step.step_no is 'order of the rows of this run';
comment on column record.weaning_step.study_h is 'time of the study; unit h';
comment on column record.weaning_step.flow_l_min is 'pump flow at this step; unit L/min';
comment on column record.weaning_step.map_mmhg is 'mean arterial pressure; unit mm[Hg]';
comment on column record.weaning_step.cvp_mmhg is 'central venous pressure; unit mm[Hg]';
comment on column record.weaning_step.lvef_percent is 'LV ejection fraction; unit %';
comment on column record.weaning_step.lvot_vti_cm is 'LVOT velocity-time integral; unit cm';
comment on column record.weaning_step.lateral_s_prime_cm_s is 'lateral S prime; unit cm/s';
comment on column record.weaning_step.result is 'result of the study, if the source states one'

-- One row per run: the state in which support began, as booleans and classes of the source.
create table record.pre_support_state (
  run_key text primary key,
  had_arrest boolean,
  arrest_location text,
  extracorporeal_cpr boolean,
  shock_stage text,
  acute_coronary_syndrome boolean,
  stemi boolean,
  pci_done boolean,
  timi_flow_after_pci integer check (timi_flow_after_pci between 0 and 3),
  aortic_arch_surgery boolean,
  preoperative_stroke_or_unconscious boolean,
  intubation_hours double check (intubation_hours between 0 and 8760),
  ventilated_at_zero boolean,
  acute_renal_failure boolean,
  liver_failure boolean,
  cns_dysfunction boolean,
  confusion_at_presentation boolean,
  on_rrt_at_zero boolean,
  support_device_before boolean,
  compressions_at_cannulation boolean,
  lv_function text
);
comment on table record.pre_support_state is 'One row per run: the state in which support began';
comment on column record.pre_support_state.run_key is 'the run';
comment on column record.pre_support_state.had_arrest is 'cardiac arrest before support';
comment on column record.pre_support_state.arrest_location is 'place of that arrest';
comment on column record.pre_support_state.extracorporeal_cpr is 'pump started during compressions';
comment on column record.pre_support_state.shock_stage is 'shock stage given by the clinician, A to E';
comment on column record.pre_support_state.acute_coronary_syndrome is 'acute coronary syndrome as cause';
comment on column record.pre_support_state.stemi is 'ST-elevation infarction';
comment on column record.pre_support_state.pci_done is 'coronary intervention before support';
comment on column record.pre_support_state.timi_flow_after_pci is 'coronary flow grade after the intervention, 0 to 3';
comment on column record.pre_support_state.aortic_arch_surgery is 'the operation was on the aortic arch';
comment on column record.pre_support_state.preoperative_stroke_or_unconscious is 'stroke or unconsciousness before the operation';
comment on column record.pre_support_state.intubation_hours is 'intubated this long before hour 0; unit h; empty and not applicable if never intubated';
comment on column record.pre_support_state.ventilated_at_zero is 'ventilated at hour 0';
comment on column record.pre_support_state.acute_renal_failure is 'acute renal failure, as the source judged it';
comment on column record.pre_support_state.liver_failure is 'liver failure, as the source judged it';
comment on column record.pre_support_state.cns_dysfunction is 'dysfunction of the central nervous system, as the source judged it';
comment on column record.pre_support_state.confusion_at_presentation is 'confusion at presentation';
comment on column record.pre_support_state.on_rrt_at_zero is 'on renal replacement at hour 0';
comment on column record.pre_support_state.support_device_before is 'balloon or temporary pump before V-A';
comment on column record.pre_support_state.compressions_at_cannulation is 'compressions were going on: no native pressure then';
comment on column record.pre_support_state.lv_function is 'LV function as a word'

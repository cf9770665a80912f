-- One row per run: what a source with one row a run says of the cannulation. Detail, where there is any, stands in
-- record.cannula, record.circuit_configuration, record.limb_perfusion and record.monitoring_site.
create table record.cannulation (
  run_key text primary key,
  arterial_return text,
  leg_cannula boolean,
  right_sided_monitoring boolean,
  unloading_at_start boolean,
  technique text
);
comment on table record.cannulation is 'One row per run: cannulation as a source with one row a run states it';
comment on column record.cannulation.run_key is 'the run';
comment on column record.cannulation.arterial_return is 'where arterial blood is returned';
comment on column record.cannulation.leg_cannula is 'a limb backflow cannula was in place; the leg cannula belongs to femoral return';
comment on column record.cannulation.right_sided_monitoring is 'right-sided arterial line or oximetry: only it shows differential hypoxaemia';
comment on column record.cannulation.unloading_at_start is 'the left ventricle was unloaded from the start';
comment on column record.cannulation.technique is 'how the arterial cannula was placed'

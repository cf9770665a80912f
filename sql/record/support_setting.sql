-- Long: settings and pressures of the circuit.
create table record.support_setting (
  run_key text not null,
  setting_no integer not null,
  at_h double,
  blood_flow_l_min double check (blood_flow_l_min between 0 and 10),
  pump_speed_per_min double check (pump_speed_per_min between 0 and 15000),
  fresh_gas_flow_l_min double check (fresh_gas_flow_l_min between 0 and 20),
  gas_o2_fraction double check (gas_o2_fraction between 0.21 and 1),
  drainage_pressure_mmhg double check (drainage_pressure_mmhg between -500 and 60),
  pre_oxygenator_pressure_mmhg double check (pre_oxygenator_pressure_mmhg between 0 and 900),
  post_oxygenator_pressure_mmhg double check (post_oxygenator_pressure_mmhg between 0 and 900),
  arterial_pulsatility_mmhg double check (arterial_pulsatility_mmhg between 0 and 150),
  primary key (run_key, setting_no)
);
comment on table record.support_setting is 'Settings and pressures of the circuit';
comment on column record.support_setting.run_key is 'the run';
comment on column record.support_setting.setting_no is 'order of the rows of this run';
comment on column record.support_setting.at_h is 'time; unit h';
comment on column record.support_setting.blood_flow_l_min is 'blood flow; unit L/min';
comment on column record.support_setting.pump_speed_per_min is 'pump speed; unit /min';
comment on column record.support_setting.fresh_gas_flow_l_min is 'fresh gas; unit L/min; never zero while blood flows';
comment on column record.support_setting.gas_o2_fraction is 'oxygen fraction of the fresh gas; unit 1';
comment on column record.support_setting.drainage_pressure_mmhg is 'drainage pressure; unit mm[Hg]';
comment on column record.support_setting.pre_oxygenator_pressure_mmhg is 'before the oxygenator; unit mm[Hg]';
comment on column record.support_setting.post_oxygenator_pressure_mmhg is 'after the oxygenator; unit mm[Hg]';
comment on column record.support_setting.arterial_pulsatility_mmhg is 'arterial pulsatility; unit mm[Hg]'

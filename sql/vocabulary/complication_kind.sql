-- Complications of support. Grain: one row a kind; adding a kind is one line here.
-- gap_h: a new event of the same kind within this many hours of the last one is the same episode.
-- window_h: an event up to this many hours after the end of support still counts in "x of N", never in a rate.
-- from_h: hours after the start before which a run is not yet at risk. at_risk: all | femoral | monitored | no_rrt.
-- Sources: definitions as named in each line; gaps and windows without a paper behind them are choices of this project.
select * from (values
  ('bleeding_cannulation_site', 'bleeding at a cannulation site',   'bleeding',          24.0,  24.0,  0.0, 'all',       'BARC type 3 or more (Mehran 2011, Circulation 123:2736)'),
  ('bleeding_gastrointestinal', 'gastrointestinal bleeding',        'bleeding',          24.0,  24.0,  0.0, 'all',       'BARC type 3 or more (Mehran 2011, Circulation 123:2736)'),
  ('bleeding_surgical_site',    'bleeding at a surgical site',      'bleeding',          24.0,  24.0,  0.0, 'all',       'universal perioperative definition (Dyke 2014, doi:10.1016/j.jtcvs.2013.10.070)'),
  ('bleeding_other',            'other bleeding',                   'bleeding',          24.0,  24.0,  0.0, 'all',       'BARC type 3 or more (Mehran 2011, Circulation 123:2736)'),
  ('stroke',                    'stroke, kind not stated',          'neurological',      24.0, 168.0,  0.0, 'all',       'updated stroke definition (Sacco 2013, Stroke 44:2064)'),
  ('stroke_ischaemic',          'ischaemic stroke',                 'neurological',      24.0, 168.0,  0.0, 'all',       'updated stroke definition (Sacco 2013, Stroke 44:2064)'),
  ('intracranial_haemorrhage',  'intracranial haemorrhage',         'neurological',      24.0, 168.0,  0.0, 'all',       'updated stroke definition (Sacco 2013, Stroke 44:2064)'),
  ('limb_ischaemia',            'limb ischaemia',                   'limb',              24.0,  48.0,  0.0, 'femoral',   'acute limb ischaemia classes (Rutherford 1997, J Vasc Surg 26:517)'),
  ('compartment_syndrome',      'compartment syndrome',             'limb',              24.0,  48.0,  0.0, 'femoral',   'project definition: fasciotomy or measured pressure'),
  ('vascular_injury',           'vascular injury',                  'limb',               0.0, 720.0,  0.0, 'all',       'project definition: by vessel and phase'),
  ('differential_hypoxaemia',   'differential hypoxaemia',          'oxygenation',        6.0,   0.0,  0.0, 'monitored', 'project definition: right-sided PaO2 below 60 mm[Hg] while post-oxygenator PaO2 is above 150'),
  ('lv_distension',             'left ventricular distension',      'left ventricle',    24.0,   0.0,  0.0, 'all',       'three-level definition (Truby 2017, doi:10.1097/MAT.0000000000000553)'),
  ('intracardiac_thrombus',     'intracardiac or root thrombus',    'left ventricle',     0.0,   0.0,  0.0, 'all',       'project definition: imaging or operative finding'),
  ('haemolysis',                'haemolysis',                       'circuit',           24.0,   0.0,  0.0, 'all',       'plasma free haemoglobin above 500 mg/L (Omar 2015, PLoS One 10:e0124034)'),
  ('circuit_thrombosis',        'circuit thrombosis, part not stated', 'circuit',         0.0,   0.0,  0.0, 'all',       'project definition: one event a component change'),
  ('oxygenator_thrombosis',     'oxygenator thrombosis',            'circuit',            0.0,   0.0,  0.0, 'all',       'project definition: one event a component change'),
  ('pump_head_thrombosis',      'pump-head thrombosis',             'circuit',            0.0,   0.0,  0.0, 'all',       'project definition: one event a component change'),
  ('gas_transfer_failure',      'gas-transfer failure of the oxygenator', 'circuit',      0.0,   0.0,  0.0, 'all',       'project definition: one event a component change'),
  ('pump_failure',              'pump failure',                     'circuit',            0.0,   0.0,  0.0, 'all',       'project definition: one event a stop'),
  ('cannula_dislodgement',      'cannula dislodgement',             'circuit',            0.0,   0.0,  0.0, 'all',       'project definition: one event a displacement'),
  ('air_entrainment',           'air entrainment',                  'circuit',            0.0,   0.0,  0.0, 'all',       'project definition: one event a stop or embolus'),
  ('infection_bloodstream',     'bloodstream infection',            'infection',        336.0,  48.0, 48.0, 'all',       'the unit''s surveillance criteria; onset from 48 h (Kim 2017, J Korean Med Sci 32:4)'),
  ('infection_respiratory',     'lower respiratory infection',      'infection',        336.0,  48.0, 48.0, 'all',       'the unit''s surveillance criteria; onset from 48 h (Kim 2017, J Korean Med Sci 32:4)'),
  ('infection_cannula_site',    'cannula-site infection',           'infection',        336.0,  48.0, 48.0, 'all',       'the unit''s surveillance criteria; onset from 48 h (Kim 2017, J Korean Med Sci 32:4)'),
  ('infection_other',           'other infection',                  'infection',        336.0,  48.0, 48.0, 'all',       'the unit''s surveillance criteria; onset from 48 h (Kim 2017, J Korean Med Sci 32:4)'),
  ('acute_kidney_injury',       'acute kidney injury',              'kidney',           168.0,  48.0,  0.0, 'no_rrt',    'KDIGO 2012, Kidney Int Suppl 2:1'),
  ('renal_replacement',         'renal replacement therapy',        'kidney',           168.0,  48.0,  0.0, 'no_rrt',    'KDIGO 2012, Kidney Int Suppl 2:1'),
  ('arrest_on_support',         'cardiac arrest during support',    'arrest',             0.34,  0.0,  0.0, 'all',       'project definition: until a perfusing rhythm of 20 min')
) as t(kind, label, family, gap_h, window_h, from_h, at_risk, source)

-- When a measurement was taken, as a label. Grain: one row a window. `is_pre_support`: known at time zero.
select * from (values
  ('home_baseline',  'usual value at home',                    true),
  ('admission',      'at hospital admission',                  true),
  ('shock_onset',    'when shock began',                       true),
  ('pre_worst_6h',   'worst in the 6 h before support',        true),
  ('pre_worst_24h',  'worst in the 24 h before support',       true),
  ('pre_last',       'last before support',                    true),
  ('pre_undated',    'before support, time not recorded',      true),
  ('arrest',         'during the arrest',                      true),
  ('post_1h',        '1 h after the start',                    false),
  ('post_6h',        '6 h after the start',                    false),
  ('post_12h',       '12 h after the start',                   false),
  ('post_24h',       '24 h after the start',                   false),
  ('wean_step',      'during a weaning study',                 false),
  ('pre_end',        'last before the end of support',         false)
) as t(window_label, meaning, is_pre_support)

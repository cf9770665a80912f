-- How support ended. Grain: one row a kind. `cause` is the code in competing-risk analysis; 0 = censored, not an ending.
-- `pathway` is the bridge pathway: the way the run is seen to have taken, known only afterwards.
select * from (values
  ('recovery',        'recovery',            1, 'recovery',              'all arterial return cannulae out, no device left in place'),
  ('durable_lvad',    'durable LVAD',        2, 'durable LVAD',          'support stopped at, or within 24 h of, a durable implant'),
  ('transplantation', 'transplantation',     3, 'transplantation',       'graft implanted'),
  ('death',           'death on support',    4, 'death or withdrawal',   'heart or brain death while the pump ran'),
  ('withdrawal',      'support withdrawn',   4, 'death or withdrawal',   'pump stopped with death expected'),
  ('temporary_pump',  'temporary pump',      5, 'other exit',            'V-A off, a temporary ventricular pump stays'),
  ('crossover_vv',    'crossover to V-V',    5, 'other exit',            'the last arterial return was closed, venous return runs on'),
  ('transfer_out',    'transfer out',        0, 'transfer out',          'left the centre on support; what followed is known only if the receiving centre says so'),
  ('open',            'still on support',    0, 'still on support',      'on support when the extract was made')
) as t(end_kind, label, cause, pathway, meaning)

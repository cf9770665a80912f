-- The bridge aimed at when support began. Grain: one row a plan. Known at time zero only if the source wrote it then.
select * from (values
  ('recovery',        'recovery',        'the heart is expected to recover'),
  ('decision',        'decision',        'the aim is open until more is known'),
  ('durable_lvad',    'durable LVAD',    'a durable pump is the aim'),
  ('transplantation', 'transplantation', 'a transplant is the aim'),
  ('unknown',         'unknown',         'no plan was stated')
) as t(intended_pathway, label, meaning)

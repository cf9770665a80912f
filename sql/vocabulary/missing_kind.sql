-- Why a value is not there. Grain: one row a reason.
select * from (values
  ('not_recorded',   'not recorded',   'the source has no value, or a token for unknown'),
  ('not_applicable', 'not applicable', 'the question does not arise for this run'),
  ('none',           'none',           'the source says that it did not happen'),
  ('set_aside',      'set aside',      'a value was there and was refused; see the findings of its batch'),
  ('not_carried',    'not carried',    'this source has no such column')
) as t(missing_kind, label, meaning)

-- Grain: one row a support run that was observed for some time: how support ended, as competing causes.
-- A run transferred in at an unknown time is left out: it had to survive until then, and how long that was is not known.
-- cause 0 is censored: still on support, or transferred out (is_transferred_out, so that it can be taken as competing).
select
  run_key, person_key, source_key, run_year, is_extracorporeal_cpr, intended_pathway, plan_is_from_start, pathway, end_kind,
  support_h as time_h, entry_h, cause,
  end_kind = 'transfer_out' as is_transferred_out, end_kind = 'open' as is_open
from mart.run
where support_h > 0 and support_h > entry_h and not has_unknown_entry
order by run_key

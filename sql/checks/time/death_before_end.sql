-- effect: run
-- column: follow_up.death
-- needs: 
-- of: follow_up
-- rule: the death must not come before the end of a support that was survived
select f.run_key, f.sheet_no, f.line
from candidate.follow_up f join candidate.support_end e using (run_key)
where f.death_h < e.end_h - 0.02
  and e.end_kind in ('recovery', 'durable_lvad', 'transplantation', 'crossover_vv', 'temporary_pump')

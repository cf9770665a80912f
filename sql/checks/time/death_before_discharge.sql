-- effect: run
-- column: follow_up.death
-- needs: 
-- of: follow_up
-- rule: the death must not come before a discharge alive
select f.run_key, f.sheet_no, f.line
from candidate.follow_up f join candidate.hospital_outcome o using (run_key)
where f.death_h < o.discharge_h - 1 and o.is_alive_at_discharge

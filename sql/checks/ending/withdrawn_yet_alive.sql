-- effect: note
-- column: hospital_outcome.is_alive_at_discharge
-- needs: 
-- of: hospital_outcome
-- rule: survival after withdrawal is rare but real; check it
select o.run_key, o.sheet_no, o.line
from candidate.hospital_outcome o join candidate.support_end e using (run_key)
where e.end_kind = 'withdrawal' and o.is_alive_at_discharge

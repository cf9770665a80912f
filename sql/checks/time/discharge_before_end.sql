-- effect: run
-- column: hospital_outcome.discharge
-- needs: 
-- of: hospital_outcome
-- rule: the discharge must not come before the end of support
select o.run_key, o.sheet_no, o.line
from candidate.hospital_outcome o join candidate.support_end e using (run_key)
where o.discharge_h < e.end_h - 0.02 and e.end_kind <> 'transfer_out'

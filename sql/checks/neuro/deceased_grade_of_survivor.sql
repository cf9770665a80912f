-- effect: cell
-- column: neuro_outcome.cpc
-- needs: 
-- of: neuro_outcome
-- rule: grade 5 of the CPC and grade 6 of the Rankin scale mean dead
select n.run_key, n.sheet_no, n.line, 'neuro_outcome.' || n.scale as field
from candidate.neuro_outcome n join candidate.hospital_outcome o using (run_key)
where ((n.scale = 'cpc' and n.value = 5) or (n.scale = 'mrs' and n.value = 6)) and o.is_alive_at_discharge

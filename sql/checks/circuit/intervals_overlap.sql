-- effect: row
-- column: circuit_configuration.from
-- needs: 
-- of: circuit_configuration
-- rule: configuration intervals of one run overlap
select distinct a.run_key, a.sheet_no, a.line
from candidate.circuit_configuration a join candidate.circuit_configuration b
  on a.run_key = b.run_key and (a.from_h, a.line) > (b.from_h, b.line)
where a.from_h < coalesce(b.to_h, 1e9) - 0.02

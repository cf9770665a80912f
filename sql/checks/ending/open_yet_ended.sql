-- effect: run
-- column: support_end.end
-- needs: 
-- of: support_end
-- rule: no end of support is given, yet an ending or a discharge is
select e.run_key, e.sheet_no, e.line
from candidate.support_end e left join candidate.hospital_outcome o using (run_key)
where e.end_h is null and (e.end_kind <> 'open' or o.discharge_h is not null)

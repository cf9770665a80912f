-- effect: run
-- column: support_end.end
-- needs: support_end.kind
-- of: support_run
-- rule: nothing is said of the end of support
select r.run_key, r.sheet_no, r.line
from candidate.support_run r
where r.line is not null and not exists (select 1 from candidate.support_end e where e.run_key = r.run_key)

-- effect: run
-- column: support_run.start
-- needs: 
-- of: support_run
-- rule: an earlier run of this person is open or ended in death
select b.run_key, b.sheet_no, b.line
from candidate.support_run a
join candidate.support_end e on e.run_key = a.run_key
join candidate.support_run b on a.person_key = b.person_key and b.hours_from_first_run > a.hours_from_first_run
where e.end_kind in ('death', 'open') and a.run_key not in (select run_key from work.set_aside)

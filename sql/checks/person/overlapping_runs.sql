-- effect: run
-- column: support_run.start
-- needs: 
-- of: support_run
-- rule: two runs of one person overlap
with spans as (
  select r.run_key, r.person_key, r.sheet_no, r.line, r.hours_from_first_run as from_h, r.hours_from_first_run + e.end_h as to_h
  from candidate.support_run r join candidate.support_end e using (run_key)
  where r.hours_from_first_run is not null and e.end_h is not null
    and r.run_key not in (select run_key from work.set_aside)
)
select distinct a.run_key, a.sheet_no, a.line
from spans a join spans b on a.person_key = b.person_key and a.run_key <> b.run_key
where a.from_h < b.to_h - 0.02 and b.from_h < a.to_h - 0.02

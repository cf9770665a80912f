-- effect: row
-- column: weaning_step.study
-- needs: 
-- of: weaning_step
-- rule: a weaning study cannot come after the end of support
select w.run_key, w.sheet_no, w.line
from candidate.weaning_step w join candidate.support_end e using (run_key)
where w.study_h > e.end_h + 0.02

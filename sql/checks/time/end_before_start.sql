-- effect: run
-- column: support_end.end
-- needs: 
-- of: support_end
-- rule: support must end after it began
select run_key, sheet_no, line from candidate.support_end where end_h <= 0

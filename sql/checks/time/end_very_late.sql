-- effect: note
-- column: support_end.end
-- needs: 
-- of: support_end
-- rule: support of more than 120 days is rare; check the clock
select run_key, sheet_no, line from candidate.support_end where end_h > 120 * 24

-- effect: run
-- column: support_end.kind
-- needs: 
-- of: support_end
-- rule: something is said of the end of support, but not how it ended
select run_key, sheet_no, line from candidate.support_end where end_kind is null

-- effect: run
-- column: support_end.kind
-- needs: 
-- of: support_end
-- rule: support ended, but it is not said how
select run_key, sheet_no, line from candidate.support_end where end_h is not null and end_kind is null

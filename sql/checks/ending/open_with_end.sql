-- effect: run
-- column: support_end.kind
-- needs: 
-- of: support_end
-- rule: the run is called open, yet an end is given
select run_key, sheet_no, line from candidate.support_end where end_h is not null and end_kind = 'open'

-- effect: note
-- column: follow_up.vital_status
-- needs: 
-- of: follow_up
-- rule: dead at follow-up, but the row has no date of it
select run_key, sheet_no, line from candidate.follow_up where vital_status = 'dead' and death_h is null

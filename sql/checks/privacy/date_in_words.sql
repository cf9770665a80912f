-- effect: cell
-- column: complication_event.grade
-- needs: 
-- of: complication_event
-- rule: a word looks like a date or an identifier
select run_key, sheet_no, line from candidate.complication_event
where regexp_matches(grade, '[0-9]{5}|[0-9]{1,4}[-./][0-9]{1,2}[-./][0-9]{1,4}')

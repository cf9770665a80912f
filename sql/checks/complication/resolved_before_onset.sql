-- effect: cell
-- column: complication_event.resolved
-- needs: complication_event.resolved
-- of: complication_event
-- rule: an event cannot be over before it began
select run_key, sheet_no, line from candidate.complication_event where resolved_h < onset_h

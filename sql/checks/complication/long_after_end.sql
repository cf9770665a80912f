-- effect: row
-- column: complication_event.onset
-- needs: 
-- of: complication_event
-- rule: the onset lies after the end of support and the attribution window of its kind
select c.run_key, c.sheet_no, c.line, 'complication.' || c.kind as field
from candidate.complication_event c
join candidate.support_end e using (run_key)
join vocabulary.complication_kind k using (kind)
where c.onset_h > e.end_h + k.window_h + 0.02

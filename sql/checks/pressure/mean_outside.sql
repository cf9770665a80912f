-- effect: cell
-- column: measurement.map
-- needs: 
-- of: measurement
-- rule: mean pressure must lie between diastolic and systolic pressure of the same reading
select m.run_key, m.sheet_no, m.line
from candidate.measurement m
join candidate.measurement s using (run_key, window_label, sheet_no, line)
join candidate.measurement d using (run_key, window_label, sheet_no, line)
where m.analyte = 'map' and s.analyte = 'sbp' and d.analyte = 'dbp' and m.reading = s.reading and m.reading = d.reading
  and d.value < s.value and (m.value > s.value or m.value < d.value)

-- effect: cell
-- column: measurement.dbp
-- needs: 
-- of: measurement
-- rule: diastolic pressure must lie below systolic pressure of the same reading
select d.run_key, d.sheet_no, d.line, unnest(['measurement.dbp', 'measurement.sbp']) as field
from candidate.measurement d
join candidate.measurement s using (run_key, window_label, sheet_no, line)
where d.analyte = 'dbp' and s.analyte = 'sbp' and d.reading = s.reading and d.value >= s.value

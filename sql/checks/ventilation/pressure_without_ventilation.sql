-- effect: cell
-- column: measurement.peak_inspiratory_pressure
-- needs: pre_support_state.ventilated_at_zero
-- of: measurement
-- rule: an airway pressure is given, yet the run is called never ventilated
select m.run_key, m.sheet_no, m.line
from candidate.measurement m join candidate.pre_support_state p using (run_key)
where m.analyte = 'peak_inspiratory_pressure' and p.ventilated_at_zero = false

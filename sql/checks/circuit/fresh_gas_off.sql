-- effect: note
-- column: support_setting.fresh_gas_flow_l_min
-- needs: 
-- of: support_setting
-- rule: fresh gas is never zero while blood flows (common practice); kept
select run_key, sheet_no, line from candidate.support_setting where fresh_gas_flow_l_min = 0 and blood_flow_l_min > 0

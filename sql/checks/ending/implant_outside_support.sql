-- effect: note
-- column: support_end.device_implant
-- needs: support_end.device_implant
-- of: support_end
-- rule: the implant lies before the start or more than 24 h after the end
select run_key, sheet_no, line from candidate.support_end
where end_kind = 'durable_lvad' and (device_implant_h < 0 or device_implant_h > end_h + 24)

-- effect: run
-- column: support_end.device_implanted
-- needs: support_end.device_implanted
-- of: support_end
-- rule: a durable pump at the end is durable LVAD, not recovery
select run_key, sheet_no, line from candidate.support_end
where end_kind = 'recovery' and device_implanted in ('durable_lvad', 'durable_bivad', 'total_artificial_heart')

-- effect: note
-- column: cannulation.leg_cannula
-- needs: 
-- of: cannulation
-- rule: the leg cannula belongs to femoral return (common practice)
select run_key, sheet_no, line from candidate.cannulation where leg_cannula and arterial_return <> 'femoral'

-- effect: run
-- column: person.birth_date
-- needs: 
-- of: support_run
-- rule: the programme supports adults: no possible age is 18 or more
select run_key, sheet_no, line from candidate.support_run where age_years < 18

-- effect: cell
-- column: arrest_episode.low_flow_min
-- needs: pre_support_state.had_arrest
-- of: arrest_episode
-- rule: low-flow minutes are given, yet there was no arrest
select a.run_key, a.sheet_no, a.line
from candidate.arrest_episode a join candidate.pre_support_state p using (run_key)
where a.low_flow_min is not null and p.had_arrest = false

"""Published pre-support scores: one TOML file a score, one engine that reads them.

Start at `engine.compute` (answers), `catalogue.list_scores` (what there is), `sheet.describe_score`
(what a score is), `gate.usable_for_expectation` (may it enter an observed/expected), `checking.check_table`
(a table of one's own) and `learn` (scikit-learn faces).
"""

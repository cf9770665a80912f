"""The manual: its page of scores is current, its example runs, and the caution stands wherever scores are met."""

from __future__ import annotations

import io
import re
from contextlib import redirect_stdout

import numpy as np
import pytest
from sklearn.metrics import roc_auc_score

from outcomes.resources import report_files
from outcomes.scores.catalogue import our_catalogue
from outcomes.scores.page import manual_page, sheet_lines
from outcomes.scores.sheet import CAUTION, describe_score

MANUAL = dict(report_files("manual"))
BEDSIDE = re.compile(r"inform audit and research; they do not decide about support at the bedside")


def test_the_page_of_scores_is_current():
    """Made anew by: python -m outcomes.scores.page > reports/manual/050_scores.md"""
    assert MANUAL["050_scores.md"] == manual_page()


def test_the_page_of_scores_has_every_score_with_evidence_beside_its_lines():
    for score in our_catalogue().scores():
        sheet = MANUAL["050_scores.md"].split(f"## {score.name}\n", 1)[1].split("\n## ", 1)[0]
        lines = [line for line in sheet.splitlines() if line.startswith(("points ", "class "))]
        assert bool(lines) == score.is_implemented
        tags = ("(verified)", "(second-hand)", "(from memory)", "(convention)")
        assert all(line.endswith(tags) for line in lines)


@pytest.mark.parametrize("name", ["050_scores.md", "060_researchers.md"])
def test_the_caution_stands_in_the_manual(name):
    assert BEDSIDE.search(" ".join(MANUAL[name].split()))


@pytest.mark.parametrize("key", our_catalogue().keys)
def test_the_caution_stands_on_every_sheet(key):
    assert sheet_lines(describe_score(key))[-1] == CAUTION
    assert BEDSIDE.search(CAUTION)


def test_the_example_for_researchers_runs_and_recalibrates():
    """Every run gets a probability, on average the share that survived (logistic regression with an intercept), and
    in a cohort whose severity is planted the score separates on the right side of chance."""
    code = re.findall(r"^```\n(.*?)^```$", MANUAL["060_researchers.md"], flags=re.DOTALL | re.MULTILINE)
    room: dict[str, object] = {}
    with redirect_stdout(io.StringIO()) as printed:
        exec(compile("\n".join(code), "060_researchers.md", "exec"), room)
    recalibrated, fitted, known = (np.asarray(room[name]) for name in ("recalibrated", "fitted", "y"))
    assert len(recalibrated) == len(fitted) == len(known) > 1000
    for chance in (recalibrated, fitted):
        assert ((chance > 0) & (chance < 1)).all()
        assert abs(chance.mean() - known.mean()) < 0.01
        assert roc_auc_score(known, chance) > 0.52
    assert "SAVE, recalibrated" in printed.getvalue() and "fitted model" in printed.getvalue()

"""Every reference case through the public functions, at 1e-8 or the case's own wider tolerance."""

from __future__ import annotations

import os

import pandas as pd
import pytest
from harness import LOADERS, OUTSIDE, Case, cases, dataset, differences, joined, missing_data, of, outside

ANSWERED = 129  # cases; raise it when another module of answers joins


def skip(why: str) -> None:
    """Skips by name; never in continuous integration where the folder of data is there."""
    assert not (os.environ.get("CI") == "true" and OUTSIDE.is_dir()), why
    pytest.skip(why)


@pytest.mark.parametrize("case", [c for c in cases() if of("ANSWERS", c)], ids=lambda c: c.id)
def test_case_agrees(case: Case) -> None:
    lacking = missing_data(case)
    if lacking:
        skip(f"{case.id}: data of an R package ({', '.join(lacking)}) are not here")
    assert differences(case, of("ANSWERS", case)(case)) == []


@pytest.mark.parametrize("name", sorted(LOADERS))
def test_loader_gives_the_data_that_the_cases_were_computed_on(name: str) -> None:
    if not outside(name).exists():
        skip(f"{name}: the file of the R package is not here")
    theirs = pd.read_csv(outside(name))
    ours = dataset(name)[list(theirs.columns)].reset_index(drop=True)
    pd.testing.assert_frame_equal(ours, theirs, check_dtype=False, rtol=0, atol=1e-6)


def test_every_key_of_an_answers_module_is_a_case_or_a_method() -> None:
    known = {c.id for c in cases()} | {c.method for c in cases()}
    unknown = [key for part in joined().values() for key in part if key not in known]
    assert unknown == []


def test_a_method_is_answered_for_all_its_cases() -> None:
    """A method with an answer for one case has one, or a stated reason for none, for each of its cases."""
    reached = {c.method for c in cases() if of("ANSWERS", c)}
    forgotten = [c.id for c in cases() if c.method in reached and not (of("ANSWERS", c) or of("LEFT_OUT", c))]
    assert forgotten == []
    assert sum(bool(of("ANSWERS", c)) for c in cases()) >= ANSWERED

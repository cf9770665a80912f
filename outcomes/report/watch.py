"""Runs an analysis; every warning of a library becomes a coded caution or stops the report."""

from __future__ import annotations

import re
import warnings
from collections.abc import Callable
from dataclasses import replace

from outcomes.analysis.result import Caution
from outcomes.errors import OutcomesError
from outcomes.study.answer import Answer

# (category name, start of the message) → caution. Only warnings that have been understood stand here.
_KNOWN: tuple[tuple[str, str, Caution], ...] = (
    (
        "ConvergenceWarning",
        "",
        Caution("NOCONV", "A model did not settle on one answer; no estimate is printed from it."),
    ),
    (
        "PerfectSeparationWarning",
        "",
        Caution("SEP", "A predictor separates the endings completely; no ratio can be estimated from it."),
    ),
    (
        "UndefinedMetricWarning",
        "",
        Caution(
            "ONE",
            "Only one kind of ending occurred in a group; a measure of separation has no meaning there.",
        ),
    ),
)


def watched(run: Callable[[], Answer]) -> Answer:
    """The answer of `run`, with a caution for every known warning raised inside it.

    OutcomesError REPORT.UNKNOWN-WARNING for any other: its text is not shown, since it may hold a value.
    """
    with warnings.catch_warnings(record=True) as raised:
        warnings.simplefilter("always")
        answer = run()
    cautions = [_caution(warning) for warning in raised]
    return replace(answer, cautions=tuple(dict.fromkeys([*answer.cautions, *cautions])))


def _caution(warning: warnings.WarningMessage) -> Caution:
    for category, start, caution in _KNOWN:
        if warning.category.__name__ == category and re.match(start, str(warning.message)):
            return caution
    raise OutcomesError(
        "REPORT.UNKNOWN-WARNING",
        f"an analysis raised a warning nobody has judged ({warning.category.__name__})",
        where=f"line {warning.lineno} of the module that raised it",
        todo="report this as a fault of the program",
    )

"""Who was supported and what is missing: baseline tables, missing values, standardised differences. No P
values."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd

from outcomes.analysis._input import Floats, floats_or_missing, groups, in_order, need_rows, word
from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.analysis.standard_difference import standardised_difference
from outcomes.errors import InputRefused

__all__ = ["baseline", "missing_patterns", "missingness", "standardised_difference"]

COLUMNS = (
    "group", "variable", "value", "kind", "median", "q25", "q75", "mean", "std_dev", "count", "share",
    "known", "n", "reason",
)  # fmt: skip
MISSING_COLUMNS = (
    "group", "variable", "present", "missing", "not_applicable", "withheld", "eligible", "share", "n",
    "reason",
)  # fmt: skip
ABSENT = ("missing", "not_applicable", "withheld")
SOME, MANY = 0.10, 0.40
HUGE = 1e100
_QUANTILE = "Hyndman RJ, Fan Y. Am Stat 1996;50:361-365."


def baseline(frame: pd.DataFrame, *, group: Any = None, categorical: Sequence[str] = (),
             known_at: Any = None) -> Result:  # fmt: skip
    """What the runs were like, over all of them and by group.

    frame: one row a run, one column a variable. Numbers give median with 25th and 75th percentile (type
    7), mean and SD (n − 1); text, booleans, categories and the columns of `categorical` give x of those
    known for every level that occurs (or is declared). group: a label for each run, known at time zero;
    known_at as in `kaplan_meier`.

    Result: rows of group '' (everyone), then of each group. kind: number (value ''), level (value its
    label), missing (count and share of n, for every variable). count and known for each; share of a level
    is count over known. A group without runs keeps its rows (empty_group). Nothing known: no_runs; an SD
    of one value: one_run.

    Raises InputRefused; NotEstimable no_runs, grouping_from_the_future. Source: Hyndman & Fan 1996 (type 7).

    >>> r = baseline(pd.DataFrame({"age": [1, 2, 4, 8, 16, 32]})).table.iloc[0]
    >>> [float(r[c]) for c in ("q25", "median", "q75")]
    [2.5, 6.0, 14.0]
    """
    need_rows(len(frame))
    unknown = set(categorical) - set(map(str, frame.columns))
    if unknown or frame.columns.duplicated().any():
        raise InputRefused(
            "columns", "a categorical column is not in the frame, or two columns have one name"
        )
    members = [("", np.ones(len(frame), dtype=bool))]
    members += groups(group, len(frame), known_at) if group is not None else []
    variables = [_variable(str(name), frame[name], str(name) in categorical) for name in frame.columns]
    rows = [row for label, inside in members for v in variables for row in v.rows(label, inside)]
    method = Method("median and quartiles type 7, mean and SD, x of those known", citations=(_QUANTILE,))
    found = {label or "n": int(inside.sum()) for label, inside in members}
    return Result(tidy(rows, COLUMNS, ("variable", "value", "kind")), method, found)


@dataclass(frozen=True)
class _Variable:
    """numbers: NaN where missing, or None for labels; labels: None where missing."""

    name: str
    numbers: Floats | None
    labels: Any
    levels: tuple[str, ...]

    def rows(self, label: str, inside: Any) -> Iterator[dict[str, object]]:
        n = int(inside.sum())
        absent = np.isnan(self.numbers) if self.numbers is not None else pd.isna(self.labels)
        known = inside & ~absent
        base: dict[str, object] = {
            "group": label,
            "variable": self.name,
            "value": "",
            "n": n,
            "known": int(known.sum()),
        }
        empty: dict[str, object] = {} if known.any() else {"reason": "no_runs" if n else "empty_group"}
        if self.numbers is not None:
            yield (
                base
                | {"kind": "number", "count": int(known.sum())}
                | (empty or _numbers(self.numbers[known]))
            )
        for level in self.levels:
            count = int((self.labels[known] == level).sum())
            row = base | {"kind": "level", "value": level, "count": count}
            yield row | (empty or {"share": count / int(known.sum())})
        gone = n - int(known.sum())
        row = base | {"kind": "missing", "count": gone}
        yield row | ({"share": gone / n} if n else empty)


def _numbers(values: Floats) -> dict[str, object]:
    ordered, largest = np.sort(values), float(np.abs(values).max())
    scale = largest if largest > HUGE else 1.0  # squares of larger numbers overflow
    q25, median, q75 = (scale * float(v) for v in np.quantile(ordered / scale, [0.25, 0.5, 0.75]))
    mean = scale * float((ordered / scale).mean())
    row: dict[str, object] = {"median": median, "q25": q25, "q75": q75, "mean": mean}
    if len(ordered) < 2:
        return row | {"reason": "one_run"}
    return row | {"std_dev": scale * float((ordered / scale).std(ddof=1))}


def _variable(name: str, column: pd.Series, as_levels: bool) -> _Variable:
    is_number = pd.api.types.is_numeric_dtype(column.dtype) and not pd.api.types.is_bool_dtype(column.dtype)
    if is_number and not as_levels:
        numbers = floats_or_missing(column, name)
        if np.isinf(numbers).any():
            raise InputRefused("not_finite", f"{name} has an infinite value")
        return _Variable(name, numbers, None, ())
    labels = np.array([None if pd.isna(v) else word(v) for v in column.astype(object)], dtype=object)
    if isinstance(column.dtype, pd.CategoricalDtype):
        levels = [word(v) for v in column.cat.categories]
    else:
        levels = in_order({str(v) for v in labels if v is not None})
    return _Variable(name, None, labels, tuple(levels))


def missingness(
    frame: pd.DataFrame, *, reasons: Mapping[str, Any] | None = None, outcome: Any = None
) -> Result:
    """What is missing, by variable: over all runs and by outcome. Whether it is missing at random cannot
    be tested.

    frame: one row a run, one column a variable; NaN, None or NA is not there. reasons: variable → for
    each run 'missing', 'not_applicable', 'withheld' or '' ; a value that is not there without a reason
    counts as missing. outcome: a label for each run, for instance of death before 24 hours; runs of
    unknown outcome need a label of their own.

    Result: rows of group '' (everyone), then of each outcome, one a variable: present + missing +
    not_applicable + withheld = n; eligible leaves out not_applicable; share is missing over eligible
    (nobody eligible: no_runs). Cautions MISS where more than 10% or 40% of all runs lack a variable.

    Raises InputRefused; NotEstimable no_runs.

    >>> r = missingness(pd.DataFrame({"lactate": [1.0, None, 3.0, None]}))
    >>> float(r.table["share"].iloc[0]), r.notes[0].code
    (0.5, 'MISS')
    """
    need_rows(len(frame))
    states = _states(frame, reasons or {})
    members = [("", np.ones(len(frame), dtype=bool))]
    members += groups(outcome, len(frame)) if outcome is not None else []
    rows, notes = [], []
    for label, inside in members:
        for name, state in states.items():
            row: dict[str, object] = {"group": label, "variable": name, "n": int(inside.sum())}
            row |= {kind: int((state[inside] == kind).sum()) for kind in ("present", *ABSENT)}
            eligible = int((state[inside] != "not_applicable").sum())
            lacking = int((state[inside] == "missing").sum())
            row |= {"eligible": eligible} | (
                {"share": lacking / eligible} if eligible else {"reason": "no_runs"}
            )
            rows.append(row)
            if not label and eligible and lacking / eligible > SOME:
                notes.append(_miss(name, lacking / eligible))
    method = Method("missing of those eligible")
    return Result(tidy(rows, MISSING_COLUMNS, ("variable",)), method, {"n": len(frame)}, tuple(notes))


def _miss(name: str, share: float) -> Caution:
    if share > MANY:
        return Caution("MISS", f"{name} is missing in more than 40%: not for a model without imputation.")
    return Caution("MISS", f"{name} is missing in more than 10%.")


def _states(frame: pd.DataFrame, reasons: Mapping[str, Any]) -> dict[str, Any]:
    if set(reasons) - set(map(str, frame.columns)):
        raise InputRefused("columns", "a reason is given for a variable that is not in the frame")
    out = {}
    for column in frame.columns:
        name = str(column)
        there = frame[column].notna().to_numpy()
        told = np.asarray(reasons.get(name, np.full(len(frame), "", dtype=object)), dtype=object)
        if len(told) != len(frame) or not set(told) <= {"", *ABSENT} or (there & (told != "")).any():
            raise InputRefused("reason", "a reason is unknown, or stands beside a value that is there")
        out[name] = np.where(there, "present", np.where(told == "", "missing", told))
    return out


def missing_patterns(frame: pd.DataFrame, *, least: int = 1) -> Result:
    """Which variables are missing together. Columns: group (their names, ', ' between; '' for complete
    runs), count, share, n; the most common first. Patterns of fewer than `least` runs are added up under
    'others'.

    Raises InputRefused; NotEstimable no_runs.
    """
    need_rows(len(frame))
    absent = frame.isna().to_numpy()
    names = [str(c) for c in frame.columns]
    found = pd.Series(
        [", ".join(n for n, gone in zip(names, row, strict=True) if gone) for row in absent]
    ).value_counts()
    common = sorted(
        ((str(k), int(v)) for k, v in found.items() if v >= least), key=lambda kv: (-kv[1], kv[0])
    )
    rest = len(frame) - sum(count for _, count in common)
    listed = [*common, ("others", rest)] if rest else common
    rows = [{"group": k, "count": v, "share": v / len(frame), "n": len(frame)} for k, v in listed]
    table = tidy(rows, ("group", "count", "share", "n", "reason"))
    complete = int((~absent.any(axis=1)).sum())
    return Result(table, Method("patterns of missing values"), {"n": len(frame), "complete": complete})

"""The one engine: a score table and a frame of runs in, an answer a run out. Never a bare number.

frame ─▶ checked columns ─▶ per item: lowest and highest points left open ─▶ total, class, prediction
                         └▶ population rules ─────────────────────────────▶ eligible yes / no / unknown
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from outcomes.scores.catalogue import Catalogue, chosen_options, implemented_score
from outcomes.scores.columns import Column, Source, read_columns
from outcomes.scores.eligibility import LEVELS, judge, reason
from outcomes.scores.logic import item_points
from outcomes.scores.model import UNCHECKED, Score, under
from outcomes.scores.values import Floats

CHUNK = 1 << 15
Ints = npt.NDArray[np.int64]

ANSWER_COLUMNS = (
    "total",
    "total_low",
    "total_high",
    "missing",
    "not_applicable",
    "class",
    "eligible",
    "eligibility_reason",
    "predicted",
    "predicted_outcome",
    "predicted_horizon",
    "prediction_evidence",
    "inputs_used",
    "table",
)


def compute(
    score: str | Score,
    frame: pd.DataFrame,
    *,
    columns: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
    options: Mapping[str, str] | None = None,
    declared: Mapping[str, Any] | None = None,
    tables: Catalogue | None = None,
) -> pd.DataFrame:
    """The score of every run in `frame` (one row a run, same index).

    columns   input field → column of the frame, where the names differ
    units     input field → unit of its column; a column under its canonical name needs none
    options   convention → option, where the default is not wanted (`open_conventions` lists them)
    declared  input field → value that holds for every row, e.g. {"nth_run": 1}
    tables    a catalogue with a site's own tables

    Answer: total (NA unless settled), total_low and total_high (what is still possible), missing (inputs that
    leave it open), not_applicable (inputs that cannot exist), class (only if both ends agree), eligible with
    its reason, predicted with outcome, horizon and evidence (eligible and complete runs only), inputs_used,
    table (whose). Nothing missing is taken as zero.

    Raises UsageError (name, unit, option, reserved score) or InputRefused (kind of value, hard limit, missing
    weight) before anything is computed. Source of each table: `describe_score`.
    """
    active, source = prepare(score, frame, columns, units, options, declared, tables)
    found = read_columns(active, source)
    return _answer(active, found, frame.index)


def item_table(
    score: str | Score,
    frame: pd.DataFrame,
    *,
    columns: Mapping[str, str] | None = None,
    units: Mapping[str, str] | None = None,
    options: Mapping[str, str] | None = None,
    declared: Mapping[str, Any] | None = None,
    tables: Catalogue | None = None,
) -> pd.DataFrame:
    """Points item by item, to trace one total: columns item, group, points_low, points_high; index of `frame`
    repeated item by item, in the order of the table. Arguments and errors as in `compute`."""
    active, source = prepare(score, frame, columns, units, options, declared, tables)
    found = read_columns(active, source)
    parts = []
    for item in active.items:
        low, high, _ = item_points(item, found, len(frame))
        part = pd.DataFrame({"points_low": low, "points_high": high}, index=frame.index)
        part.insert(0, "item", item.key)
        part.insert(1, "group", item.group)
        parts.append(part)
    return pd.concat(parts)


def prepare(
    score: str | Score,
    frame: pd.DataFrame,
    columns: Mapping[str, str] | None,
    units: Mapping[str, str] | None,
    options: Mapping[str, str] | None,
    declared: Mapping[str, Any] | None,
    tables: Catalogue | None,
) -> tuple[Score, Source]:
    """The score under the chosen options, and the frame with the caller's declarations."""
    whole = implemented_score(score, tables)
    active = under(whole, chosen_options(whole, dict(options or {})))
    return active, Source(frame, columns, units, declared)


@dataclass
class _Totals:
    """Working arrays over all rows; patterns are bit fields over the inputs of the score."""

    low: Floats
    high: Floats
    missing: Ints
    absent: Ints
    used: Ints
    reasons: Ints
    eligible: npt.NDArray[np.int8]

    @classmethod
    def start(cls, constant: float, n: int) -> _Totals:
        """Every total at the constant of the score, nothing marked."""
        missing, absent, used, reasons = (np.zeros(n, np.int64) for _ in range(4))
        low, high = np.full(n, constant), np.full(n, constant)
        return cls(low, high, missing, absent, used, reasons, np.zeros(n, np.int8))


def _answer(score: Score, columns: Mapping[str, Column], index: pd.Index) -> pd.DataFrame:
    n = len(index)
    keys = [entry.key for entry in score.inputs]
    sums = _Totals.start(score.constant, n)
    for start in range(0, n, CHUNK):
        rows = slice(start, min(start + CHUNK, n))
        part = {key: column.part(rows) for key, column in columns.items()}
        _add_items(score, part, keys, sums, rows)
        verdict = judge(score, part, rows.stop - rows.start)
        sums.eligible[rows], sums.reasons[rows] = verdict.code, verdict.pattern
    settled = sums.low == sums.high
    class_codes = _class_codes(score, sums)
    names = [columns[key].name for key in keys]
    fields = [entry.field.name for entry in score.inputs]
    usable = settled & (sums.eligible == 0) & (class_codes >= 0)
    predicted, evidence = _predictions(score, class_codes, usable)
    data = {
        "total": _numbers(score, np.where(settled, sums.low, np.nan)),
        "total_low": _numbers(score, sums.low),
        "total_high": _numbers(score, sums.high),
        "missing": _words(sums.missing, lambda p: _listed(p, fields)),
        "not_applicable": _words(sums.absent, lambda p: _listed(p, fields)),
        "class": pd.Categorical.from_codes(class_codes, [c.key for c in score.classes], ordered=True),
        "eligible": pd.Categorical.from_codes(sums.eligible, list(LEVELS)),
        "eligibility_reason": _words(sums.reasons, lambda p: reason(score, p)),
        "predicted": predicted,
        "predicted_outcome": _constant(score.outcome if score.classes else "", n),
        "predicted_horizon": _constant(score.horizon if score.classes else "", n),
        "prediction_evidence": evidence,
        "inputs_used": _words(sums.used, lambda p: _listed(p, names)),
        "table": _constant(score.whose, n),
    }
    return pd.DataFrame(data, index=index, columns=list(ANSWER_COLUMNS))


def _add_items(
    score: Score, columns: Mapping[str, Column], keys: list[str], sums: _Totals, rows: slice
) -> None:
    n = rows.stop - rows.start
    bits = {key: 1 << place for place, key in enumerate(keys)}
    half = 1 << len(keys)
    for item in score.items:
        low, high, absent = item_points(item, columns, n)
        sums.low[rows] += low
        sums.high[rows] += high
        gap = low != high
        for key in item.inputs:
            column = columns[key]
            _mark(sums.missing[rows], gap & column.null & ~absent, bits[key])
            if column.inexact is not None:
                _mark(sums.missing[rows], gap & column.inexact, bits[key] * half)
        _mark(sums.absent[rows], absent, bits[item.inputs[0]])
    for key in dict.fromkeys(key for item in score.items for key in item.inputs):
        sums.used[rows] += bits[key]
        _mark(sums.used[rows], columns[key].null, -bits[key])


def _mark(pattern: Ints, where: npt.NDArray[np.bool_], bit: int) -> None:
    """Add a bit once where asked; a negative bit takes it away again."""
    if not where.any():
        return
    if bit > 0:
        pattern |= np.multiply(where, bit, dtype=np.int64)
    else:
        pattern += np.multiply(where, bit, dtype=np.int64)


def _listed(pattern: int, names: list[str]) -> str:
    """Names of the set bits; the upper half marks a value known only within limits."""
    parts = [name for place, name in enumerate(names) if pattern >> place & 1]
    upper = pattern >> len(names)
    parts += [f"{name} (known only within limits)" for place, name in enumerate(names) if upper >> place & 1]
    return "; ".join(parts)


def _words(pattern: Ints, spell: Callable[[int], str]) -> pd.Categorical:
    """Few distinct patterns, so few words: a categorical, built without a string per row."""
    codes, uniques = pd.factorize(pattern)
    words = [spell(int(p)) for p in uniques]
    levels = sorted(set(words))
    place = {word: n for n, word in enumerate(levels)}
    table = np.array([place[word] for word in words], dtype=np.int32)
    return pd.Categorical.from_codes(table[codes] if len(table) else codes, levels)


def _constant(word: str, n: int) -> pd.Categorical:
    return pd.Categorical.from_codes(np.zeros(n, dtype=np.int8), [word])


def _numbers(score: Score, values: Floats) -> pd.api.extensions.ExtensionArray:
    """Int64 for whole-numbered scores, else Float64; NaN becomes NA."""
    unknown = np.isnan(values)
    if not score.is_whole_numbered:
        return pd.arrays.FloatingArray(np.where(unknown, 0.0, values), unknown)
    return pd.arrays.IntegerArray(np.where(unknown, 0.0, values).astype(np.int64), unknown)


def _class_codes(score: Score, sums: _Totals) -> npt.NDArray[np.int8]:
    """Place of the class that both ends of the total share, else −1."""
    if not score.classes or not len(sums.low):
        return np.full(len(sums.low), -1, dtype=np.int8)
    first, last = int(sums.low.min()), int(sums.high.max())
    table = np.array([_class_of(score, total) for total in range(first, last + 1)], dtype=np.int8)
    low = table[sums.low.astype(np.int64) - first]
    high = table[sums.high.astype(np.int64) - first]
    return np.where(low == high, low, -1).astype(np.int8)


def _class_of(score: Score, total: int) -> int:
    places = (n for n, c in enumerate(score.classes) if c.interval.holds(float(total)))
    return next(places, -1)


def _predictions(
    score: Score, class_codes: npt.NDArray[np.int8], usable: npt.NDArray[np.bool_]
) -> tuple[pd.api.extensions.ExtensionArray, pd.Categorical]:
    printed = np.array([np.nan if c.probability is None else c.probability for c in score.classes] + [np.nan])
    values = np.where(usable, printed[class_codes], np.nan)
    given = ~np.isnan(values)
    tags = weakest(score)
    evidence = pd.Categorical.from_codes(np.where(given, 0, -1).astype(np.int8), [tags])
    return pd.arrays.FloatingArray(np.where(given, values, 0.0), ~given), evidence


def tags_of(score: Score) -> Iterable[str]:
    """The evidence tag of every part a prediction rests on: rows, classes, the constant."""
    yield from (row.evidence for item in score.items for row in item.rows)
    yield from (item.evidence for item in score.items)
    yield from (c.evidence for c in score.classes)
    if score.constant:
        yield score.constant_evidence


def weakest(score: Score) -> str:
    """The weakest tag of a table: from memory, else second-hand, else verified (conventions apart)."""
    seen = set(tags_of(score))
    return next((tag for tag in reversed(UNCHECKED) if tag in seen), "verified")

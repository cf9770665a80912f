"""Three-valued arithmetic of a score: what is sure, what is possible, and the points both leave open."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from functools import lru_cache

import numpy as np

from outcomes.scores.columns import Column
from outcomes.scores.model import TOLERANCE, Condition, Interval, Item, Row
from outcomes.scores.values import Floats, Mask

Columns = Mapping[str, Column]


def condition(test: Condition, columns: Columns) -> tuple[Mask, Mask]:
    """(surely true, possibly true) per row. An unknown value is never sure and always possible."""
    column = columns[test.input]
    if test.interval is not None:
        return _inside(test.interval, column)
    sure = np.zeros(len(column.code), dtype=bool)
    for value in test.equals:
        sure |= column.code == column.words.index(value)
    return sure, sure | (column.code < 0)


def _slack(bound: float) -> float:
    return TOLERANCE * max(abs(bound), 1e-3)


def _inside(interval: Interval, column: Column) -> tuple[Mask, Mask]:
    """NaN compares false, so `not surely outside` keeps unknown values possible."""
    n = len(column.low)
    sure, outside = np.ones(n, dtype=bool), np.zeros(n, dtype=bool)
    if interval.low is not None:
        edge = (
            interval.low - _slack(interval.low)
            if interval.low_inside
            else interval.low + _slack(interval.low)
        )
        sure &= column.low >= edge
        outside |= column.high < edge
    if interval.high is not None:
        slack = _slack(interval.high)
        edge = interval.high + slack if interval.high_inside else interval.high - slack
        sure &= column.high < edge
        outside |= column.low >= edge
    if interval.low is None and interval.high is None:
        sure = ~column.null
    return sure, ~outside


def all_of(tests: Iterable[Condition], columns: Columns) -> tuple[Mask, Mask]:
    """(surely, possibly) all conditions hold."""
    pairs = [condition(test, columns) for test in tests]
    sure, possible = pairs[0]
    for more_sure, more_possible in pairs[1:]:
        sure, possible = sure & more_sure, possible & more_possible
    return sure, possible


def any_of(tests: Iterable[Condition], columns: Columns) -> tuple[Mask, Mask]:
    """(surely, possibly) at least one condition holds."""
    pairs = [condition(test, columns) for test in tests]
    sure, possible = pairs[0]
    for more_sure, more_possible in pairs[1:]:
        sure, possible = sure | more_sure, possible | more_possible
    return sure, possible


def decide(rows: tuple[Row, ...], otherwise: float | None, columns: Columns, n: int) -> tuple[Floats, Floats]:
    """Lowest and highest points that the rows leave possible: the first row that holds decides.

    The points still possible become the bits of a small number per run; a table turns that into both ends.
    """
    given = (*(row.points for row in rows), *(() if otherwise is None else (otherwise,)))
    points = tuple(dict.fromkeys(given))
    pattern = np.zeros(n, dtype=np.int32)
    undecided = np.ones(n, dtype=bool)
    for row in rows:
        sure, possible = all_of(row.when, columns)
        pattern |= np.multiply(possible & undecided, 1 << points.index(row.points), dtype=np.int32)
        undecided &= ~sure
    if otherwise is not None:
        pattern |= np.multiply(undecided, 1 << points.index(otherwise), dtype=np.int32)
    low, high = _ends(points)
    return low[pattern], high[pattern]


@lru_cache(maxsize=512)
def _ends(points: tuple[float, ...]) -> tuple[Floats, Floats]:
    """Lowest and highest of every subset of `points`, by the bits of its number; nothing left is NaN."""
    low, high = np.full(1 << len(points), np.nan), np.full(1 << len(points), np.nan)
    for place, value in enumerate(points):
        bit = 1 << place
        low[bit : 2 * bit] = np.fmin(low[:bit], value)
        high[bit : 2 * bit] = np.fmax(high[:bit], value)
    return low, high


def item_points(item: Item, columns: Columns, n: int) -> tuple[Floats, Floats, Mask]:
    """(lowest, highest points, not applicable) of one item. A value that is there always counts."""
    if item.kind == "per_unit":
        low, high = _multiplied(item, columns)
    else:
        low, high = decide(item.rows, item.otherwise, columns, n)
    absent = np.zeros(n, dtype=bool)
    for gate in item.not_applicable:
        null = columns[item.inputs[0]].null
        sure, possible = all_of(gate.when, columns)
        absent = null & sure
        maybe = null & possible
        if gate.points is not None:
            low = np.where(absent, gate.points, np.where(maybe, np.minimum(low, gate.points), low))
            high = np.where(absent, gate.points, np.where(maybe, np.maximum(high, gate.points), high))
    return low, high, absent


def _multiplied(item: Item, columns: Columns) -> tuple[Floats, Floats]:
    """points × value; an unknown value may be anything inside the hard limits of its field."""
    column = columns[item.inputs[0]]
    assert item.per_unit is not None and column.field.low is not None and column.field.high is not None
    low = np.where(column.null, column.field.low, column.low) * item.per_unit
    high = (
        low
        if not column.null.any()
        else np.where(column.null, column.field.high, column.high) * item.per_unit
    )
    return low, high

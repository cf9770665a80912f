"""From a frame of any shape to checked arrays in canonical units: nothing is guessed, nothing imputed."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any

import numpy as np
import pandas as pd

from outcomes.errors import InputRefused, UsageError
from outcomes.scores.fields import FIELDS, INTERVAL_COLUMNS, Field
from outcomes.scores.model import Input, Score
from outcomes.scores.units import factor
from outcomes.scores.values import Codes, Floats, Mask, check_limits, choice, floats, truth

# Quantities that follow from two others when they are not recorded themselves.
_DERIVED = {"bmi_kg_m2": ("weight_kg", "height_cm"), "pao2_fio2_mmhg": ("pao2_mmhg", "fio2")}


@dataclass(frozen=True)
class Column:
    """One input over all rows. Numbers: low and high (the same array if exact; NaN = unknown).
    Words: code (−1 unknown, else place in `words`). null: no value at all. inexact: known as an interval."""

    name: str
    field: Field
    low: Floats
    high: Floats
    code: Codes
    null: Mask
    inexact: Mask | None = None

    @property
    def words(self) -> tuple[Any, ...]:
        """What a code stands for."""
        return (True, False) if self.field.kind == "yes_no" else self.field.choices

    def part(self, rows: slice) -> Column:
        """The same column for some rows (views, no copies)."""
        low = self.low[rows]
        high = low if self.high is self.low else self.high[rows]
        inexact = None if self.inexact is None else self.inexact[rows]
        return Column(self.name, self.field, low, high, self.code[rows], self.null[rows], inexact)


_NO_FLOATS: Floats = np.empty(0)
_NO_CODES: Codes = np.empty(0, dtype=np.int8)


class Source:
    """A frame with the caller's declarations: where each field is, in which unit, what holds for all rows."""

    def __init__(
        self,
        frame: pd.DataFrame,
        columns: Mapping[str, str] | None = None,
        units: Mapping[str, str] | None = None,
        declared: Mapping[str, Any] | None = None,
    ) -> None:
        self.frame = frame
        self.columns = dict(columns or {})
        self.units = dict(units or {})
        self.declared = dict(declared or {})

    def check(self, score: Score) -> None:
        """Refuse names that lead nowhere: a mapped column not in the frame, a unit for an unknown field."""
        if not self.frame.columns.is_unique:
            raise UsageError("SCORE.COLUMN", "the frame has two columns of the same name")
        known = {x.key for x in score.inputs} | {x.field.name for x in score.inputs} | set(FIELDS)
        known |= {name for pair in INTERVAL_COLUMNS.values() for name in pair}
        for what, given in (("columns", self.columns), ("units", self.units), ("declared", self.declared)):
            for key in given:
                if key not in known:
                    raise _misspelt("SCORE.FIELD", f"{what} names {key}, which is no input field", key, known)
        present = [str(name) for name in self.frame.columns]
        for key, name in self.columns.items():
            if name not in self.frame.columns:
                raise _misspelt("SCORE.COLUMN", f"{key} is mapped to {name}, not in the frame", name, present)

    def place(self, entry: Input) -> tuple[str | None, bool]:
        """(column of the frame or None, whether the caller mapped it). Own window's column goes first."""
        for key in (entry.key, entry.field.name):
            if key in self.columns:
                return self.columns[key], True
        for name in (f"{entry.field.name}_{entry.window}", entry.field.name):
            if name in self.frame.columns:
                return name, False
        return None, False

    def unit(self, entry: Input, mapped: bool, column: str) -> str:
        """The declared unit; a column under its canonical name carries its unit in the name."""
        for key in (entry.key, entry.field.name):
            if key in self.units:
                return self.units[key]
        if mapped and column != entry.field.name and entry.field.needs_unit:
            raise UsageError(
                "SCORE.UNIT-UNDECLARED",
                f"the unit of the column {column} is not declared",
                where=f"input {entry.field.name}",
                todo=f"declare it, for example units={{'{entry.field.name}': '{entry.field.unit}'}}",
            )
        return entry.field.unit


def _misspelt(code: str, what: str, name: str, known: Any) -> UsageError:
    near = get_close_matches(name, sorted(known), n=1)
    return UsageError(
        code, what, todo=f"did you mean {near[0]}?" if near else "see the input table of the score"
    )


def read_columns(score: Score, source: Source) -> dict[str, Column]:
    """Every input of the score as a checked column; inputs that the frame lacks are unknown in every row.

    Raises UsageError (unit, name) or InputRefused (kind of values, hard limits) before anything is computed.
    """
    source.check(score)
    _check_any_input(score, source)
    out = {entry.key: _read(entry, source) for entry in score.inputs}
    for entry in score.inputs:
        if entry.zero_when_true:
            out[entry.key] = _empty_as_zero(out[entry.key], out[entry.zero_when_true])
    return out


def _read(entry: Input, source: Source) -> Column:
    field, n = entry.field, len(source.frame)
    name, mapped = source.place(entry)
    given = next((source.declared[k] for k in (entry.key, field.name) if k in source.declared), None)
    if given is not None:
        if name is not None:
            raise UsageError("SCORE.FIELD", f"{field.name} is both declared for all rows and a column")
        series = pd.Series([given] * min(n, 1))
        one = _column(series, entry, source, False, f"{field.name} (declared)")
        return one.part(slice(0, 1)) if n <= 1 else _stretched(one, n)
    if name is None:
        series = (
            pd.Series(np.nan, index=range(n)) if field.is_numeric else pd.Series([None] * n, dtype=object)
        )
        return _completed(_column(series, entry, source, False, field.name), entry, source)
    return _completed(_column(source.frame[name], entry, source, mapped, name), entry, source)


def _check_any_input(score: Score, source: Source) -> None:
    """A frame that holds none of the items is a wrong frame; a frame with empty columns is not."""
    keys = {key for item in score.items for key in item.inputs}
    wanted = [entry for entry in score.inputs if entry.key in keys]
    names = {name for x in wanted for name in (x.key, x.field.name)}
    names |= {part for x in wanted for part in _DERIVED.get(x.field.name, ())}
    names |= {part for x in wanted for part in INTERVAL_COLUMNS.get(x.field.name, ())}
    there = names & {*source.declared, *source.columns, *(str(name) for name in source.frame.columns)}
    if not there and all(source.place(entry)[0] is None for entry in wanted):
        raise UsageError(
            "SCORE.NO-INPUT",
            f"the frame holds no input of {score.name}",
            todo=f"give columns for: {', '.join(x.field.name for x in wanted)}",
        )


def _empty_as_zero(column: Column, said: Column) -> Column:
    """Empty means 'none given' only in rows that say their list is complete."""
    none_given = column.null & (said.code == 0)
    if not none_given.any():
        return column
    values = np.where(none_given, 0.0, column.low)
    return Column(column.name, column.field, values, values, _NO_CODES, column.null & ~none_given)


def _stretched(one: Column, n: int) -> Column:
    return Column(
        one.name,
        one.field,
        np.repeat(one.low, n),
        np.repeat(one.high, n),
        np.repeat(one.code, n),
        np.repeat(one.null, n),
    )


def _column(series: pd.Series, entry: Input, source: Source, mapped: bool, name: str) -> Column:
    field = entry.field
    if not field.is_numeric:
        code = truth(series, name) if field.kind == "yes_no" else choice(series, field, name)
        return Column(name, field, _NO_FLOATS, _NO_FLOATS, code, code < 0)
    values = floats(series, name)
    unit = source.unit(entry, mapped, name) if not series.isna().all() or mapped else field.unit
    values = _converted(values, field, unit, source)
    check_limits(values, field, name)
    if field.kind == "completed_years":
        values = np.floor(values)
    return Column(name, field, values, values, _NO_CODES, np.isnan(values))


def _converted(values: Floats, field: Field, unit: str, source: Source) -> Floats:
    times, by_weight = factor(field, unit)
    if not by_weight:
        return values if times == 1.0 else values * times
    weight = _read(Input("weight_kg", FIELDS["weight_kg"], "run", "none"), source)
    lacking = weight.null & (values > 0.0)
    if bool(lacking.any()):
        raise InputRefused(
            "score_weight_missing",
            f"{field.name} is declared in {unit} and needs a weight, missing in {int(lacking.sum())} row(s)",
        )
    return np.asarray(np.where(values == 0.0, 0.0, values * times / weight.low), dtype=np.float64)


def _completed(column: Column, entry: Input, source: Source) -> Column:
    """Where the value itself is unknown: two recorded components, else an interval, else unknown."""
    if not column.null.any():
        return column
    if entry.field.name in _DERIVED:
        return _from_components(column, entry, source)
    pair = INTERVAL_COLUMNS.get(entry.field.name)
    names = [source.columns.get(n, n) for n in pair] if pair else []
    if not names or not all(n in source.frame.columns for n in names):
        return column
    low, high = (np.floor(floats(source.frame[n], n)) for n in names)
    for values, n in zip((low, high), names, strict=True):
        check_limits(values, entry.field, n)
    usable = column.null & ~np.isnan(low) & ~np.isnan(high)
    if bool((low[usable] > high[usable]).any()):
        raise InputRefused("score_interval", f"{names[0]} lies above {names[1]} in some rows")
    new_low, new_high = np.where(usable, low, column.low), np.where(usable, high, column.high)
    return Column(
        column.name,
        entry.field,
        new_low,
        new_high,
        _NO_CODES,
        column.null & ~usable,
        usable & (new_low < new_high),
    )


def _from_components(column: Column, entry: Input, source: Source) -> Column:
    first, second = (
        _read(Input(n, FIELDS[n], entry.window, entry.worst), source) for n in _DERIVED[entry.field.name]
    )
    metres = second.low / 100.0 if entry.field.name == "bmi_kg_m2" else second.low
    value = first.low / metres**2 if entry.field.name == "bmi_kg_m2" else first.low / metres
    values = np.where(column.null, value, column.low)
    name = column.name if not column.null.all() else f"{first.name} and {second.name}"
    check_limits(values, entry.field, name)
    return Column(name, entry.field, values, values, _NO_CODES, np.isnan(values))

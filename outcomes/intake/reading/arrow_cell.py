"""Arrow columns -> cells, type by type, without a detour through anything that rounds, guesses or shifts."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Callable
from decimal import Decimal
from typing import Any

import numpy as np
import pyarrow as pa

from outcomes.intake.reading.grid import Cell, ErrorCell, Number
from outcomes.intake.reading.serial import number_text

_PER_SECOND = {"s": 1, "ms": 1_000, "us": 1_000_000, "ns": 1_000_000_000}
_EPOCH = dt.datetime(1970, 1, 1)
_DAY = 86_400
_ERROR = ErrorCell("error")
_Convert = Callable[[pa.Array], list[Cell]]


def is_text(kind: pa.DataType) -> bool:
    """Text, stored as such or as a list of distinct values."""
    if pa.types.is_dictionary(kind):
        return is_text(kind.value_type)
    return bool(pa.types.is_string(kind) or pa.types.is_large_string(kind))


def converter(kind: pa.DataType) -> _Convert | None:
    """How a column of this type becomes cells; None if it is refused (nested, binary, durations).

    Numbers keep their shortest exact text. NaN and infinity are errors, not missing values. A timestamp with
    a zone becomes ISO text in UTC ending in Z, so that a mapping has to declare the offset; one without is a
    datetime.
    """
    for is_kind, make in _MAKERS:
        if is_kind(kind):
            return make(kind)
    return None


def to_cells(column: pa.Array) -> list[Cell]:
    """Cells of one column of a batch. Raises what Arrow raises, and ArrowTypeError for a type that is
    refused."""
    convert = converter(column.type)
    if convert is None:
        raise pa.ArrowTypeError("refused type")
    return convert(column)


def _text(kind: pa.DataType) -> _Convert:
    if not pa.types.is_dictionary(kind):
        return lambda column: [cell or None for cell in column.to_pylist()]

    def convert(column: pa.DictionaryArray) -> list[Cell]:
        values = [value or None for value in column.dictionary.to_pylist()]
        return [None if index is None else values[index] for index in column.indices.to_pylist()]

    return convert


def _each(make: Callable[[Any], Cell], cast: pa.DataType | None = None) -> _Convert:
    def convert(column: pa.Array) -> list[Cell]:
        values = (column.cast(cast) if cast is not None else column).to_pylist()
        return [None if value is None else make(value) for value in values]

    return convert


def _integer(value: int) -> Cell:
    return Number(float(value), str(value))


def _float(value: float) -> Cell:
    return Number(value, number_text(value)) if math.isfinite(value) else _ERROR


def _short_float(width: type[np.floating[Any]]) -> Callable[[float], Cell]:
    """A narrow float is meant as its own shortest decimal: 0.1, not 0.10000000149."""
    return lambda value: _float(float(str(width(value))))


def _decimal(value: Decimal) -> Cell:
    text = format(value, "f")
    return Number(float(value), (text.rstrip("0").rstrip(".") if "." in text else text) or "0")


def _moment(units: int) -> Callable[[int], Cell]:
    def make(value: int) -> Cell:
        try:
            return _EPOCH + dt.timedelta(seconds=(value + units // 2) // units)
        except OverflowError:
            return _ERROR

    return make


def _zoned(units: int) -> Callable[[int], Cell]:
    make = _moment(units)

    def text(value: int) -> Cell:
        moment = make(value)
        return f"{moment.isoformat()}Z" if isinstance(moment, dt.datetime) else moment

    return text


def _timestamp(kind: pa.DataType) -> _Convert:
    units = _PER_SECOND[kind.unit]
    return _each(_zoned(units) if kind.tz else _moment(units), pa.int64())


def _date(per_day: int) -> Callable[[int], Cell]:
    def make(value: int) -> Cell:
        moment = _moment(1)(value // per_day * _DAY)
        return moment.date() if isinstance(moment, dt.datetime) else moment

    return make


def _clock(units: int) -> Callable[[int], Cell]:
    def make(value: int) -> Cell:
        seconds = min((value + units // 2) // units, _DAY - 1)
        return dt.time(seconds // 3600, seconds // 60 % 60, seconds % 60) if seconds >= 0 else _ERROR

    return make


_MAKERS: tuple[tuple[Callable[[pa.DataType], bool], Callable[[pa.DataType], _Convert]], ...] = (
    (is_text, _text),
    (pa.types.is_boolean, lambda kind: _each(bool)),
    (pa.types.is_integer, lambda kind: _each(_integer)),
    (pa.types.is_float16, lambda kind: _each(_short_float(np.float16))),
    (pa.types.is_float32, lambda kind: _each(_short_float(np.float32))),
    (pa.types.is_float64, lambda kind: _each(_float)),
    (pa.types.is_decimal, lambda kind: _each(_decimal)),
    (pa.types.is_timestamp, _timestamp),
    (pa.types.is_date32, lambda kind: _each(_date(1), pa.int32())),
    (pa.types.is_date64, lambda kind: _each(_date(1_000 * _DAY), pa.int64())),
    (pa.types.is_time32, lambda kind: _each(_clock(_PER_SECOND[kind.unit]), pa.int32())),
    (pa.types.is_time64, lambda kind: _each(_clock(_PER_SECOND[kind.unit]), pa.int64())),
    (pa.types.is_null, lambda kind: _each(_integer)),
)

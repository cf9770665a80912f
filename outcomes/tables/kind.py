"""Kinds of column: which numbers a cell is written from, how, and which parts it has in a CSV file."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import partial
from types import MappingProxyType

from outcomes.tables import format as write

Plain = tuple[str, ...]


@dataclass(frozen=True)
class Kind:
    """fields: names of the numbers taken, in order. text: writes them. parts: headings of the CSV parts (''
    for the column's own heading). plain: the CSV parts; by default the numbers found in the text."""

    fields: tuple[str, ...]
    text: Callable[..., str]
    parts: tuple[str, ...] = ("",)
    plain: Callable[..., Plain] | None = None
    is_number: bool = True


def _counts(x: float, n: float) -> Plain:
    return (*write.ascii_number(write.count(x)), *write.ascii_number(write.count(n)))


def _with_unit(text: str) -> Plain:
    return (*write.ascii_number(text), text.rpartition(" ")[2])


def _duration(hours: float) -> Plain:
    return _with_unit(write.duration(hours))


def _duration_quartiles(median: float, lower: float, upper: float) -> Plain:
    return _with_unit(write.duration_quartiles(median, lower, upper))


def _of_100(share: float, n: float) -> Plain:
    return (write.of_100(share, n),)


def _word(text: str) -> str:
    return text


def _with_places(places: int) -> dict[str, Kind]:
    return {
        f"number_{places}": Kind(("value",), partial(_number, places)),
        f"number_interval_{places}": Kind(("lower", "upper"), partial(_number_interval, places), _ENDS),
        f"quartiles_{places}": Kind(("median", "lower", "upper"), partial(_quartiles, places), _QUARTILES),
    }


def _number(places: int, value: float) -> str:
    return write.number(value, places)


def _number_interval(places: int, lower: float, upper: float) -> str:
    return write.number_interval(lower, upper, places)


def _quartiles(places: int, median: float, lower: float, upper: float) -> str:
    return write.quartiles(median, lower, upper, places)


_ENDS = ("lower", "upper")
_QUARTILES = ("median", "25th percentile", "75th percentile")

KINDS: Mapping[str, Kind] = MappingProxyType(
    {
        "count": Kind(("count",), write.count),
        "x_of_n": Kind(("x", "n"), write.x_of_n, ("", "of")),
        "percent": Kind(("share", "n"), write.percent),
        "percent_with_counts": Kind(("x", "n"), write.percent_with_counts, ("", "of"), _counts),
        "percent_interval": Kind(("lower", "upper", "n"), write.percent_interval, _ENDS),
        "of_100": Kind(("share", "n"), write.of_100, ("",), _of_100, is_number=False),
        "points": Kind(("difference", "n"), write.points),
        "points_interval": Kind(("lower", "upper", "n"), write.points_interval, _ENDS),
        "ratio": Kind(("value",), write.ratio),
        "ratio_interval": Kind(("value", "lower", "upper"), write.ratio_interval, _ENDS),
        "p_value": Kind(("p",), write.p_value),
        "duration": Kind(("hours",), write.duration, ("", "unit"), _duration),
        "duration_quartiles": Kind(
            ("median", "lower", "upper"),
            write.duration_quartiles,
            (*_QUARTILES, "unit"),
            _duration_quartiles,
        ),
        "time": Kind(("time",), write.time_point),
        "word": Kind(("text",), _word, ("",), lambda text: (text,), is_number=False),
        **_with_places(0),
        **_with_places(1),
        **_with_places(2),
    }
)

"""Numbers of a spreadsheet as numbers, dates, times or elapsed times, by the format of their cell.

Day numbers count from 1 January 1900 (with a 29 February 1900 that never was, number 60) or from 1 January
1904; both, and the numbers of the built-in formats, are common practice of spreadsheet programs.
"""

from __future__ import annotations

import datetime as dt
import math
import re
from decimal import Decimal

from outcomes.intake.reading.grid import Cell, ErrorCell, Number

_DATES = {*range(14, 18), 22, *range(27, 32), 36, *range(50, 55), 57, 58}
_TIMES = {*range(18, 22), *range(32, 36), 45, 47, 55, 56}
_ELAPSED = 46

_QUOTED = re.compile(r'"[^"]*"?|\\.|_.|\*.')
_ELAPSED_MARK = re.compile(r"\[(h+|m+|s+)\]")
_BRACKETS = re.compile(r"\[[^\]]*\]")
_CLOCK = re.compile(r"am/pm|a/p")
_DOUBLE = re.compile(r"[-+]?([0-9]+(\.[0-9]*)?|\.[0-9]+)([eE][-+]?[0-9]{1,4})?")

_DAY = 86_400
_DAY_0 = dt.datetime(1899, 12, 30)
_DAY_0_BEFORE_MARCH_1900 = dt.datetime(1899, 12, 31)
_DAY_0_OF_1904 = dt.datetime(1904, 1, 1)
_FALSE_LEAP_DAY = 60
_LAST_DAY = 2_958_465  # 31 December 9999, counted from 1900
_PLAIN_FROM, _PLAIN_TO = 1e-9, 1e21
_ERROR = ErrorCell("error")


def format_kind(number: int, code: str | None) -> str:
    """'number', 'moment', 'time' or 'elapsed'. code: the format's text if the workbook defines it.

    >>> [format_kind(164, code) for code in ('0.00', 'dd.mm.yyyy hh:mm', '[hh]:mm', 'h:mm AM/PM', '"days "0')]
    ['number', 'moment', 'elapsed', 'time', 'number']
    """
    if code is None:
        if number in _DATES:
            return "moment"
        if number in _TIMES:
            return "time"
        return "elapsed" if number == _ELAPSED else "number"
    plain = _QUOTED.sub("", code.lower()).split(";")[0]
    if _ELAPSED_MARK.search(plain):
        return "elapsed"
    plain = _BRACKETS.sub("", plain)
    has_clock = bool(_CLOCK.search(plain)) or "h" in plain or "s" in plain
    if "y" in plain or "d" in plain:
        return "moment"
    if has_clock:
        return "time"
    return "moment" if "m" in plain else "number"


def number_text(value: float) -> str:
    """Shortest exact decimal text, without exponent unless it would be absurdly long.

    >>> number_text(12.0), number_text(2.2000000000000002), number_text(1e-7), number_text(-0.0)
    ('12', '2.2', '0.0000001', '0')
    """
    if value == 0:
        return "0"
    if not _PLAIN_FROM <= abs(value) < _PLAIN_TO:
        return repr(value)
    text = format(Decimal(repr(value)), "f")
    return text.rstrip("0").rstrip(".") if "." in text else text


def number_cell(text: str) -> Number | ErrorCell | None:
    """A stored number; None if the text is none; an error if it lies beyond what a double holds."""
    if not _DOUBLE.fullmatch(text):
        return None
    value = float(text)
    return Number(value, number_text(value)) if math.isfinite(value) else _ERROR


def dated_cell(value: float, kind: str, is_1904: bool) -> Cell:
    """The cell that a number becomes under a date format (`format_kind` other than 'number').

    A moment or a time is rounded to the second, because a day number carries noise below it. Elapsed time
    becomes text such as '36:15:00', as it is shown. What a spreadsheet shows as ##### or as a date that never
    was is an error.
    """
    if value >= _LAST_DAY + 1:
        return _ERROR
    seconds = round(max(value, -1) * _DAY)
    if seconds < 0:
        return _ERROR
    if kind == "elapsed":
        return f"{seconds // 3600}:{seconds // 60 % 60:02d}:{seconds % 60:02d}"
    if kind == "time" and value < 1:
        seconds = min(seconds, _DAY - 1)
        return dt.time(seconds // 3600, seconds // 60 % 60, seconds % 60)
    return _moment(seconds, is_1904)


def _moment(seconds: int, is_1904: bool) -> Cell:
    if is_1904:
        start = _DAY_0_OF_1904
    else:
        day = seconds // _DAY
        if day in (0, _FALSE_LEAP_DAY):
            return _ERROR
        start = _DAY_0 if day > _FALSE_LEAP_DAY else _DAY_0_BEFORE_MARCH_1900
    try:
        return start + dt.timedelta(seconds=seconds)
    except OverflowError:
        return _ERROR


def iso_cell(text: str) -> Cell:
    """A cell that holds a date as ISO text. One with an offset stays text, so that no clock is assumed for
    it."""
    try:
        moment = dt.datetime.fromisoformat(text)
    except ValueError:
        return _iso_time(text)
    if moment.tzinfo is not None:
        return moment.isoformat(timespec="seconds")
    try:
        return (moment + dt.timedelta(microseconds=500_000)).replace(microsecond=0)
    except OverflowError:
        return _ERROR


def _iso_time(text: str) -> Cell:
    try:
        clock = dt.time.fromisoformat(text)
    except ValueError:
        return _ERROR
    return clock.replace(microsecond=0, tzinfo=None)

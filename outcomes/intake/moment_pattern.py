"""Declared date/time patterns: a form that a whole cell must match, and its rewriting into one fixed order.

A pattern is made of the tokens YYYY MM M DD D HH H hh h mm ss AM Z and separators. MM is the month, mm the minute;
Z is an offset (Z, +02:00 or +0200). Month or day first is thereby declared and never guessed.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

_TOKENS = {
    "YYYY": ("Y", "([0-9]{4})"),
    "MM": ("M", "([0-9]{2})"),
    "M": ("M", "([0-9]{1,2})"),
    "DD": ("D", "([0-9]{2})"),
    "D": ("D", "([0-9]{1,2})"),
    "HH": ("H", "([0-9]{2})"),
    "H": ("H", "([0-9]{1,2})"),
    "hh": ("h", "([0-9]{2})"),
    "h": ("h", "([0-9]{1,2})"),
    "mm": ("m", "([0-9]{2})"),
    "ss": ("s", "([0-9]{2})"),
    "AM": ("A", "([AaPp][Mm])"),
    "Z": ("Z", "(Z|[+-][0-9]{2}:?[0-9]{2})"),
}
_SPLIT = re.compile("(YYYY|MM|DD|HH|hh|mm|ss|AM|M|D|H|h|Z)")
_SEPARATOR = re.compile(r"[-./: T,]*")


@dataclass(frozen=True)
class MomentForm:
    """form: regular expression for the whole text; rewrite: replacement that gives 'YYYY-MM-DD HH:MM:SS' or, with a
    12-hour clock, 'YYYY-MM-DD hh:MM:SS AM'; offset: replacement that gives the offset, '' if there is none."""

    form: str
    rewrite: str
    offset: str


def moment_form(pattern: str) -> MomentForm:
    """Compile a declared pattern.

    Raises ValueError if the pattern has no full date, repeats a part, mixes clocks or holds other letters.

    >>> moment_form("MM/DD/YYYY hh:mm AM").rewrite
    '\\\\3-\\\\1-\\\\2 \\\\4:\\\\5:00 \\\\6'
    """
    places: dict[str, int] = {}
    form = ""
    for part in filter(None, _SPLIT.split(pattern)):
        if part in _TOKENS:
            name, expression = _TOKENS[part]
            if name in places:
                raise ValueError("a part stands twice")
            places[name] = len(places) + 1
            form += expression
        elif _SEPARATOR.fullmatch(part):
            form += re.escape(part)
        else:
            raise ValueError("unknown token")
    if not {"Y", "M", "D"} <= places.keys():
        raise ValueError("year, month and day are needed")
    if "H" in places and ("h" in places or "A" in places) or ("h" in places) != ("A" in places):
        raise ValueError("24-hour HH, or 12-hour hh with AM")
    if ("m" in places) and not places.keys() & {"H", "h"} or ("s" in places and "m" not in places):
        raise ValueError("minutes need hours, seconds need minutes")
    return MomentForm(form, _rewrite(places), f"\\{places['Z']}" if "Z" in places else "")


def _rewrite(places: dict[str, int]) -> str:
    def at(name: str, otherwise: str = "00") -> str:
        return f"\\{places[name]}" if name in places else otherwise

    hour = at("H") if "H" in places else at("h")
    text = f"{at('Y')}-{at('M')}-{at('D')} {hour}:{at('m')}:{at('s')}"
    return text + (f" {at('A')}" if "A" in places else "")


@dataclass(frozen=True)
class MomentLayout:
    """A pattern of fixed width, so that a whole column is read by place and not by a regular expression a cell.

    shape: every digit 9, the half of the day A; starts: 1-based place of year, month, day, hour, minute, second and
    half of the day, 0 for a part that the pattern lacks.
    """

    shape: str
    starts: tuple[int, int, int, int, int, int, int]


def moment_layout(pattern: str) -> MomentLayout | None:
    """The layout of a pattern; None if a part has no fixed width or an offset stands in the cell.

    >>> moment_layout("DD.MM.YYYY HH:mm")
    MomentLayout(shape='99.99.9999 99:99', starts=(7, 4, 1, 12, 15, 0, 0))
    """
    moment_form(pattern)
    shape = ""
    starts: dict[str, int] = {}
    for part in filter(None, _SPLIT.split(pattern)):
        if part in ("M", "D", "H", "h", "Z"):
            return None
        if part in _TOKENS:
            starts["H" if part == "hh" else _TOKENS[part][0]] = len(shape) + 1
            shape += "AA" if part == "AM" else "9" * len(part)
        else:
            shape += part
    year, month, day, hour, minute, second, half = (starts.get(name, 0) for name in "YMDHmsA")
    return MomentLayout(shape, (year, month, day, hour, minute, second, half))

"""Grammars of typed text: numbers, dates and times, damaged identifiers. ASCII only, whole text, nothing is
guessed.

Python's own `float` takes 1_000, full-width digits, nan and padded text; date parsers guess the order of day
and month and read 'now' as today. So the form is checked here first, and what decides the order is a declared
pattern.
"""

from __future__ import annotations

import datetime as dt
import re
from dataclasses import dataclass
from itertools import pairwise

SIGNIFICANT_DIGITS = 15  # more cannot be held exactly by a double

_MARKS = (".", ",", " ", "'", "\u00a0", "\u2009", "\u202f", "\u2019")
_ERROR = re.compile(
    "#(n/a|nv|ref!|bezug!|value!|wert!|valeur!|div/0!|num!|zahl!|nombre!|name[?]|nom[?]|null!|nul!|spill!|calc!"
    "|getting_data|field!|blocked!|connect!|unknown!|busy!|##+)|err:[0-9]{3}"
)
_MANGLED = re.compile(
    r"[0-9]([.,][0-9]+)?[eE]\+[0-9]{2,3}"  # a long number, shown short
    r"|[0-9]{15,}0{2,}|[0-9]{13,15}0{3,}"  # digits beyond the fifteenth set to zero
    r"|[0-9]+\.0"  # a whole number that passed through a float
    r"|[0-9]{1,2}-(Jan|Feb|Mar|Apr|May|Jun|Jul|Aug|Sep|Oct|Nov|Dec|Mär|Mai|Okt|Dez)"  # taken for a date
    r"|(Jan|Feb|Mar|Apr|May|Jun|Jul|Aug|Sep|Oct|Nov|Dec|Mär|Mai|Okt|Dez)-[0-9]{2}"
)


def number_form(decimal_mark: str = ".", thousands_mark: str = "") -> str:
    """Regular expression for a whole number text. Groups between thousands marks have three digits, or there
    is none.

    Raises ValueError for marks that are not read or that are the same.

    >>> number_form(",", ".")
    '-?(?:[0-9]+|[0-9]{1,3}(?:\\\\.[0-9]{3})+)(?:,[0-9]+)?'
    """
    if decimal_mark not in (".", ",") or decimal_mark == thousands_mark:
        raise ValueError("the decimal mark is . or , and differs from the thousands mark")
    if not thousands_mark:
        return rf"-?[0-9]+(?:{re.escape(decimal_mark)}[0-9]+)?"
    if thousands_mark not in _MARKS:
        raise ValueError("a thousands mark that is not read")
    mark = re.escape(thousands_mark)
    return rf"-?(?:[0-9]+|[0-9]{{1,3}}(?:{mark}[0-9]{{3}})+)(?:{re.escape(decimal_mark)}[0-9]+)?"


def parse_number(text: str, decimal_mark: str = ".", thousands_mark: str = "") -> float | None:
    """The number a text means, None if it is none: no exponent, no sign but a hyphen, at most 15 significant
    digits.

    >>> parse_number("1.204,50", ",", "."), parse_number("1_000"), parse_number("1e3"), parse_number("nan")
    (1204.5, None, None, None)
    """
    if not re.fullmatch(number_form(decimal_mark, thousands_mark), text):
        return None
    plain = text.replace(thousands_mark, "") if thousands_mark else text
    plain = plain.replace(decimal_mark, ".")
    digits = plain.replace("-", "").replace(".", "").lstrip("0")
    return float(plain) if len(digits) <= SIGNIFICANT_DIGITS else None


def is_spreadsheet_error(text: str) -> bool:
    """An error that a spreadsheet printed in place of a value, in English, German or French.

    >>> is_spreadsheet_error("#N/A"), is_spreadsheet_error("#12")
    (True, False)
    """
    return bool(_ERROR.fullmatch(text.strip().casefold()))


def is_mangled_identifier(text: str) -> bool:
    """An identifier that a spreadsheet took for a number or a date and changed.

    >>> [is_mangled_identifier(t) for t in ("1.23E+05", "12-Mar", "123.0", "F-0012", "1230000")]
    [True, True, True, False, False]
    """
    return bool(_MANGLED.fullmatch(text.strip()))


@dataclass(frozen=True)
class MomentPattern:
    """A declared date/time pattern, compiled.

    regex        for the whole text, one group a part; plain enough for Python and for RE2
    parts        'year', 'month', 'day', 'hour', 'hour12', 'half', 'minute', 'second', 'offset' in the order
    of groups formats      strptime formats to be tried in turn; one ending in a plain Z means UTC
    """

    regex: str
    parts: tuple[str, ...]
    formats: tuple[str, ...]

    @property
    def has_time(self) -> bool:
        return "hour" in self.parts or "hour12" in self.parts

    @property
    def has_offset(self) -> bool:
        return "offset" in self.parts

    def parse(self, text: str) -> dt.datetime | None:
        """The moment a text means, aware if the pattern has an offset; None if it has not this form or is no
        day.

        It does not go by `strptime`, whose AM and PM depend on the locale of the process.
        """
        match = re.fullmatch(self.regex, text)
        if match is None:
            return None
        found = dict(zip(self.parts, match.groups(), strict=True))
        hour = int(found.get("hour", "0"))
        if "half" in found:
            hour = int(found["hour12"]) % 12 + (12 if found["half"].lower() == "pm" else 0)
        clock = (hour, int(found.get("minute", "0")), int(found.get("second", "0")))
        zone = _zone(found["offset"]) if "offset" in found else None
        try:
            return dt.datetime(
                int(found["year"]), int(found["month"]), int(found["day"]), *clock, tzinfo=zone
            )
        except ValueError:
            return None


def _zone(offset: str) -> dt.timezone:
    if offset == "Z":
        return dt.UTC
    size = dt.timedelta(hours=int(offset[1:3]), minutes=int(offset[-2:]))
    return dt.timezone(-size if offset[0] == "-" else size)


# token -> (part of a moment, expression, strptime directive)
_TOKENS = {
    "±HH:MM": ("offset", "[+-](?:0[0-9]|1[0-4]):[0-5][0-9]", "%z"),
    "YYYY": ("year", "[1-9][0-9]{3}", "%Y"),
    "YY": ("", "", ""),
    "AM": ("half", "[AaPp][Mm]", "%p"),
    "MM": ("month", "(?:0[1-9]|1[0-2])", "%m"),
    "DD": ("day", "(?:0[1-9]|[12][0-9]|3[01])", "%d"),
    "HH": ("hour", "(?:[01][0-9]|2[0-3])", "%H"),
    "hh": ("hour12", "(?:0[1-9]|1[0-2])", "%I"),
    "mm": ("minute", "[0-5][0-9]", "%M"),
    "ss": ("second", "[0-5][0-9]", "%S"),
    "M": ("month", "(?:0?[1-9]|1[0-2])", "%m"),
    "D": ("day", "(?:0?[1-9]|[12][0-9]|3[01])", "%d"),
    "H": ("hour", "(?:[01]?[0-9]|2[0-3])", "%H"),
    "h": ("hour12", "(?:0?[1-9]|1[0-2])", "%I"),
    "Z": ("offset", "(?:Z|[+-](?:0[0-9]|1[0-4]):?[0-5][0-9])", "%z"),
}
_SPLIT = re.compile("(" + "|".join(re.escape(token) for token in _TOKENS) + ")")
_LITERAL = re.compile("[-./: ,T]+")
_OPEN_ENDED = ("M", "D", "H", "h")
_NEEDS = {
    "month": {"year"}, "day": {"year", "month"}, "hour": {"day"}, "hour12": {"day", "half"},
    "half": {"hour12"}, "minute": set(), "second": {"minute"}, "offset": {"minute"}, "year": {"day"},
}  # fmt: skip


def compile_pattern(pattern: str) -> MomentPattern:
    """Compile a pattern of the tokens YYYY MM M DD D HH H hh h mm ss AM, ±HH:MM or Z, and separators - . / :
    , T space.

    Raises ValueError, in our own words, if it has no full date, repeats or misses a part, has a two-digit
    year, or lets two numbers of open length touch.

    >>> compile_pattern("DD.MM.YYYY HH:mm").formats
    ('%d.%m.%Y %H:%M',)
    >>> compile_pattern("MM/DD/YYYY hh:mm AM").parse("01/11/2019 08:15 PM")
    datetime.datetime(2019, 1, 11, 20, 15)
    """
    parts = [part for part in _SPLIT.split(pattern) if part]
    names: list[str] = []
    regex = form = ""
    for part, following in pairwise([*parts, ""]):
        if part in _TOKENS:
            name, expression, directive = _TOKENS[part]
            _check_token(part, name, following, names)
            names.append(name)
            regex += f"({expression})"
            form += directive
        elif _LITERAL.fullmatch(part):
            regex += re.escape(part)
            form += part
        else:
            raise ValueError("a pattern has tokens and separators only")
    _check_whole(set(names))
    formats = (form, form.replace("%z", "Z")) if "Z" in parts else (form,)
    return MomentPattern(regex, tuple(names), formats)


def _check_token(token: str, name: str, following: str, names: list[str]) -> None:
    if not name:
        raise ValueError("a year has four digits, YYYY")
    if name in names:
        raise ValueError("a part stands twice")
    if token in _OPEN_ENDED and following in _TOKENS and following not in ("AM", "Z", "±HH:MM"):
        raise ValueError("a number of one or two digits needs a separator behind it")


def _check_whole(names: set[str]) -> None:
    if "year" not in names:
        raise ValueError("year, month and day are needed")
    missing = {need for name in names for need in _NEEDS[name]} - names
    if missing:
        raise ValueError(f"{', '.join(sorted(missing))} missing")
    if {"hour", "hour12"} <= names or ("minute" in names and not names & {"hour", "hour12"}):
        raise ValueError("minutes need one kind of hour: HH, or hh with AM")

"""What the distribution of a column shows, without any value of a cell: kinds of cells, quartiles, codes, date shapes."""

from __future__ import annotations

import datetime as dt
import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from outcomes.findings import shape_of
from outcomes.intake.draft_words import MISSING
from outcomes.intake.reading.grid import Cell, ErrorCell, Number

MOST_CODES, LONGEST_CODE, FEWEST_SEEN, FEWEST_VALUES = 30, 24, 5, 10
_SCAN = re.compile(r"[0-9]{5}|\S@\S|[0-9]{1,4}[-./][0-9]{1,2}[-./][0-9]{1,4}|\b(?:Dr|Mr|Mrs|Ms|Prof|Herr|Frau)\.? [A-Z]")
_NUMBER = re.compile(r"-?[0-9]+([.,][0-9]+)?")
_DATE = re.compile(r"([0-9]{1,4})([-./])([0-9]{1,2})\2([0-9]{1,4})(?:[ T]([0-9]{1,2}):([0-9]{2})(?::([0-9]{2}))?(?: ?([AaPp][Mm]))?)?")
_TIME = re.compile(r"[0-9]{1,2}:[0-9]{2}(:[0-9]{2})?")
_SPLIT = re.compile(r"[0-9]+/[0-9]+")


@dataclass
class Profile:
    """n cells, n_blank empty. codes: text -> count, only those that may be shown; rare: shapes of codes seen fewer than
    five times. quartiles: of at least ten numbers. pattern: date pattern, '?' if month and day cannot be told apart."""

    n: int
    n_blank: int
    n_distinct: int
    kind: str
    decimal: str = ""
    quartiles: tuple[float, float, float] | None = None
    codes: dict[str, int] = field(default_factory=dict)
    rare: list[str] = field(default_factory=list)
    missing: tuple[str, ...] = ()
    pattern: str = ""
    proof: str = ""

    @property
    def is_unique(self) -> bool:
        return self.n_distinct == self.n - self.n_blank and self.n_blank == 0


def profile(cells: Sequence[Cell]) -> Profile:
    """The profile of one column."""
    words = [_word(c) for c in cells]
    filled = [w for w in words if w]
    tokens = tuple(sorted({w for w in filled if w in MISSING}))
    values = [w for w in filled if w not in MISSING]
    typed_dates = sum(isinstance(c, dt.date) for c in cells)
    made = Profile(len(cells), len(words) - len(filled), len(set(filled)), "text", missing=tokens)
    if not values:
        made.kind = "empty"
    elif typed_dates >= 0.9 * len(values):
        made.kind = "moment"
    elif _share(_DATE, values) >= 0.9:
        made.kind = "moment"
        made.pattern, made.proof = _pattern([m for v in values if (m := _DATE.fullmatch(v))])
    elif _share(_SPLIT, values) >= 0.9:
        made.kind = "split"
    elif _share(_TIME, values) >= 0.9:
        made.kind = "time"
    elif _share(_NUMBER, values) >= 0.9:
        made.kind = "number"
        made.decimal = "," if any("," in v for v in values) else "."
        made.quartiles = _quartiles([float(v.replace(",", ".")) for v in values if _NUMBER.fullmatch(v)])
    _codes(made, filled)
    return made


def _word(cell: Cell) -> str:
    if cell is None or isinstance(cell, ErrorCell):
        return ""
    return cell.text if isinstance(cell, Number) else str(cell).strip()


def _share(form: re.Pattern[str], values: Sequence[str]) -> float:
    return sum(form.fullmatch(v) is not None for v in values) / len(values)


def _quartiles(values: list[float]) -> tuple[float, float, float] | None:
    """Rounded to two significant digits; None for fewer than ten values."""
    if len(values) < FEWEST_VALUES:
        return None
    low, middle, high = (float(f"{q:.2g}") for q in np.quantile(values, [0.25, 0.5, 0.75]))
    return low, middle, high


def _codes(made: Profile, filled: Sequence[str]) -> None:
    """Codes may be shown only if there are few, short, frequent ones and none looks like a person's."""
    counts = Counter(filled)
    few = made.n_distinct <= MOST_CODES and (made.n_distinct <= 12 or made.n_distinct < 0.2 * len(filled))
    if not filled or not few or any(len(c) > LONGEST_CODE or _SCAN.search(c) for c in counts):
        return
    made.codes = {c: n for c, n in sorted(counts.items()) if n >= FEWEST_SEEN}
    made.rare = sorted(f"{n} x {shape_of(c)}" for c, n in counts.items() if n < FEWEST_SEEN)


def _pattern(found: Sequence[re.Match[str]]) -> tuple[str, str]:
    """Date pattern, and how many values prove which of month and day comes first."""
    year_first = sum(len(m[1]) == 4 for m in found) > len(found) / 2
    mark = Counter(m[2] for m in found).most_common(1)[0][0]
    clock = _clock(found)
    if year_first:
        return f"YYYY{mark}MM{mark}DD{clock}", "the year stands first"
    above_first = sum(int(m[1]) > 12 for m in found)
    above_second = sum(int(m[3]) > 12 for m in found)
    day, month = _width(found, 1), _width(found, 3)
    if above_first > above_second:
        return f"{'DD' if day else 'D'}{mark}{'MM' if month else 'M'}{mark}YYYY{clock}", f"{above_first} values have a first part above 12"
    if above_second > above_first:
        return f"{'MM' if day else 'M'}{mark}{'DD' if month else 'D'}{mark}YYYY{clock}", f"{above_second} values have a second part above 12"
    return "?", "no value shows whether the day or the month stands first"


def _width(found: Sequence[re.Match[str]], part: int) -> bool:
    """True if this part always has two digits."""
    return all(len(m[part]) == 2 for m in found)


def _clock(found: Sequence[re.Match[str]]) -> str:
    timed = [m for m in found if m[5]]
    if not timed:
        return ""
    half = any(m[8] for m in timed)
    hour = ("hh" if half else "HH") if _width(timed, 5) else ("h" if half else "H")
    sign = "T" if "T" in timed[0][0] else " "
    return f"{sign}{hour}:mm{':ss' if timed[0][7] else ''}{' AM' if half else ''}"

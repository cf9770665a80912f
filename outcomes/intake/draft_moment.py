"""Dates and times written as text: which declared pattern a whole column follows, and which cells prove it."""

from __future__ import annotations

import re
from collections import Counter
from dataclasses import dataclass

OPEN = "?"
DATE = re.compile(
    r"([0-9]{1,4})([-./])([0-9]{1,2})\2([0-9]{1,4})"
    r"(?:(, ?| |T)([0-9]{1,2}):([0-9]{2})(:[0-9]{2})?(?:( ?)([AaPp][Mm]))?( ?)(Z|[+-][0-9]{2}:?[0-9]{2})?)?"
)
_SURE, _SLIPS = 50, 0.02
TIME = re.compile(r"[0-9]{1,2}:[0-9]{2}(:[0-9]{2})?( ?[AaPp][Mm])?")


@dataclass(frozen=True)
class Pattern:
    """text: the declared pattern, '?' if month and day cannot be told apart. proof: what was counted. n_proof: cells
    that prove the order. n_same: cells of the commonest form; n_other: cells of another form."""

    text: str
    proof: str
    n_proof: int
    n_same: int
    n_other: int


def pattern_of(counts: dict[str, int]) -> Pattern:
    """The pattern of a column from its distinct texts and how often each stands there; all of them match DATE.

    >>> pattern_of({"05/16/2021 08:15 AM": 3, "05/01/2021 09:30 PM": 2}).text
    'MM/DD/YYYY hh:mm AM'
    >>> pattern_of({"05/06/2021": 3}).text
    '?'
    """
    found = {text: match for text in counts if (match := DATE.fullmatch(text))}
    forms: Counter[tuple[str, ...]] = Counter()
    for text, match in found.items():
        forms[_form(match)] += counts[text]
    form = max(forms, key=lambda f: (forms[f], f))
    same = {text: match for text, match in found.items() if _form(match) == form}
    n_same, n_other = forms[form], forms.total() - forms[form]
    if form[0] == "short":
        return Pattern(
            OPEN,
            "the years have two digits, which no pattern reads: export them with four digits",
            0,
            n_same,
            n_other,
        )
    year_first = form[0] == "first"
    parts = (3, 4) if year_first else (1, 3)
    above = [sum(counts[t] for t, m in same.items() if int(m[part]) > 12) for part in parts]
    orders = [_layout(list(same.values()), form, order) for order in (("D", "M"), ("M", "D"))]
    place, said = _judge(above, ("second", "third") if year_first else ("first", "second"))
    if place is None:
        return Pattern(OPEN, f'{said}; it is either "{orders[0]}" or "{orders[1]}"', 0, n_same, n_other)
    return Pattern(orders[place], said, above[place], n_same, n_other)


def _judge(above: list[int], words: tuple[str, str]) -> tuple[int | None, str]:
    """0 if the day stands first, 1 if the month does, None if the cells do not settle it. above: cells whose first or
    second of the two parts is above 12. A few slips against many proofs are named, and reported at import."""
    if not any(above):
        return None, "no cell has a part above 12"
    place = 0 if above[0] > above[1] else 1
    most, least = above[place], above[1 - place]
    counted = f"{_cells(most)} a {words[place]} part above 12 and {least or 'none'} a {words[1 - place]}"
    if least and (most < _SURE or least > _SLIPS * most):
        return None, f"{counted}: they contradict each other"
    order = ("the day stands before the month", "the month stands before the day")[place]
    return place, f"{counted}: {order}" + (f"; {least} will be reported at import" if least else "")


def _cells(n: int) -> str:
    return "1 cell has" if n == 1 else f"{n} cells have"


def _form(match: re.Match[str]) -> tuple[str, ...]:
    """What two cells of one pattern share: place of the year, marks, and the parts of the clock."""
    widths = (len(match[1]), len(match[4]))
    year = (
        "first"
        if widths[0] == 4 and widths[1] <= 2
        else "last"
        if widths[1] == 4 and widths[0] <= 2
        else "short"
    )
    half = "" if match[10] is None else f"{match[9]}AM"
    seconds = "" if match[8] is None else ":ss"
    offset = "" if match[12] is None else f"{match[11]}Z"
    return (year, match[2], match[5] or "", seconds, half, offset)


def _layout(found: list[re.Match[str]], form: tuple[str, ...], order: tuple[str, str]) -> str:
    """The pattern with day and month in this order; two letters only where every cell has two digits."""
    year, mark, gap, seconds, half, offset = form
    first, second = (3, 4) if year == "first" else (1, 3)
    days = [order[0] * (2 if _wide(found, first) else 1), order[1] * (2 if _wide(found, second) else 1)]
    date = mark.join(["YYYY", *days] if year == "first" else [*days, "YYYY"])
    if not gap:
        return date
    hour = ("h" if half else "H") * (2 if _wide(found, 6) else 1)
    return f"{date}{gap}{hour}:mm{seconds}{half}{offset}"


def _wide(found: list[re.Match[str]], part: int) -> bool:
    return all(len(m[part]) == 2 for m in found)

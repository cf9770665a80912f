"""Numbers written as text: which mark separates the decimals, as far as the cells of a column prove it."""

from __future__ import annotations

import re
from dataclasses import dataclass

OPEN = "?"
NUMBER = re.compile(r"-?[0-9]{1,15}(?:[.,'][0-9]{3})*(?:[.,][0-9]{1,15})?|-?[.,][0-9]{1,15}")
_PLAIN = re.compile(r"-?[0-9]+")
_ONE_MARK = re.compile(r"-?([0-9]*)([.,])([0-9]+)")
_GROUPED = re.compile(
    r"-?[0-9]{1,3}(?P<mark>[.,'])[0-9]{3}(?:(?P=mark)[0-9]{3})*(?:(?P<decimal>[.,])(?P<rest>[0-9]+))?"
)


@dataclass(frozen=True)
class Marks:
    """decimal: "." or ",", "" if no cell has a mark, '?' if the cells do not settle it. n: cells that prove it."""

    decimal: str = ""
    thousands: str = ""
    n: int = 0


def marks_of(counts: dict[str, int]) -> Marks:
    """The marks of a column from its distinct number texts and how often each stands there.

    A single mark before exactly three digits proves nothing: 1,234 may be one or a thousand.

    >>> marks_of({"13,9": 4, "7": 1}), marks_of({"1,234": 3}), marks_of({"1,234.5": 2})
    (Marks(decimal=',', thousands='', n=4), Marks(decimal='?', thousands='', n=0), Marks(decimal='.', thousands=',', n=2))
    """
    proof = {".": 0, ",": 0}
    thousands = {".": 0, ",": 0, "'": 0}
    n_open = 0
    for text, n in counts.items():
        if _PLAIN.fullmatch(text):
            continue
        one, grouped = _ONE_MARK.fullmatch(text), _GROUPED.fullmatch(text)
        if one and not (grouped and not one[1].startswith("0")):
            proof[one[2]] += n
        elif grouped and grouped["decimal"] and grouped["decimal"] != grouped["mark"]:
            proof[grouped["decimal"]] += n
            thousands[grouped["mark"]] += n
        elif grouped and (grouped["mark"] == "'" or text.count(grouped["mark"]) > 1):
            thousands[grouped["mark"]] += n
        else:
            n_open += n
    return _judge(proof, thousands, n_open)


def _judge(proof: dict[str, int], thousands: dict[str, int], n_open: int) -> Marks:
    used = [mark for mark, n in thousands.items() if n]
    proven = [mark for mark, n in proof.items() if n]
    if len(proven) > 1 or len(used) > 1 or set(proven) & set(used):
        return Marks(OPEN)
    if proven:
        return Marks(proven[0], used[0] if used else "", proof[proven[0]])
    if used:
        other = "," if used[0] == "." else "."
        return Marks(other, used[0], thousands[used[0]])
    return Marks(OPEN) if n_open else Marks()


def number_of(text: str, marks: Marks) -> float | None:
    """The value of a number text; None if the marks are open or do not fit.

    >>> number_of("1,234.5", Marks(".", ","))
    1234.5
    """
    if marks.decimal == OPEN:
        return float(text) if _PLAIN.fullmatch(text) else None
    bare = text.replace(marks.thousands, "") if marks.thousands else text
    try:
        return float(bare.replace(marks.decimal, ".") if marks.decimal else bare)
    except ValueError:
        return None

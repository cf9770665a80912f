"""A finding: a named defect of a named row, as data. It never holds the value itself, only its shape."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import asdict, dataclass

EFFECTS = ("file", "run", "row", "cell", "note")


def shape_of(text: str, limit: int = 40) -> str:
    """Letters become A or a, digits 9; spaces and ASCII punctuation stay; anything else becomes '?'.

    >>> shape_of("13/45/2021 09:00 AM")
    '99/99/9999 99:99 AA'
    """
    out = []
    for char in text[:limit]:
        if char.isdigit():
            out.append("9")
        elif char.isalpha():
            out.append("A" if char.isupper() else "a")
        elif char == " " or (char.isascii() and char.isprintable()):
            out.append(char)
        else:
            out.append("?")
    return "".join(out) + ("…" if len(text) > limit else "")


@dataclass(frozen=True)
class Finding:
    """One defect.

    code      dotted and stable, e.g. CELL.NUMBER or CHECK.END-BEFORE-START
    effect    what is set aside because of it: file, run (with its children), row, cell, or note (nothing)
    batch     import batch number; 0 while nothing is stored
    source    key of the file in the mapping, never its name
    sheet     key of the sheet in the mapping ('' for a file with one table)
    line      physical line or sheet row, 1-based; 0 for the whole table
    column    header as the mapping lists it, else its place ('column 7')
    rule      what was expected, in words
    shape     shape of the value (`shape_of`), '' if there is none
    """

    code: str
    effect: str
    batch: int
    source: str
    sheet: str
    line: int
    column: str
    rule: str
    shape: str = ""

    @property
    def order(self) -> tuple[str, str, int, str, str]:
        return (self.source, self.sheet, self.line, self.column, self.code)

    def text(self) -> str:
        """One line for a terminal."""
        place = f"{self.source}{'/' + self.sheet if self.sheet else ''}"
        place += f" line {self.line}" if self.line else ""
        place += f", {self.column}" if self.column else ""
        seen = f" [{self.shape}]" if self.shape else ""
        return f"{self.code} ({self.effect}) {place}: {self.rule}{seen}"

    def as_row(self) -> dict[str, object]:
        return asdict(self)


def in_order(findings: Iterable[Finding]) -> list[Finding]:
    """Findings sorted by place, so that the same input prints the same list."""
    return sorted(findings, key=lambda f: f.order)

"""A finished table: what stands in each cell, as text and as the numbers behind it. No HTML here."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass, field

from outcomes.tables.format import MARKS
from outcomes.tables.kind import KINDS

_KEY = re.compile(r"[a-z0-9]+(?:_[a-z0-9]+)*")
_UNPRINTABLE = {"Cc", "Cf", "Co", "Cs", "Cn", "Zl", "Zp"}


def plain_words(text: str) -> str:
    """A label as one line: white space becomes single spaces; control, direction and private signs go.

    >>> plain_words("Centre\\tA\\u202e  \\n(north)")
    'Centre A (north)'
    """
    kept = (" " if c.isspace() else c for c in text if c.isspace() or _printable(c))
    return " ".join("".join(kept).split())


def _printable(char: str) -> bool:
    return unicodedata.category(char) not in _UNPRINTABLE


def check_key(key: str) -> str:
    """A key is written by us, never taken from data: it becomes part of an id."""
    if not _KEY.fullmatch(key):
        raise ValueError("a key has small letters, digits and single underscores only")
    return key


@dataclass(frozen=True)
class Column:
    """key: part of cell ids. kind: one of kind.KINDS. unit: printed after the heading. over: a heading above
    this and neighbouring columns, '' for none."""

    key: str
    heading: str
    kind: str
    unit: str = ""
    over: str = ""

    def __post_init__(self) -> None:
        check_key(self.key)
        if self.kind not in KINDS:
            raise ValueError(f"no such kind of column: {self.kind}")

    @property
    def full_heading(self) -> str:
        return f"{self.heading} ({self.unit})" if self.unit else self.heading


@dataclass(frozen=True)
class Cell:
    """text: as printed. plain: the parts a CSV file holds, as many as the kind has. number: the first number
    behind it, if it is one. link: key of a list of runs behind a count."""

    text: str
    plain: tuple[str, ...]
    number: float | None = None
    link: str = ""

    @property
    def mark(self) -> str:
        """The mark, if the cell holds one in place of a number."""
        return self.text if self.text in MARKS else ""


@dataclass(frozen=True)
class Row:
    key: str
    label: str
    cells: tuple[Cell, ...]

    def __post_init__(self) -> None:
        check_key(self.key)


@dataclass(frozen=True)
class Table:
    """key: unique in a report. stub: heading of the row heads. interval_name: '95% CI' if a column is one."""

    key: str
    caption: str
    stub: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]
    notes: tuple[str, ...] = ()
    interval_name: str = ""
    _places: dict[tuple[str, str], Cell] = field(init=False, repr=False, compare=False, default_factory=dict)

    def __post_init__(self) -> None:
        check_key(self.key)
        for row in self.rows:
            if len(row.cells) != len(self.columns):
                raise ValueError(f"table {self.key}: row {row.key} has not one cell a column")
            for column, cell in zip(self.columns, row.cells, strict=True):
                if len(cell.plain) != len(KINDS[column.kind].parts):
                    raise ValueError(f"table {self.key}: cell {row.key}, {column.key} is not of its kind")
                self._places[row.key, column.key] = cell
        if len(self._places) != len(self.rows) * len(self.columns):
            raise ValueError(f"table {self.key}: two rows or columns share a key")

    def cell(self, row: str, column: str) -> Cell:
        """The cell of this row and column; KeyError if there is none."""
        return self._places[row, column]

    def marks(self) -> tuple[str, ...]:
        """The marks used, in the fixed order of format.MARKS."""
        used = {cell.mark for cell in self._places.values()}
        return tuple(mark for mark in MARKS if mark in used)


def anchor(table: str, row: str, column: str) -> str:
    """The id of a cell.

    >>> anchor("endings", "recovery", "events")
    't-endings--recovery--events'
    """
    return f"t-{check_key(table)}--{check_key(row)}--{check_key(column)}"

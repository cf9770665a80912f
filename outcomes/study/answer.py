"""What an analysis gives a report: finished results, and in which rows and columns they are laid out.

No text with a number in it leaves an analysis. A sentence of the report names a cell of a table; a `fact`
is a word or a yes or no that decides between two sentences.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from outcomes.analysis.result import Caution, Method, Result

Where = Mapping[str, str | float]


@dataclass(frozen=True)
class RowOf:
    """A row of a table. where: values that pick this row's numbers out of the result."""

    key: str
    label: str
    where: Where = field(default_factory=dict)


@dataclass(frozen=True)
class ColumnOf:
    """A column of a table. kind: how its numbers are written (tables.kind.KINDS). fields: columns of the
    result, in the order of that kind. where: picks further, together with the row's. result: key of another
    result than the table's. An interval without a heading is headed by its level ("95% CI")."""

    key: str
    heading: str
    kind: str
    fields: tuple[str, ...] = ()
    where: Where = field(default_factory=dict)
    result: str = ""
    unit: str = ""
    over: str = ""


@dataclass(frozen=True)
class TableOf:
    """A table of one result (or several). links: (row key, column key) → key of a list of runs."""

    caption: str
    stub: str
    result: str
    rows: tuple[RowOf, ...]
    columns: tuple[ColumnOf, ...]
    notes: tuple[str, ...] = ()
    links: Mapping[tuple[str, str], str] = field(default_factory=dict)


@dataclass(frozen=True)
class FigureOf:
    """A figure. kind: one of figures.draw.KINDS. table: key of the table that holds its numbers. results:
    part in the figure → key of a result. labels, words, options: as that kind of figure asks for."""

    kind: str
    title: str
    table: str
    results: Mapping[str, str] = field(default_factory=dict)
    labels: Mapping[str, str] = field(default_factory=dict)
    words: Mapping[str, str] = field(default_factory=dict)
    options: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class RunList:
    """The runs behind a count: run keys in order."""

    label: str
    run_keys: tuple[str, ...]


@dataclass(frozen=True)
class Answer:
    """All an analysis has to say. Keys of tables and figures are unique in a report. facts hold no digit.

    cautions and methods: those that belong to no single result; a result brings its own.
    """

    results: Mapping[str, Result]
    tables: Mapping[str, TableOf] = field(default_factory=dict)
    figures: Mapping[str, FigureOf] = field(default_factory=dict)
    facts: Mapping[str, bool | str] = field(default_factory=dict)
    cautions: tuple[Caution, ...] = ()
    methods: tuple[Method, ...] = ()
    lists: Mapping[str, RunList] = field(default_factory=dict)

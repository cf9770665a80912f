"""A finished report as plain data: what results.json holds and what the page is drawn from. No HTML here."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from outcomes.analysis.result import Caution, Method, Result
from outcomes.study.answer import RunList
from outcomes.tables.table import Table

# A piece of a sentence: ("text", words), ("emphasis", words), ("code", words), ("cell", table, row, column),
# or a pointer ("table" | "figure" | "section", key).
Part = tuple[str, ...]


@dataclass(frozen=True)
class Block:
    """kind: paragraph, item, heading or verbatim. head: run-in head ("Finding"), '' for none."""

    kind: str
    head: str
    parts: tuple[Part, ...]


@dataclass(frozen=True)
class Figure:
    """A figure before it is drawn. results: part → (call, key) in Report.results."""

    key: str
    kind: str
    title: str
    description: str
    caption: tuple[Part, ...]
    table: str
    results: Mapping[str, tuple[str, str]]
    labels: Mapping[str, str]
    words: Mapping[str, str]
    options: Mapping[str, float]


@dataclass(frozen=True)
class Section:
    """number: 0 for the summary. kind: answer, lists, methods, references, provenance or page.

    findings stand before tables and figures, asides (cautions, method remarks) after them. refused: why
    there is no answer, '' if there is one.
    """

    key: str
    number: int
    kind: str
    question: str
    findings: tuple[Block, ...] = ()
    tables: tuple[Table, ...] = ()
    figures: tuple[Figure, ...] = ()
    asides: tuple[Block, ...] = ()
    cautions: tuple[Caution, ...] = ()
    methods: tuple[Method, ...] = ()
    refused: str = ""


@dataclass(frozen=True)
class Report:
    """results: call → key → result. lists: key → runs behind a count. provenance: label → lines of text."""

    key: str
    version: str
    title: str
    reader: str
    profile: str
    sections: tuple[Section, ...]
    results: Mapping[str, Mapping[str, Result]] = field(default_factory=dict)
    lists: Mapping[str, RunList] = field(default_factory=dict)
    provenance: Mapping[str, tuple[str, ...]] = field(default_factory=dict)

    def tables(self) -> Iterator[Table]:
        """All tables in the order they are shown, which is the order of their numbers."""
        for section in self.sections:
            yield from section.tables

    def figures(self) -> Iterator[Figure]:
        for section in self.sections:
            yield from section.figures

    def caution_count(self) -> int:
        return sum(len(section.cautions) for section in self.sections)

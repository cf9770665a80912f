"""What the page templates are given: sentences, tables and figures as safe markup, and pointers."""

from __future__ import annotations

import base64
from dataclasses import dataclass

from markupsafe import Markup

from outcomes.figures.draw import draw
from outcomes.figures.drawing import Drawing
from outcomes.report.model import Block, Figure, Part, Report, Section
from outcomes.tables.csv_text import csv_text
from outcomes.tables.html import cell_text, table_html
from outcomes.tables.table import Cell, Table, anchor, plain_words

SHORT_LINE, SHORT_ITEMS = 100, 5


@dataclass(frozen=True)
class ListShown:
    """The runs behind one or several counts."""

    key: str
    label: str
    runs: str


class Page:
    """A report with its numbering worked out. Every method returns text or markup of our own making."""

    def __init__(self, report: Report) -> None:
        self.report = report
        self.tables = {table.key: table for table in report.tables()}
        self._table_numbers = {key: n for n, key in enumerate(self.tables, start=1)}
        self._figure_numbers = {f.key: n for n, f in enumerate(report.figures(), start=1)}
        self._sections = {section.key: section for section in report.sections}
        self._referred = set(self._references())

    def _references(self) -> list[str]:
        blocks = [b.parts for s in self.report.sections for b in (*s.findings, *s.asides)]
        captions = [figure.caption for figure in self.report.figures()]
        return [anchor(*part[1:]) for parts in (*blocks, *captions) for part in parts if part[0] == "cell"]

    def parts(self, parts: tuple[Part, ...]) -> Markup:
        """A sentence. A cell stands in a span that names the cell it repeats."""
        return Markup("").join(self._part(part) for part in parts)

    def _part(self, part: Part) -> Markup:
        kind, words = part[0], part[1]
        if kind == "cell":
            cell = self.tables[part[1]].cell(part[2], part[3])
            return Markup('<span data-ref="{}">{}</span>').format(anchor(*part[1:]), cell_text(cell))
        if kind in ("table", "figure", "section"):
            return self.pointer(kind, words)
        if kind == "emphasis":
            return Markup("<em>{}</em>").format(words)
        if kind == "code":
            return Markup("<code>{}</code>").format(words)
        return Markup("{}").format(words)

    def pointer(self, kind: str, key: str) -> Markup:
        """A link that says where it leads: "Table 3", "Figure 2", "section 4"."""
        if kind == "table":
            return Markup('<a href="#t-{}">Table {}</a>').format(key, self._table_numbers[key])
        if kind == "figure":
            return Markup('<a href="#f-{}">Figure {}</a>').format(key, self._figure_numbers[key])
        number = self._sections[key].number
        name = f"section {number}" if number else "the summary"
        return Markup('<a href="#s-{}">{}</a>').format(key, name)

    def pointers(self, keys: tuple[str, ...]) -> Markup:
        return Markup(", ").join(self.pointer("section", key) for key in keys)

    def table(self, table: Table) -> Markup:
        return table_html(table, self._table_numbers[table.key], self._referred)

    def figure_number(self, figure: Figure) -> int:
        return self._figure_numbers[figure.key]

    def svg(self, figure: Figure) -> Markup:
        """The figure, drawn now from the results in the report."""
        results = {part: self.report.results[call][key] for part, (call, key) in figure.results.items()}
        drawing = Drawing(
            figure.key, figure.title, figure.description, self.tables[figure.table], results,
            figure.labels, figure.words, figure.options,
        )  # fmt: skip
        return Markup(draw(figure.kind, drawing))

    def download_name(self, figure: Figure) -> str:
        return f"fig-{self.figure_number(figure):02d}.csv"

    def download(self, figure: Figure) -> str:
        """The figure's table as a data address."""
        text = csv_text(self.tables[figure.table])
        return "data:text/csv;charset=utf-8;base64," + base64.b64encode(text.encode("utf-8")).decode("ascii")

    def lists(self) -> list[ListShown]:
        """The lists of runs that a shown count links to, in order of first use."""
        cells = (cell for table in self.report.tables() for row in table.rows for cell in row.cells)
        used = dict.fromkeys(cell.link for cell in cells if isinstance(cell, Cell) and cell.link)
        shown = []
        for key in used:
            runs = self.report.lists[key]
            text = ", ".join(plain_words(run) for run in runs.run_keys)
            shown.append(ListShown(key, plain_words(runs.label), text))
        return shown

    def warned(self) -> list[tuple[Section, int]]:
        """Sections with cautions, and how many each has."""
        return [(s, len(s.cautions)) for s in self.report.sections if s.cautions]

    def short_provenance(self) -> list[tuple[str, str]]:
        """What the foot of the first page repeats of the provenance: a few items of one short line."""
        items = [(label, lines[0]) for label, lines in self.report.provenance.items() if len(lines) == 1]
        return [(label, line) for label, line in items if len(line) <= SHORT_LINE][:SHORT_ITEMS]

    def asides(self, section: Section) -> tuple[Block, ...]:
        """What stands below tables and figures: all cautions as one paragraph, then method and notes."""
        written = [block for block in section.asides if block.head == "Caution"]
        others = [block for block in section.asides if block.head != "Caution"]
        fired: list[tuple[Part, ...]] = [(("text", plain_words(c.text)),) for c in section.cautions]
        pieces = [*(block.parts for block in written), *fired]
        if not pieces:
            return tuple(others)
        joined = pieces[0]
        for piece in pieces[1:]:
            joined = (*joined, ("text", " "), *piece)
        return (Block("paragraph", "Caution", joined), *others)

"""Lays results out as the tables and figures that an answer asks for. Finds numbers; never makes one."""

from __future__ import annotations

from collections.abc import Mapping

from outcomes.analysis.result import Caution, Method, Result
from outcomes.report.model import Figure, Part
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, TableOf
from outcomes.tables.format import interval_name
from outcomes.tables.from_result import cell_of, find
from outcomes.tables.table import Column, Row, Table


def lay_out_table(key: str, recipe: TableOf, results: Mapping[str, Result], caption: str = "") -> Table:
    """The table of a recipe. caption: instead of the recipe's. KeyError, ValueError: it is wrong."""
    level = interval_name(results[recipe.result].method.level)
    columns = tuple(
        Column(c.key, c.heading or _level(c, recipe, results), c.kind, c.unit, c.over) for c in recipe.columns
    )
    rows = tuple(_row(row, recipe, results) for row in recipe.rows)
    return Table(key, caption or recipe.caption, recipe.stub, columns, rows, recipe.notes, level)


def _level(column: ColumnOf, recipe: TableOf, results: Mapping[str, Result]) -> str:
    return interval_name(results[column.result or recipe.result].method.level)


def _row(row: RowOf, recipe: TableOf, results: Mapping[str, Result]) -> Row:
    cells = []
    for column in recipe.columns:
        source = find(results[column.result or recipe.result], {**row.where, **column.where})
        link = recipe.links.get((row.key, column.key), "")
        cells.append(cell_of(column.kind, source, column.fields, link))
    return Row(row.key, row.label, tuple(cells))


def lay_out_figure(
    key: str, recipe: FigureOf, call: str, caption: tuple[Part, ...], description: str
) -> Figure:
    """The figure of a recipe, with the words that the section file gives it."""
    results = {part: (call, name) for part, name in recipe.results.items()}
    return Figure(
        key, recipe.kind, recipe.title, description, caption, recipe.table, results,
        recipe.labels, recipe.words, {name: float(value) for name, value in recipe.options.items()},
    )  # fmt: skip


def used_results(answer: Answer, tables: tuple[str, ...], figures: tuple[str, ...]) -> list[str]:
    """Keys of the results behind these tables and figures of the answer, each once, in order of use."""
    used: dict[str, None] = {}
    for key in tables:
        used[answer.tables[key].result] = None
        used.update(dict.fromkeys(c.result for c in answer.tables[key].columns if c.result))
    for key in figures:
        used.update(dict.fromkeys(answer.figures[key].results.values()))
    return list(used)


def cautions_of(answer: Answer, used: list[str]) -> tuple[Caution, ...]:
    """Every caution once, the results' own first."""
    found = [note for key in used for note in answer.results[key].notes]
    return tuple(dict.fromkeys([*found, *answer.cautions]))


def methods_of(answer: Answer, used: list[str]) -> tuple[Method, ...]:
    """Every method once, in order of use."""
    return tuple(dict.fromkeys([*(answer.results[key].method for key in used), *answer.methods]))

"""A table as HTML: caption, head, scopes, ids for the cells that sentences refer to, marks explained."""

from __future__ import annotations

from collections.abc import Collection
from itertools import groupby

from markupsafe import Markup

from outcomes.tables.format import MARKS
from outcomes.tables.kind import KINDS
from outcomes.tables.table import Cell, Column, Table, anchor, plain_words

SHORT = 15  # rows; a table up to this length is not parted between printed pages
_FIGURE_SPACE, _POINT_SPACE = "\N{FIGURE SPACE}", "\N{PUNCTUATION SPACE}"


def table_html(table: Table, number: int, referred: Collection[str] = ()) -> Markup:
    """The table in a region that scrolls by itself, with its notes below.

    number: the table's number in the report. referred: ids (`anchor`) of the cells a sentence refers to; only
    these cells carry an id.
    """
    short = " short" if len(table.rows) <= SHORT else ""
    caption = Markup('<caption id="{}">{} {}</caption>').format(
        caption_id(table.key),
        Markup('<span class="label">Table {}.</span>').format(number),
        plain_words(table.caption),
    )
    return Markup(
        '<div class="table{}" id="t-{}">\n'
        '<div class="scroll" role="region" tabindex="0" aria-labelledby="{}">\n'
        "<table>\n{}\n{}\n{}\n</table>\n</div>\n{}</div>"
    ).format(
        short, table.key, caption_id(table.key), caption, _head(table), _body(table, referred), _notes(table)
    )


def caption_id(key: str) -> str:
    return f"t-{key}-caption"


def cell_text(cell: Cell) -> Markup:
    """The text of a cell; a mark carries its meaning for screen readers and on pointing."""
    if cell.mark:
        return Markup('<abbr title="{}">{}</abbr>').format(MARKS[cell.mark], cell.mark)
    return Markup("{}").format(cell.text)


def _head(table: Table) -> Markup:
    if not any(column.over for column in table.columns):
        heads = [Markup('<th scope="col">{}</th>').format(plain_words(table.stub))]
        heads += [_heading(column, "") for column in table.columns]
        return Markup("<thead>\n<tr>{}</tr>\n</thead>").format(Markup("").join(heads))
    upper = [Markup("<td></td>")]
    for over, group in groupby(table.columns, key=lambda column: column.over):
        members = list(group)
        upper.append(_over(table, over, members))
    lower = [Markup('<th scope="col">{}</th>').format(plain_words(table.stub))]
    lower += [_heading(column, _column_id(table, column)) for column in table.columns]
    return Markup("<thead>\n<tr>{}</tr>\n<tr>{}</tr>\n</thead>").format(
        Markup("").join(upper), Markup("").join(lower)
    )


def _over(table: Table, over: str, members: list[Column]) -> Markup:
    if not over:
        return Markup("<td></td>") * len(members)
    return Markup('<th scope="colgroup" colspan="{}" class="over" id="{}">{}</th>').format(
        len(members), _over_id(table, members[0]), plain_words(over)
    )


def _heading(column: Column, identity: str) -> Markup:
    attributes = Markup(' id="{}"').format(identity) if identity else Markup("")
    return Markup('<th scope="col" class="{}"{}>{}</th>').format(
        _side(column), attributes, plain_words(column.full_heading)
    )


def _side(column: Column) -> str:
    return "number" if KINDS[column.kind].is_number else "word"


def _column_id(table: Table, column: Column) -> str:
    return f"t-{table.key}-head-{column.key}"


def _over_id(table: Table, first: Column) -> str:
    return f"t-{table.key}-over-{first.key}"


def _headers(table: Table) -> dict[str, str]:
    """Column key → ids of its headings, for a table with two rows of headings."""
    if not any(column.over for column in table.columns):
        return {}
    out = {}
    for over, group in groupby(table.columns, key=lambda column: column.over):
        members = list(group)
        for column in members:
            above = f"{_over_id(table, members[0])} " if over else ""
            out[column.key] = f"{above}{_column_id(table, column)}"
    return out


def _body(table: Table, referred: Collection[str]) -> Markup:
    padding = {column.key: _padding(table, column) for column in table.columns}
    headers = _headers(table)
    lines = []
    for row in table.rows:
        cells = [Markup('<th scope="row">{}</th>').format(plain_words(row.label))]
        for column, cell in zip(table.columns, row.cells, strict=True):
            identity = anchor(table.key, row.key, column.key)
            cells.append(_cell(column, cell, identity if identity in referred else "", headers, padding))
        lines.append(Markup("<tr>{}</tr>").format(Markup("").join(cells)))
    return Markup("<tbody>\n{}\n</tbody>").format(Markup("\n").join(lines))


def _cell(
    column: Column, cell: Cell, identity: str, headers: dict[str, str], padding: dict[str, dict[str, str]]
) -> Markup:
    attributes = Markup("")
    if identity:
        attributes += Markup(' id="{}"').format(identity)
    if column.key in headers:
        attributes += Markup(' headers="{}"').format(headers[column.key])
    text = cell_text(cell)
    if cell.link:
        text = Markup('<a href="#l-{}">{}</a>').format(cell.link, text)
    return Markup('<td class="{}"{}>{}{}</td>').format(
        _side(column), attributes, text, padding[column.key].get(cell.text, "")
    )


def _padding(table: Table, column: Column) -> dict[str, str]:
    """Text → spaces of a digit's width that bring the decimal points of a column in line."""
    if not KINDS[column.kind].is_number or len(KINDS[column.kind].parts) > 1:
        return {}
    texts = {table.cell(row.key, column.key).text for row in table.rows}
    places = {text: len(text.partition(".")[2].rstrip("%")) for text in texts if text[-1:].isdigit()}
    most = max(places.values(), default=0)
    return {text: _spaces(have, most) for text, have in places.items()}


def _spaces(have: int, most: int) -> str:
    return (_POINT_SPACE if most and not have else "") + _FIGURE_SPACE * (most - have)


def _notes(table: Table) -> Markup:
    notes = [plain_words(note) for note in table.notes]
    marks = [f"{mark} {MARKS[mark]}" for mark in table.marks()]
    if marks:
        notes.append("; ".join(marks) + ".")
    lines = [Markup('<p class="note">{}</p>\n').format(note) for note in notes]
    return Markup("").join(lines)

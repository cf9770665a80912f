"""A table as CSV text: numbers stay numbers, text can never become a formula in a spreadsheet.

Lines end with CR LF. Every text field is quoted. A text that a spreadsheet could read as a formula, at its
start or after a sign that a wrong choice of separator would split it at, gets an apostrophe there.
"""

from __future__ import annotations

import re

from outcomes.tables.format import MINUS
from outcomes.tables.kind import KINDS
from outcomes.tables.table import Table, plain_words

_NUMBER = re.compile(r"-?\d+(?:\.\d+)?")
_FORMULA = re.compile(
    "((?:^|[\"',;|])\\s*)(?=[=+\\-@\N{FULLWIDTH EQUALS SIGN}\N{FULLWIDTH PLUS SIGN}"
    "\N{FULLWIDTH HYPHEN-MINUS}\N{FULLWIDTH COMMERCIAL AT}])"
)


def harmless(text: str) -> str:
    """The text as one line, with an apostrophe wherever a spreadsheet could see the start of a formula.

    >>> harmless("=1+2"), harmless("a;@x"), harmless("weaned")
    ("'=1+2", "a;'@x", 'weaned')
    """
    return _FORMULA.sub(r"\1'", plain_words(text).replace(MINUS, "-"))


def csv_text(table: Table) -> str:
    """The whole table: a row of headings, then one line a row. No caption and no notes."""
    headings = [table.stub]
    for column in table.columns:
        name = f"{column.over}, {column.full_heading}" if column.over else column.full_heading
        headings += [f"{name}, {part}" if part else name for part in KINDS[column.kind].parts]
    lines = [",".join(_quoted(h) for h in headings)]
    for row in table.rows:
        fields = [_quoted(row.label)]
        for column, cell in zip(table.columns, row.cells, strict=True):
            fields += [_field(part, KINDS[column.kind].is_number) for part in cell.plain]
        lines.append(",".join(fields))
    return "".join(f"{line}\r\n" for line in lines)


def _field(part: str, is_number: bool) -> str:
    return part if is_number and _NUMBER.fullmatch(part) else _quoted(part)


def _quoted(text: str) -> str:
    doubled = harmless(text).replace('"', '""')
    return f'"{doubled}"'

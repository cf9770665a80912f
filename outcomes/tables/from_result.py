"""From a finished result to the cells of a table: one row of the result is found, its numbers are written."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import pandas as pd

from outcomes.analysis.result import Result
from outcomes.tables.format import MARKS, ascii_number
from outcomes.tables.kind import KINDS
from outcomes.tables.table import Cell, plain_words

Where = Mapping[str, str | float]

# What is printed where a reason code stands in place of a number; any other code is "not estimable".
REASON_TEXT: Mapping[str, str] = {
    "": "[x]",
    "not_recorded": "[x]",
    "withheld": "[c]",
    "not_applicable": "[z]",
    "nobody": "[z]",
    "too_few": "[low]",
    "not_reached": "not reached",
}


def find(result: Result, where: Where) -> Mapping[str, object] | None:
    """The one row of the result with these values, as a mapping; None if there is none.

    ValueError if several rows fit: then the table's layout is wrong.
    """
    fits = pd.Series(True, index=result.table.index)
    for name, wanted in where.items():
        fits &= (result.table[name] == wanted).fillna(False).astype(bool)
    found = result.table[fits]
    if len(found) > 1:
        raise ValueError(f"{len(found)} rows of the result fit one cell")
    if found.empty:
        return None
    return {str(name): _plain_value(found[name].iloc[0]) for name in found.columns}


def _plain_value(value: object) -> object:
    """None for any kind of missing value, Python numbers for NumPy ones."""
    if value is None or value is pd.NA or value is pd.NaT or value != value:
        return None
    return value.item() if hasattr(value, "item") else value


def cell_of(
    kind: str, source: Mapping[str, object] | None, fields: Sequence[str] = (), link: str = ""
) -> Cell:
    """A cell of this kind from one row of a result.

    fields: columns of the row, in the order of the kind's own fields; those names if empty. source None
    stands for "does not apply here". A missing number gives the mark or words of the row's reason.
    """
    takes = fields or KINDS[kind].fields
    if len(takes) != len(KINDS[kind].fields):
        raise ValueError(f"a column of kind {kind} takes {', '.join(KINDS[kind].fields)}")
    if source is None:
        return marked(kind, "[z]")
    values = [source[name] for name in takes]
    if any(value is None for value in values):
        return marked(kind, reason_text(str(source.get("reason") or "")))
    return written(kind, values, link)


def written(kind: str, values: Sequence[object], link: str = "") -> Cell:
    """A cell of this kind from its values."""
    spec = KINDS[kind]
    if not spec.is_number:
        values = [plain_words(v) if isinstance(v, str) else v for v in values]
    text = spec.text(*values)
    if text in MARKS:
        return marked(kind, text)
    plain = spec.plain(*values) if spec.plain else ascii_number(text)
    first = values[0]
    single = float(first) if isinstance(first, int | float) and not isinstance(first, bool) else None
    return Cell(text, plain, single, link)


def marked(kind: str, text: str) -> Cell:
    """A cell that holds a mark or words in place of numbers, repeated in every CSV part."""
    return Cell(text, (text,) * len(KINDS[kind].parts))


def reason_text(code: str) -> str:
    """What is printed for a reason code.

    >>> reason_text("too_few"), reason_text("separation")
    ('[low]', 'not estimable')
    """
    return REASON_TEXT.get(code, "not estimable")

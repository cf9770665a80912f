"""The header of a table: which columns there are, and what is wrong with it."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Sequence

from outcomes.findings import shape_of
from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.delimited import SEPARATORS
from outcomes.intake.reading.grid import Row, is_blank, text_of
from outcomes.intake.reading.limits import COLUMNS, HEADER_CHARS

_VALUE = re.compile(r"[-+]?[0-9][0-9.,:/T -]*( ?[AaPp][Mm])?")


def fold(header: str) -> str:
    """Two headers with the same fold are the same to a reader's eye."""
    return unicodedata.normalize("NFC", unicodedata.normalize("NFC", header).strip().casefold())


def looks_like_value(name: str) -> bool:
    """A number, a date or a time, as a header hardly ever is."""
    return bool(_VALUE.fullmatch(name))


def judge_header(row: Row | None, line: int, separator: str, defects: Defects) -> tuple[str, ...]:
    """Headers of all columns, '' where there is none. separator: '' if the file has none. Raises Fatal if the
    line cannot be a header at all; lists twins and overlong headers."""
    if row is None:
        raise defects.fatal("READ.HEADER-LINE", line, detail="the table ends before this line")
    if is_blank(row.cells):
        raise defects.fatal("READ.HEADER-LINE", line, detail="the line is blank")
    names = tuple(unicodedata.normalize("NFC", text_of(cell)).strip() for cell in row.cells)
    if len(names) > COLUMNS:
        raise defects.fatal("READ.COLUMNS", line, detail=f"{len(names)} columns")
    if len(names) == 1 and separator:
        _refuse_other_separator(names[0], separator, line, defects)
    _list_twins(names, line, defects)
    filled = [name for name in names if name]
    if sum(1 for name in filled if looks_like_value(name)) * 2 > len(filled):
        defects.add("READ.HEADER-DATA", line)
    return names


def _refuse_other_separator(name: str, separator: str, line: int, defects: Defects) -> None:
    for other in SEPARATORS:
        if other != separator and other in name:
            said = "tab" if other == "\t" else other
            raise defects.fatal("READ.SEPARATOR", line, 1, detail=f"{name.count(other)} times {said}")


def _list_twins(names: Sequence[str], line: int, defects: Defects) -> None:
    seen: dict[str, int] = {}
    for column, name in enumerate(names, 1):
        if len(name) > HEADER_CHARS:
            defects.add("READ.HEADER-LONG", line, column, shape=shape_of(name))
        if name and fold(name) in seen:
            defects.add(
                "READ.HEADER-TWIN",
                line,
                column,
                detail=f"same as column {seen[fold(name)]}",
                shape=shape_of(name),
            )
        seen.setdefault(fold(name), column)

"""A first mapping file from headers and distributions; what they cannot show is marked '?' and waits for a person."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence

from outcomes.errors import DataRefused, UsageError
from outcomes.intake.draft_codes import OPEN
from outcomes.intake.draft_file import file_lines
from outcomes.intake.draft_profile import cell_word, profile
from outcomes.intake.draft_role import DraftSheet, assign_roles, code_lists
from outcomes.intake.draft_sheet import fill, kept, part_twins
from outcomes.intake.draft_source import complication_lines, source_lines
from outcomes.intake.draft_text import comment
from outcomes.intake.mapping_file import KEY, unsettled
from outcomes.intake.reading.grid import Cell
from outcomes.intake.reading.outline import SheetOutline, outline
from outcomes.intake.vocabulary import vocabulary

_HOW_TO = (
    "A draft. Search for a question mark in quotes and put an answer in its place; the comment above it says what was "
    "seen and what may stand there. Everything else is a proposal: read it, and correct it. "
    "`outcomes mapping check` names what is still open, `outcomes describe` explains fields, units and codes. "
    "A column that you do not want: delete its block and its place in the groups of empty cells, and add its header "
    "to leave_out. A code may also lead to not recorded, not applicable or none."
)


def draft_mapping(datas: Sequence[bytes], key: str) -> tuple[str, int]:
    """TOML text of a draft and the number of its open questions. datas: the bytes of each file; key: of the source.

    Shows no value of a cell, except codes of short code columns and rounded quartiles. The same files give the same
    text. Raises DataRefused for a file that cannot be read, UsageError MAPPING.KEY for a key that cannot be one.
    """
    if not KEY.fullmatch(key):
        raise UsageError(
            "MAPPING.KEY",
            "the key of a source is a short word",
            todo="use a-z, 0-9 and _, at most 24, a letter first",
        )
    outlines = [outline(data, key=f"file{number}") for number, data in enumerate(datas, start=1)]
    files = [
        _look(found, f"file{number}_" if len(datas) > 1 else "", number)
        for number, found in enumerate(outlines, start=1)
    ]
    sheets = [sheet for tables in files for sheet in tables]
    assign_roles(sheets)
    lists = code_lists(sheets)
    for sheet in sheets:
        if not sheet.is_list:
            fill(sheet, lists)
    part_twins([sheet for sheet in sheets if not sheet.is_list])
    body = [*complication_lines(_kinds(sheets))]
    for number, (found, tables) in enumerate(zip(outlines, files, strict=True), start=1):
        body += file_lines(f"file{number}", found, tables)
    head = ["format = 1", "", "[source]", f'key = "{key}"', *source_lines()]
    text = "\n".join([*head, *body]) + "\n"
    n_open = len(unsettled(tomllib.loads(text)))
    return "\n".join(
        [
            *comment(_HOW_TO),
            *comment(f"{n_open} questions are open." if n_open != 1 else "1 question is open."),
            text,
        ]
    ), n_open


def _look(found: Sequence[SheetOutline], prefix: str, number: int) -> list[DraftSheet]:
    """Every table of a file that can be read, with the profile of each column. prefix: of the sheets' keys."""
    sheets = []
    for table in found:
        is_worth = table.n_rows or len(found) == 1
        columns = dict(table.columns()) if table.refusal is None and is_worth else {}
        if columns:
            _refuse_data_row(columns, number)
            key = f"{prefix}sheet{table.position}"
            sheets.append(
                DraftSheet(key, table, columns, {h: profile(cells) for h, cells in columns.items()})
            )
    if not sheets:
        raise DataRefused("DRAFT.EMPTY", f"file {number} holds no table", todo="name another file")
    return sheets


def _refuse_data_row(columns: dict[str, list[Cell]], number: int) -> None:
    """A draft shows headers. A file without any would show the first row instead: a header that is also a code of its
    own column gives it away."""
    again = sum(header in set(map(cell_word, cells)) for header, cells in columns.items())
    if again >= 2 or (again and again == len(columns)):
        raise DataRefused(
            "DRAFT.HEADER",
            f"file {number}: the line taken for the header looks like a row of data",
            todo="put a line of headers above the rows",
        )


def _kinds(sheets: Sequence[DraftSheet]) -> list[str]:
    """Complication kinds that the proposals lead to; '?' if nothing is known of the codes of events."""
    known = vocabulary().lists["complication_kind"]
    kinds: set[str] = set()
    for made in (p for sheet in sheets for p in kept(sheet)):
        if made.target.startswith("complication."):
            kinds.add(made.target.split(".")[1])
        codes = made.values.get("codes")
        if made.target == "complication_event.kind":
            kinds |= (
                set(codes.values()) & (known | {OPEN})
                if isinstance(codes, dict)
                else set(made.likely or [OPEN])
            )
    return sorted(kinds)

"""Guesses for a file that nothing is declared of yet. Each comes with its evidence; only a draft may rest on
them."""

from __future__ import annotations

import contextlib
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import islice
from typing import BinaryIO

from outcomes.intake.reading.defects import Defects, Fatal
from outcomes.intake.reading.delimited import SEPARATORS, Delimited
from outcomes.intake.reading.grid import Cell, ErrorCell, FileSpec, Row, SheetSpec, is_blank, text_of
from outcomes.intake.reading.header import fold, looks_like_value
from outcomes.intake.reading.limits import MIB
from outcomes.intake.reading.text import decoding

LOOKED_AT = 200  # rows from the top of a table
_HEADER_WITHIN = 40
_CODE_LENGTH = 6
_CODES = 100


@dataclass(frozen=True)
class Guess:
    """value: what was found; evidence: why, in numbers and our own words; is_sure: it was read, not
    guessed."""

    value: str
    evidence: str
    is_sure: bool = False


def guess_encoding(stream: BinaryIO) -> Guess:
    """By byte-order mark, else strict UTF-8, else UTF-16 by its zero bytes, else cp1252 as a guess."""
    stream.seek(0)
    head = stream.read(MIB)
    try:
        how = decoding(stream, "utf-8", Defects(""))
    except Fatal:
        return Guess("utf-8", "a byte-order mark that is not read")
    if how.by_mark:
        return Guess(how.encoding, "byte-order mark", True)
    first, second = head[::2].count(0), head[1::2].count(0)
    if first != second and min(first, second) * 10 < max(first, second):
        order = "utf-16-le" if second > first else "utf-16-be"
        return Guess(order, f"{max(first, second)} zero bytes in every second place")
    return _utf8_or_not(stream)


def _utf8_or_not(stream: BinaryIO) -> Guess:
    stream.seek(0)
    number = n_beyond = 0
    while line := stream.readline(MIB):
        number += 1
        if line.isascii():
            continue
        n_beyond += 1
        try:
            line.decode("utf-8")
        except UnicodeDecodeError:
            return Guess(
                "cp1252", f"line {number} is not valid UTF-8; a Western single-byte encoding is likely"
            )
    return Guess("utf-8", f"valid throughout, {n_beyond} lines beyond ASCII", True)


def guess_separator(stream: BinaryIO, encoding: str) -> Guess:
    """The separator that cuts most of the first lines into the same number of cells, two at least."""
    best, best_key = Guess(",", "every line is a single cell"), (0.0, 1)
    for separator in SEPARATORS:
        rows = top_rows(stream, FileSpec("", "csv", encoding, separator))
        widths = Counter(row.width for row in rows if row.width)
        if not widths:
            continue
        width, n = max(widths.items(), key=lambda item: (item[1] * (item[0] > 1), item[0]))
        key = (n / widths.total(), width)
        if width > 1 and key > best_key:
            best, best_key = Guess(separator, f"{width} cells in {n} of {widths.total()} lines"), key
    return best


def top_rows(stream: BinaryIO, spec: FileSpec) -> list[Row]:
    """The first rows of a text file, titles included; whatever is wrong with them is judged elsewhere."""
    rows: list[Row] = []
    source = Delimited(stream, replace(spec, sheets=()), SheetSpec())
    with contextlib.suppress(Fatal):
        rows.extend(islice(source.rows(Defects("")), LOOKED_AT))
    return rows


def guess_header(rows: Sequence[Row]) -> tuple[int, str]:
    """Line of the header among the first rows, and why.

    It is the first row whose cells are all filled, distinct words and as wide as the table; failing that, the
    first row that is as wide as the table.
    """
    filled = [(row.line, _trimmed(row.cells)) for row in rows if not is_blank(row.cells)]
    if not filled:
        return 1, "the table is empty"
    widths = Counter(len(cells) for _, cells in filled)
    width = max(widths, key=lambda w: (widths[w] * (w > 1), w))
    for line, cells in filled[:_HEADER_WITHIN]:
        if len(cells) >= width and _is_header(cells):
            return line, f"first row of {len(cells)} filled, distinct words"
    line = next(line for line, cells in filled if len(cells) >= width)
    return line, f"no row looks like a header; this is the first of {width} cells"


def _trimmed(cells: Sequence[Cell]) -> list[Cell]:
    n = len(cells)
    while n and not text_of(cells[n - 1]).strip():
        n -= 1
    return list(cells[:n])


def _is_header(cells: Sequence[Cell]) -> bool:
    words = [fold(cell) for cell in cells if isinstance(cell, str)]
    return len(words) == len(cells) == len(set(words)) and all(w and not looks_like_value(w) for w in words)


def is_code_list(columns: Sequence[Sequence[Cell]], blocks: Sequence[int]) -> bool:
    """A narrow table of short codes, different within each block of rows, beside their meaning in words.

    blocks: number of the block that each row belongs to.
    """
    if len(columns) != 2 or not 1 <= len(blocks) <= _CODES:
        return False
    codes = [text_of(cell).strip() for cell in columns[0]]
    meanings = columns[1]
    if any(isinstance(cell, ErrorCell) for cell in columns[0]) or len(
        set(zip(blocks, codes, strict=True))
    ) < len(codes):
        return False
    has_words = all(isinstance(cell, str) and any(c.isalpha() for c in cell) for cell in meanings)
    return has_words and all(0 < len(code) <= _CODE_LENGTH for code in codes)

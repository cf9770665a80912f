"""Rows that are not data: the header again, units below the header, totals, footers and headings among the
rows.

The word lists are common practice of hospital exports in the languages that sites of such programmes use.
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from outcomes.intake.reading.grid import Cell, Number, is_blank, text_of
from outcomes.intake.reading.header import fold

_TOTAL = re.compile(
    "(grand )?totals?|sums?|summen?|gesamt|gesamtsumme|insgesamt|sub-?total|zwischensumme|totaal|somme|suma"
    "|totale|total g[eé]n[eé]ral"
)
_SUMMARY = re.compile(
    f"{_TOTAL.pattern}|mean|average|median|mittelwert|durchschnitt|moyenne|count|anzahl|min|max|sd"
)
_FOOTER = re.compile(
    "(total|sum|summe|gesamt|end of|ende|report|printed|created|generated|exported|source|quelle|stand"
    "|erstellt|gedruckt|seite|page|notes?|hinweis|legend|legende|copyright)\\b"
    "|[©*]|\\(c\\)|n ?=|[0-9]+ (rows|records|zeilen)"
)
_WORDS = re.compile(r"[^\W\d_]{2,}\S*\s+(?:.*\s)?[^\W\d_]{2,}")
_NUMBER = re.compile(r"[-+]?[0-9][0-9 .,'\u00a0]*%?")
_UNIT = re.compile(
    "[\\[(]?("
    "[nµμukmcd]?(mol|g|l|m|eq|iu|u|osm|bar|pa|s)(/[nµμukmcd]?(l|g|min|h|m|m2|m²|d|day|s))*"
    "|[kg]/[µμu]?l|x?10[\\^*]?[0-9]+/[µμu]?l|mm ?hg|cm ?h2o|%|‰|°c|°f|lbs?|in|ft|1?/min|bpm|kg/m[2²]"
    "|h|hrs?|hours?|mins?|minutes?|sec|d|days?|y|yrs?|years?|jahre?|tage?|stunden|std"
    "|units?|einheit|score|points?|punkte|text|date|datum|datetime|yes/no|ja/nein|[yj]/n|[01]/[01]"
    "|(yyyy|jjjj|dd|tt|mm)([-./ :]?(yyyy|jjjj|mm|dd|tt|hh|ss|am))+"
    ")[\\])]?"
)
_LOOKED_AT = 200  # characters of a cell: what these words are looked for in is short
_DASHES = frozenset(["-", "–", "—", "/", "."])


def is_header_again(cells: Sequence[Cell], folded: Sequence[str]) -> bool:
    """The row repeats the header. folded: `header.fold` of every header."""
    if len(cells) < len(folded) or fold(text_of(cells[0])) != folded[0]:
        return False
    return all(fold(text_of(cell)) == name for cell, name in zip(cells, folded, strict=False))


def is_units(cells: Sequence[Cell]) -> bool:
    """Every filled cell is the name of a unit or of a format, and at least two are, or half of the columns.

    >>> is_units(["", "kg", "mmol/l", "(%)"]), is_units(["7", "m", "kg"])
    (True, False)
    """
    words = [text_of(cell).strip().casefold() for cell in cells]
    words = [word for word in words if word and word not in _DASHES]
    return (
        any(len(word) > 1 or word == "%" for word in words)
        and len(words) * 2 >= min(4, len(cells))
        and all(_UNIT.fullmatch(word) for word in words)
    )


def is_totals(cells: Sequence[Cell], *, words_alone: bool = True) -> bool:
    """A row of totals: the first cell says so and the rest is mostly empty or all numbers. Or a footer or a
    heading: words in the first cell and nothing beside them, in a table of three columns or more.

    words_alone: any two words count as a heading, not only those that a footer begins with.

    >>> is_totals(["Total", None, "320", "1,204.5"]), is_totals(["Total", "artificial", "heart"])
    (True, False)
    """
    first, rest = text_of(cells[0])[:_LOOKED_AT].strip().casefold(), cells[1:]
    if (_SUMMARY if len(cells) > 2 else _TOTAL).fullmatch(first.rstrip(" :.=")):
        filled = [cell for cell in rest if text_of(cell).strip()]
        return len(filled) * 2 <= len(rest) or all(_is_number(cell) for cell in filled)
    if len(cells) < 3 or isinstance(cells[0], Number) or not is_blank(rest):
        return False
    return bool(_FOOTER.match(first) or (words_alone and _WORDS.search(first)))


def _is_number(cell: Cell) -> bool:
    return isinstance(cell, Number) or bool(_NUMBER.fullmatch(text_of(cell).strip()))

"""Fills the slots of a section's prose. A slot names a cell and prints that cell's text, nothing else.

    {{ cell("endings", "recovery", "events") }}   the text of a cell
    {{ ci("endings", "recovery") }}               the interval; its level is named at first use in a section
    {{ plural("endings", "recovery", "events", "run was", "runs were") }}
    {% if known("endings", "recovery", "share") %}   is there a number, rather than a mark?
    {% if shown("endings") %}                     is the table in this report?
    {% if fact("any_open") %}                     a yes or no, or a word, that the analysis found
    {{ table("endings") }} {{ figure("curve") }} {{ section("survival") }}   "Table 3" and so on, as a pointer

Slots leave private-use signs in the text, which are then turned into parts. So no text of the data passes
through the template engine's output, and the parts hold no HTML.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

from jinja2 import TemplateError

from outcomes.errors import UsageError
from outcomes.report.model import Part
from outcomes.report.sandbox import sandbox
from outcomes.tables.table import Cell, Table, plain_words

_TOKEN = re.compile("\ue000(\\d+)\ue001")
_INLINE = re.compile(r"\*([^*\s][^*]*)\*|`([^`]+)`")


class _Word(str):
    """A word of a fact: compares as itself, prints as a token."""

    token: str

    def __html__(self) -> str:
        return self.token


class Prose:
    """The slots of one section. tables: those shown in the report. facts: of its analysis. keys: what may be
    pointed to, by kind."""

    def __init__(
        self,
        section: str,
        tables: Mapping[str, Table],
        facts: Mapping[str, bool | str],
        keys: Mapping[str, set[str]],
    ) -> None:
        self._section, self._tables, self._facts, self._keys = section, tables, facts, keys
        self._parts: list[Part] = []
        self._level_named = False
        self._jinja = sandbox({}, trim_blocks=False)
        self._jinja.globals.update(
            cell=self._cell, ci=self._ci, plural=self._plural, known=self._known, fact=self._fact,
            shown=lambda key: key in self._tables, table=self._pointer("table"),
            figure=self._pointer("figure"), section=self._pointer("section"),
        )  # fmt: skip

    def parts(self, text: str) -> tuple[Part, ...]:
        """The text with its slots filled, as parts; empty if nothing but white space is left."""
        self._parts = []
        try:
            filled = self._jinja.from_string(text).render()
        except TemplateError as fault:
            raise self._wrong(f"has a slot that cannot be filled ({type(fault).__name__})") from fault
        out: list[Part] = []
        for place, piece in enumerate(_TOKEN.split(filled)):
            if place % 2:
                out.append(self._parts[int(piece)])
            else:
                typed = _inline(re.sub(r"\s+", " ", piece))
                if any(part[0] == "text" and "*" in part[1] for part in typed):
                    raise self._wrong("has a * that emphasises nothing: emphasis holds typed words only")
                out += typed
        return _trimmed(out)

    def words(self, text: str) -> str:
        """The text with its slots filled, as plain words (captions of tables, descriptions of figures)."""
        return plain_words("".join(self._plain(part) for part in self.parts(text)))

    def _plain(self, part: Part) -> str:
        if part[0] == "cell":
            return self._tables[part[1]].cell(part[2], part[3]).text
        if part[0] in ("table", "figure", "section"):
            raise self._wrong("has a pointer in a caption or description")
        return part[1]

    def _token(self, *part: str) -> str:
        self._parts.append(part)
        return f"\ue000{len(self._parts) - 1}\ue001"

    def _look_up(self, table: str, row: str, column: str) -> Cell:
        if table not in self._tables:
            raise self._wrong(f"refers to the table {table}, which the report does not show")
        try:
            return self._tables[table].cell(row, column)
        except KeyError:
            raise self._wrong(f"refers to a cell that table {table} does not have: {row}, {column}") from None

    def _cell(self, table: str, row: str, column: str) -> str:
        self._look_up(table, row, column)
        return self._token("cell", table, row, column)

    def _ci(self, table: str, row: str, column: str = "interval") -> str:
        slot = self._cell(table, row, column)
        if self._level_named:
            return slot
        self._level_named = True
        return f"{self._token('text', self._tables[table].interval_name)} {slot}"

    def _known(self, table: str, row: str, column: str) -> bool:
        return self._look_up(table, row, column).number is not None

    def _plural(self, table: str, row: str, column: str, one: str, many: str) -> str:
        return one if self._look_up(table, row, column).number == 1 else many

    def _fact(self, name: str) -> bool | _Word:
        if name not in self._facts:
            raise self._wrong(f"asks for a fact its analysis does not give: {name}")
        value = self._facts[name]
        if isinstance(value, bool):
            return value
        word = _Word(plain_words(value))
        if any(sign.isdigit() for sign in word):
            raise self._wrong(f"was given a number in the fact {name}")
        word.token = self._token("text", str(word))
        return word

    def _pointer(self, kind: str) -> Any:
        def point(key: str) -> str:
            if key not in self._keys[kind]:
                raise self._wrong(f"points to a {kind} the report does not have: {key}")
            return self._token(kind, key)

        return point

    def _wrong(self, what: str) -> UsageError:
        return UsageError(
            "REPORT.SLOT", f"the section {self._section} {what}", todo="correct the section file"
        )


def _inline(text: str) -> list[Part]:
    out: list[Part] = []
    end = 0
    for match in _INLINE.finditer(text):
        out.append(("text", text[end : match.start()]))
        out.append(("emphasis", match[1]) if match[1] else ("code", match[2]))
        end = match.end()
    out.append(("text", text[end:]))
    return [part for part in out if part[1]]


def _trimmed(parts: list[Part]) -> tuple[Part, ...]:
    """Without white space at both ends; nothing at all if there is nothing else."""
    if not any(part[0] != "text" or part[1].strip() for part in parts):
        return ()
    if parts[0][0] == "text":
        parts[0] = ("text", parts[0][1].lstrip())
    if parts[-1][0] == "text":
        parts[-1] = ("text", parts[-1][1].rstrip())
    return tuple(part for part in parts if part[0] != "text" or part[1])

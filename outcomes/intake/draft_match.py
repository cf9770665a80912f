"""Which fields the words of a header suggest, and whether they settle the question."""

from __future__ import annotations

import re
from dataclasses import dataclass

from outcomes.intake.draft_analyte import ANALYTES, DRUGS, PRIVATE
from outcomes.intake.draft_words import COMPLICATIONS, FIELDS, plain

DETAIL_TABLES = (
    "weaning_step",
    "support_setting",
    "circuit_configuration",
    "cannula",
    "lv_unloading_episode",
)
_ANYWHERE = ("measurement", "vasoactive_dose", "follow_up", "neuro_outcome")
_ALL: tuple[tuple[str, re.Pattern[str]], ...] = tuple(
    (field, re.compile(words))
    for field, words in (
        *FIELDS,
        *((f"measurement.{name}", words) for name, words in ANALYTES),
        *((f"vasoactive_dose.{name}", words) for name, words in DRUGS),
        *((f"complication.{kind}", words) for kind, words in COMPLICATIONS),
    )
)
_COMPLICATION = tuple((kind, re.compile(words)) for kind, words in COMPLICATIONS)
_PRIVATE = re.compile(PRIVATE)


@dataclass(frozen=True)
class Match:
    """A field whose trade words stand in a header, from `start` to `end` of the folded text."""

    field: str
    start: int
    end: int

    @property
    def length(self) -> int:
        return self.end - self.start


def matches(header: str, row_is: str, table: str = "") -> list[Match]:
    """Every field that the words suggest for such a sheet, the longest match first. table: the subject of a detail sheet."""
    text = plain(header)
    found = []
    for field, words in _ALL:
        if not _belongs(field.split(".")[0], row_is, table):
            continue
        spans = [m.span() for m in words.finditer(text) if m.end() > m.start()]
        if spans:
            start, end = max(spans, key=lambda s: (s[1] - s[0], -s[0]))
            found.append(Match(field, start, end))
    return sorted(found, key=lambda m: (-m.length, m.field))


def _belongs(target: str, row_is: str, table: str) -> bool:
    """Events have their own fields, a sheet of details those of its subject; all others describe a run."""
    if row_is == "event":
        return target == "complication_event"
    if row_is == "detail":
        return target == table or (target in _ANYWHERE and table not in ("weaning_step", "support_setting"))
    return target != "complication_event" and target not in DETAIL_TABLES


def settled(found: list[Match]) -> str:
    """The field that the header names, '' if none or if two are near: of equal length, or each by its own words.

    >>> settled(matches("Chronic dialysis/CKD", "run")), settled(matches("Lactate (mg/dL)", "run"))
    ('', 'measurement.lactate')
    """
    if not found:
        return ""
    best, *rest = found
    for other in rest:
        inside = best.start <= other.start and other.end <= best.end
        if not inside or other.length == best.length:
            return ""
    return best.field


def is_private(header: str) -> bool:
    """The header names a column of names, addresses, numbers of people's contacts, or free words."""
    return bool(_PRIVATE.search(plain(header)))


def complication_in(text: str) -> str:
    """The complication kind that a text names, '' if it names none."""
    folded = plain(text)
    return next((kind for kind, words in _COMPLICATION if words.search(folded)), "")


def subject_of(headers: list[str]) -> str:
    """The table of details that most headers speak of, '' if none does."""
    counts = {
        table: sum(
            any(m.field for m in matches(h, "detail", table) if m.field.startswith(table)) for h in headers
        )
        for table in DETAIL_TABLES
    }
    best = max(counts.values(), default=0)
    tied = [table for table, n in counts.items() if n == best]
    return tied[0] if best >= 2 and len(tied) == 1 else ""

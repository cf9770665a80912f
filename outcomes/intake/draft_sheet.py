"""The columns of one table together: proposals, twins, date and time that belong together, pressures of one reading."""

from __future__ import annotations

import re
from collections.abc import Sequence

from outcomes.intake.draft_codes import OPEN
from outcomes.intake.draft_column import propose
from outcomes.intake.draft_number import number_of
from outcomes.intake.draft_profile import cell_word
from outcomes.intake.draft_proposal import CodeList, Proposal
from outcomes.intake.draft_role import DraftSheet
from outcomes.intake.draft_words import plain
from outcomes.intake.vocabulary import vocabulary

_EXACT = ("birth_date", "moment", "moment_before", "birth_year")
WINDOWED = ("measurement", "vasoactive_dose")
_CLOCK_WORDS = re.compile(r"\b(time|date|datum|zeit|uhrzeit|at)\b|(datum|uhrzeit|zeit)$")


def fill(sheet: DraftSheet, lists: Sequence[CodeList]) -> None:
    """Set `proposals` for every column that names neither run nor person."""
    for header, seen in sheet.profiles.items():
        if header not in (sheet.run, sheet.person):
            sheet.proposals[header] = propose(
                header, seen, sheet.row_is, sheet.subject, list(lists), sheet.counts(header)
            )
    _join_clocks(sheet)
    _pair_pressures(sheet)


def kept(sheet: DraftSheet) -> list[Proposal]:
    return [p for p in sheet.proposals.values() if p.role == "column"]


def targets_of(made: Proposal) -> list[str]:
    """Every field that a column gives, '?' where it is open."""
    fields = made.values.get("fields")
    return [str(f) for f in fields] if isinstance(fields, list) else [made.target]


def is_windowed(made: Proposal) -> bool:
    return any(t.split(".")[0] in WINDOWED for t in targets_of(made))


def _join_clocks(sheet: DraftSheet) -> None:
    """A column of times of day belongs to the column of dates that is called the same but for the word for time."""
    for made in sheet.proposals.values():
        if made.profile.kind != "time" or made.role != "column":
            continue
        stem = _stem(made.header)
        dates = [
            p
            for p in kept(sheet)
            if p.profile.kind == "moment" and _stem(p.header) == stem and "join" not in p.values
        ]
        if len(dates) == 1:
            dates[0].values["join"] = [made.header]
            dates[0].say(
                "join", "the time of day stands in a column of its own and is read together with this date"
            )
            made.role = "join"
        else:
            made.say(
                "field",
                "times of day without a date: join them to the column of their dates, or move the header to leave_out",
            )


def _stem(header: str) -> str:
    return " ".join(_CLOCK_WORDS.sub(" ", plain(header)).split())


def part_twins(sheets: Sequence[DraftSheet]) -> None:
    """Columns for one field of one table: measured values differ by their window, everything else is a question.

    Two tables with one row a run may not give the same field either. Where two fields say the same (a date of birth
    and an age), the more exact one stays.
    """
    shared = [made for sheet in sheets if sheet.row_is == "run" for made in kept(sheet)]
    for columns in (shared, *(kept(sheet) for sheet in sheets if sheet.row_is != "run")):
        groups: dict[tuple[str, str], list[Proposal]] = {}
        for made in columns:
            for target in targets_of(made):
                if target != OPEN:
                    known = vocabulary().fields[target]
                    groups.setdefault((known.table, known.column), []).append(made)
        for twins in groups.values():
            if len(twins) > 1:
                _part(twins)


def _part(twins: Sequence[Proposal]) -> None:
    """A window for each where windows tell them apart; otherwise only a single most exact one stays settled."""
    for made in (t for t in twins if is_windowed(t)):
        made.values["window"] = OPEN
        made.comments["window"] = [f"{len(twins)} columns give {made.target}: each needs a window of its own"]
    plain_ones = [t for t in twins if not is_windowed(t)]
    ranks = [_exactness(t.target) for t in plain_ones]
    for made, rank in zip(plain_ones, ranks, strict=True):
        if rank == min(ranks) and ranks.count(rank) == 1:
            continue
        others = ", ".join(t.header for t in plain_ones if t is not made)
        made.say(
            "field",
            f"reads like {made.target}, as these do: {others}. Keep one, move the others to leave_out",
        )
        made.comments = {"field": made.comments["field"]}
        made.target, made.values = OPEN, {"field": OPEN}


def _exactness(field: str) -> int:
    kind = vocabulary().fields[field].kind
    return _EXACT.index(kind) if kind in _EXACT else len(_EXACT)


def _pair_pressures(sheet: DraftSheet) -> None:
    """Systolic and diastolic columns are one reading if they are filled in the same rows and one lies above the other."""
    found = {
        p.target: p
        for p in kept(sheet)
        if p.target in ("measurement.sbp", "measurement.dbp") and "split" not in p.values
    }
    if len(found) != 2:
        return
    high, low = found["measurement.sbp"], found["measurement.dbp"]
    rows = [(_value(sheet, high, i), _value(sheet, low, i)) for i in range(high.profile.n)]
    both = [(h, lo) for h, lo in rows if h is not None and lo is not None]
    either = [pair for pair in rows if pair != (None, None)]
    if len(both) < 10 or len(both) < 0.98 * len(either):
        return
    above = sum(h >= lo for h, lo in both)
    if above < 0.98 * len(both):
        return
    for made in (high, low):
        made.values["reading"] = "bp"
        made.say(
            "reading",
            f"both pressures are filled in {len(both)} rows, and the systolic one lies above in {above}: taken as one reading",
        )


def _value(sheet: DraftSheet, made: Proposal, row: int) -> float | None:
    word = cell_word(sheet.columns[made.header][row])
    return number_of(word, made.profile.marks) if word else None

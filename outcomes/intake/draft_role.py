"""What the rows of each table are, and which columns name runs and persons, by headers and by how often values repeat."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field

from outcomes.intake.draft_codes import OPEN
from outcomes.intake.draft_match import complication_in, is_private, matches, settled, subject_of
from outcomes.intake.draft_profile import Profile, caught, cell_word
from outcomes.intake.draft_proposal import CodeList, Proposal
from outcomes.intake.draft_words import plain
from outcomes.intake.reading.grid import Cell
from outcomes.intake.reading.outline import SheetOutline

_RUN = re.compile(
    r"\brun\b|\bfall|episode|\bcase\b|\becmo|\becls|support (no|nr|number|id)|laufnr|lauf-?nummer|unterstuetzung"
)
_PERSON = re.compile(r"\bmrn\b|\bpat|person|record|chart|\bpid\b|hospital (no|number|id)|aktenzeichen")
_NUMBER = re.compile(r"\bids?\b|\bno\b|\bnr\b|number|nummer|#|key|code")
_RUN_SHARE, _PERSON_SHARE, _KEY_SHARE = 0.97, 0.5, 0.9


@dataclass(eq=False)
class DraftSheet:
    """One table as the draft sees it. run, person: a header, '?' if it is not clear, '' where none is needed."""

    key: str
    outline: SheetOutline
    columns: dict[str, list[Cell]]
    profiles: dict[str, Profile]
    row_is: str = "run"
    subject: str = ""
    run: str = OPEN
    person: str = ""
    run_why: str = ""
    person_why: str = ""
    proposals: dict[str, Proposal] = field(default_factory=dict)

    @property
    def is_list(self) -> bool:
        return self.row_is == "code list"

    def counts(self, header: str) -> dict[str, int]:
        found: dict[str, int] = {}
        for word in map(cell_word, self.columns[header]):
            if word:
                found[word] = found.get(word, 0) + 1
        return found


def assign_roles(sheets: Sequence[DraftSheet]) -> None:
    """Set row_is, run, person and subject of every sheet."""
    lists = [s for s in sheets if _is_code_list(s)]
    tables = [s for s in sheets if s not in lists] or list(sheets)
    main = max(tables, key=_run_fields, default=None)
    if main is not None:
        _name_keys(main)
        _stand_alone(main)
    for sheet in sheets:
        if sheet is main:
            continue
        if sheet in lists and not (main and plain(next(iter(sheet.columns))) == plain(main.run)):
            sheet.row_is, sheet.run = "code list", ""
        else:
            _follow(sheet, main)


def _is_code_list(sheet: DraftSheet) -> bool:
    """Codes beside meanings that differ too, under a header that does not speak of runs or persons."""
    if not sheet.outline.is_code_list:
        return False
    header, meanings = next(iter(sheet.columns)), list(sheet.columns.values())[1]
    keyed = _RUN.search(plain(header)) or _PERSON.search(plain(header))
    return not keyed and len(set(map(cell_word, meanings))) >= 0.9 * len(meanings)


def _run_fields(sheet: DraftSheet) -> tuple[int, int]:
    """How many columns name a field of a run; the widest table wins a tie."""
    named = {settled(matches(h, "run")) for h in sheet.columns if not is_private(h)}
    has_start = "support_run.start" in named
    return (len(named - {""}) + 5 * has_start, len(sheet.columns))


def _keys(sheet: DraftSheet, least: float) -> list[str]:
    """Columns that could number something: filled, rarely repeating, no field of their own, no words."""
    return [
        h for h, p in sheet.profiles.items()
        if p.kind in ("number", "text") and p.n_filled and p.n_blank <= 0.02 * p.n and p.distinct_share >= least
        and p.n_words < 2 and p.marks.decimal in ("", OPEN) and not is_private(h) and not matches(h, "run")
    ]  # fmt: skip


def share_words(sheet: DraftSheet, header: str) -> str:
    """How far a column tells rows apart, as a percentage that never rounds up to all."""
    seen = sheet.profiles[header]
    share = int(1000 * seen.distinct_share) / 10
    return f"{share:g}% of its values are different" + (
        f", {seen.n_blank} cells are empty" if seen.n_blank else ""
    )


def _name_keys(main: DraftSheet) -> None:
    """The run column tells every row apart, the person column nearly so; the words of the header decide between them."""
    runs, persons = _keys(main, _RUN_SHARE), _keys(main, _PERSON_SHARE)
    named_persons = [
        h for h in persons if _PERSON.search(plain(h)) and not re.search(r"\brun\b|episode", plain(h))
    ]
    named_runs = [h for h in runs if _RUN.search(plain(h)) and h not in named_persons]
    if not named_runs and len(named_persons) == 1:
        named_runs = [h for h in runs if _NUMBER.search(plain(h)) and h not in named_persons]
    main.run = named_runs[0] if len(named_runs) == 1 else OPEN
    main.person = named_persons[0] if len(named_persons) == 1 else OPEN
    if main.person == OPEN and main.run != OPEN:
        others = [
            h
            for h in persons
            if h != main.run and _NUMBER.search(plain(h)) and main.profiles[h].distinct_share < 1
        ]
        main.person = others[0] if len(others) == 1 else OPEN
    main.run_why = _why(main, main.run, named_runs or runs, "a run")
    main.person_why = _why(
        main, main.person, [h for h in (named_persons or persons) if h != main.run], "a person"
    )


def _why(sheet: DraftSheet, chosen: str, candidates: list[str], what: str) -> str:
    if chosen != OPEN:
        return share_words(sheet, chosen)
    if not candidates:
        return f'no column could be recognised that names {what}: write ["header"], or several headers that do so together'
    listed = "; ".join(f"{h}: {share_words(sheet, h)}" for h in candidates[:4])
    return f'which column names {what}? {listed}. Write ["header"]; move the others to leave_out'


def _follow(sheet: DraftSheet, main: DraftSheet | None) -> None:
    """Another table repeats the run key of the main one: once a run, or several times for events and details."""
    known = {cell_word(c) for c in main.columns[main.run]} if main and main.run != OPEN else set()
    for header, cells in sheet.columns.items():
        same = main is not None and plain(header) == plain(main.run)
        if known and (same or _RUN.search(plain(header))) and _overlap(cells, known) >= _KEY_SHARE:
            sheet.run = header
            sheet.run_why = f"{int(100 * _overlap(cells, known))}% of its values are runs of the table with one row a run; {share_words(sheet, header)}"
            break
    if sheet.run == OPEN:
        sheet.row_is = OPEN
        sheet.run_why = (
            "no column could be recognised that holds the run numbers of the table with one row a run"
        )
        return
    if sheet.profiles[sheet.run].distinct_share >= 1:
        sheet.row_is = "run"
    else:
        _several_a_run(sheet)


def _several_a_run(sheet: DraftSheet) -> None:
    if _holds_events(sheet):
        sheet.row_is = "event"
    else:
        sheet.row_is, sheet.subject = "detail", subject_of(list(sheet.columns))


def _stand_alone(main: DraftSheet) -> None:
    """Files of events or details may come without their runs: the run column then repeats, and no start is given."""
    if main.run != OPEN or any(
        m.field == "support_run.start" for h in main.columns for m in matches(h, "run")
    ):
        return
    named = [
        h for h, p in main.profiles.items()
        if _RUN.search(plain(h)) and p.kind in ("number", "text") and p.n_blank == 0 and p.distinct_share < _RUN_SHARE
    ]  # fmt: skip
    if len(named) == 1 and not main.outline.is_code_list:
        main.run, main.person = named[0], ""
        main.run_why = f"the runs themselves must be known from elsewhere; {share_words(main, named[0])}"
        _several_a_run(main)


def _overlap(cells: list[Cell], known: set[str]) -> float:
    words = [w for w in map(cell_word, cells) if w]
    return sum(w in known for w in words) / len(words) if words else 0.0


def _holds_events(sheet: DraftSheet) -> bool:
    """A column whose cells, or whose header, speak of complications."""
    for header, seen in sheet.profiles.items():
        if seen.kind != "text" or is_private(header):
            continue
        counts = sheet.counts(header)
        named = sum(n for word, n in counts.items() if complication_in(word))
        if named >= 0.5 * sum(counts.values()) or any(
            m.field == "complication_event.kind" for m in matches(header, "event")
        ):
            return True
    return False


def code_lists(sheets: Sequence[DraftSheet]) -> list[CodeList]:
    """Every block of a code sheet is a list of its own. Its meanings may be shown if none looks like a person's."""
    found = []
    for sheet in (s for s in sheets if s.is_list):
        headers = list(sheet.columns)[:2]
        code, meaning = ([cell_word(c) for c in sheet.columns[h]] for h in headers)
        place = 0
        for number, (first, last) in enumerate(sheet.outline.blocks, start=1):
            stop = place + last - first + 1
            pairs = dict(zip(code[place:stop], meaning[place:stop], strict=True))
            clean = (
                len(pairs) <= 30
                and not any(caught(m) for m in pairs.values())
                and not any(map(is_private, headers))
            )
            found.append(CodeList(list_key(sheet, number), pairs, clean))
            place = stop
    return found


def list_key(sheet: DraftSheet, number: int) -> str:
    return sheet.key if len(sheet.outline.blocks) == 1 else f"{sheet.key}_list{number}"

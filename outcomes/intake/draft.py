"""A first mapping file from headers and distributions; what they cannot show is marked '?' and waits for a person."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from outcomes.errors import DataRefused
from outcomes.intake.draft_column import OPEN, Proposal, propose
from outcomes.intake.draft_profile import Profile, profile
from outcomes.intake.draft_source import SOURCE_QUESTIONS, complication_questions
from outcomes.intake.draft_words import propose_code, propose_field
from outcomes.intake.reading.grid import Cell, Number
from outcomes.intake.reading.outline import SheetOutline, outline

_KEYLIKE = re.compile(r"run|fall|episode|case|\bep\b|\bno\b|number|#|\bid\b|nr", re.IGNORECASE)
_PERSONLIKE = re.compile(r"mrn|pat|person|record|chart", re.IGNORECASE)


@dataclass
class DraftSheet:
    """One table as the draft sees it. keys: texts of its likely run column."""

    key: str
    outline: SheetOutline
    columns: dict[str, list[Cell]]
    profiles: dict[str, Profile]
    row_is: str = "run"
    run: str = OPEN
    person: str = ""


def draft_mapping(datas: Sequence[bytes], key: str) -> tuple[str, int]:
    """TOML text of a draft and the number of its open questions. datas: the bytes of each file.

    Shows no value of a cell, except codes of short code columns and rounded quartiles. Raises DataRefused for a file
    that cannot be read, UsageError for a key that is none.
    """
    files = [_look(data, number) for number, data in enumerate(datas, start=1)]
    lists = {k: pairs for sheets in files for s in sheets for k, pairs in _code_lists(s).items()}
    _roles([s for sheets in files for s in sheets if not s.outline.is_code_list])
    bodies = [_file(sheets, number, lists) for number, sheets in enumerate(files, start=1)]
    kinds = sorted({kind for _, found in bodies for kind in found})
    head = ["# A draft: answer every \"?\"; the comment above it says what was seen and what may stand there.", "format = 1", "", "[source]",
            f"key = {_quote(key)}", *SOURCE_QUESTIONS]  # fmt: skip
    text = "\n".join([*head, *complication_questions(kinds), *(line for body, _ in bodies for line in body)]) + "\n"
    return text, text.count(f'"{OPEN}"')


def _look(data: bytes, number: int) -> list[DraftSheet]:
    sheets = []
    for found in outline(data, key=f"file{number}"):
        if found.refusal is not None:
            raise found.refusal
        columns = dict(found.columns())
        profiles = {h: profile(cells) for h, cells in columns.items()}
        sheets.append(DraftSheet(f"sheet{found.position}", found, columns, profiles))
    if not sheets:
        raise DataRefused("DRAFT.EMPTY", f"file {number} holds no table", todo="name another file")
    return sheets


def _text(cell: Cell) -> str:
    return "" if cell is None else cell.text if isinstance(cell, Number) else str(cell).strip()


def _code_lists(sheet: DraftSheet) -> dict[str, dict[str, str]]:
    """Each block of a code sheet is a list of its own: key -> code -> meaning."""
    if not sheet.outline.is_code_list:
        return {}
    code, meaning = (list(sheet.columns.values())[i] for i in (0, 1))
    lists, place = {}, 0
    for number, (first, last) in enumerate(sheet.outline.blocks, start=1):
        size = last - first + 1
        pairs = {_text(c): _text(m) for c, m in zip(code[place : place + size], meaning[place : place + size], strict=True)}
        lists[f"{sheet.key}_list{number}"] = pairs
        place += size
    return lists


def _roles(sheets: list[DraftSheet]) -> None:
    """The widest sheet holds runs; another sheet that repeats its key holds events or other detail."""
    if not sheets:
        return
    main = max(sheets, key=lambda s: len(s.columns))
    main.run = _run_column(main)
    main.person = _person_column(main)
    known = {_text(c) for c in main.columns.get(main.run, [])}
    for sheet in sheets:
        if sheet is main:
            continue
        sheet.run = next((h for h, cells in sheet.columns.items() if _overlap(cells, known) >= 0.9), OPEN)
        repeats = sheet.run != OPEN and not sheet.profiles[sheet.run].is_unique
        if repeats:
            named = any("complication_event.kind" in propose_field(h, "event") for h in sheet.profiles)
            sheet.row_is = "event" if named or any(map(_is_complication, sheet.profiles.values())) else "detail"


def _overlap(cells: list[Cell], known: set[str]) -> float:
    words = [w for w in map(_text, cells) if w]
    return sum(w in known for w in words) / len(words) if words and known else 0.0


def _is_complication(seen: Profile) -> bool:
    return sum(propose_code(c, "complication_kind") != OPEN for c in seen.codes) >= 3


def _near(seen: Profile) -> float:
    return seen.n_distinct / max(1, seen.n - seen.n_blank)


def _run_column(sheet: DraftSheet) -> str:
    """The column that tells nearly every row apart and is called a number, case or run."""
    apart = [h for h, p in sheet.profiles.items() if p.n_blank == 0 and _near(p) >= 0.97 and p.kind in ("number", "text")]
    named = [h for h in apart if _KEYLIKE.search(h) and not _PERSONLIKE.search(h)]
    return (named or [OPEN])[0]


def _person_column(sheet: DraftSheet) -> str:
    apart = [h for h, p in sheet.profiles.items() if h != sheet.run and p.n_blank == 0 and _near(p) >= 0.85 and p.kind in ("number", "text")]
    return next((h for h in apart if _PERSONLIKE.search(h)), OPEN)


def _file(sheets: list[DraftSheet], number: int, lists: dict[str, dict[str, str]]) -> tuple[list[str], set[str]]:
    spec = sheets[0].outline.spec
    lines = ["", "[[file]]", f"key = \"file{number}\"", f"kind = {_quote(spec.kind)}"]
    if spec.kind == "csv":
        evidence = sheets[0].outline.evidence
        lines += [f"# {evidence.get('encoding', '')}", f"encoding = {_quote(spec.encoding)}", f"# {evidence.get('separator', '')}",
                  f"separator = {_quote(spec.separator)}"]  # fmt: skip
    decimals = {p.decimal for s in sheets for p in s.profiles.values() if p.decimal}
    lines.append(f"decimal_mark = {_quote(',' if ',' in decimals else '.')}")
    tokens = sorted({t for s in sheets for p in s.profiles.values() if p.kind in ("number", "moment") for t in p.missing})
    if tokens:
        lines += ["# words seen in columns of numbers or dates; each counts as not recorded", f"missing = {_quote(tokens)}"]
    kinds: set[str] = set()
    for sheet in sheets:
        if sheet.outline.is_code_list:
            lines += _code_sheet(sheet)
        else:
            body, found = _sheet(sheet, lists)
            lines += body
            kinds |= found
    return lines, kinds


def _code_sheet(sheet: DraftSheet) -> list[str]:
    code, meaning = list(sheet.columns)[:2]
    lines = []
    for number, (first, last) in enumerate(sheet.outline.blocks, start=1):
        lines += ["", "[[file.sheet]]", f"key = \"{sheet.key}_list{number}\"", f"position = {sheet.outline.position}",
                  f"header_line = {sheet.outline.header_line}", "row_is = \"code list\"", f"code = {_quote(code)}",
                  f"meaning = {_quote(meaning)}", f"rows = [{first}, {last}]"]  # fmt: skip
    return lines


def _sheet(sheet: DraftSheet, lists: dict[str, dict[str, str]]) -> tuple[list[str], set[str]]:
    made = {h: propose(h, p, sheet.row_is, lists) for h, p in sheet.profiles.items() if h not in (sheet.run, sheet.person)}
    left = [h for h, m in made.items() if m.role == "leave_out"]
    kept = {h: m for h, m in made.items() if m.role == "column"}
    lines = ["", "[[file.sheet]]", f"key = \"{sheet.key}\"", f"position = {sheet.outline.position}",
             f"# {sheet.outline.evidence.get('header_line', '')}", f"header_line = {sheet.outline.header_line}",
             "# run: one row a run; event: one row a complication; detail: several rows a run; attempt: never reached flow",
             f"row_is = {_quote(sheet.row_is)}", f"# {_distinct(sheet, sheet.run)}", f"run = {_quote([sheet.run])}"]  # fmt: skip
    if sheet.row_is == "run":
        lines += [f"# {_distinct(sheet, sheet.person)}", f"person = {_quote([sheet.person or OPEN])}"]
    if any(m.target.startswith("measurement.") for m in kept.values()):
        lines += ["# when the measurements of this sheet were taken: outcomes describe window_label; one column may say otherwise",
                  f"window = {_quote(OPEN)}"]  # fmt: skip
    if left:
        lines += ["# names, numbers of people and free text stay out", f"leave_out = {_quote(left)}"]
    lines += _blanks(kept)
    for proposal in kept.values():
        lines += _column(proposal)
    kinds = {m.target.split(".")[1] for m in kept.values() if m.target.startswith("complication.")}
    for proposal in kept.values():
        codes = proposal.values.get("codes")
        if proposal.target == "complication_event.kind":
            kinds |= set(codes.values()) if isinstance(codes, dict) else {OPEN}
    return lines, kinds


def _distinct(sheet: DraftSheet, header: str) -> str:
    seen = sheet.profiles.get(header)
    if seen is None:
        return "no column tells rows apart so that it could be recognised: name the column or columns"
    return f"{100 * _near(seen):.0f}% of its values are distinct"


_GROUPS = (
    ("complications: does an empty cell mean that it did not happen (none), or that nobody wrote it down (not recorded)?", ("complication.",)),
    ("measurements and doses before support", ("measurement.", "vasoactive_dose.")),
    ("state and history before support", ("history.", "pre_support_state.", "arrest_episode.", "indication.", "person.", "support_run.", "cannulation.")),
    ("end of support and what came after", ("support_end.", "hospital_outcome.", "follow_up.", "neuro_outcome.")),
    ("everything else", ("",)),
)  # fmt: skip


def _blanks(kept: dict[str, Proposal]) -> list[str]:
    """Columns by what an empty cell of them could mean; those that hold none are asked once."""
    lines = ["# What an empty cell means: none | not applicable | not recorded | still on support (ends only) | defect.",
             "# Take a column out into a group of its own where the answer differs."]  # fmt: skip
    rest = dict(kept)
    full = [h for h, m in rest.items() if m.profile.n_blank == 0]
    for words, prefixes in _GROUPS:
        chosen = [h for h, m in rest.items() if h not in full and m.target.startswith(prefixes)]
        for header in chosen:
            rest.pop(header)
        lines += _blank_group(words, chosen)
    return lines + _blank_group("columns without a single empty cell", full)


def _blank_group(words: str, headers: Sequence[str]) -> list[str]:
    if not headers:
        return []
    return ["[[file.sheet.blank]]", f"# {words}", f"means = {_quote(OPEN)}", f"columns = {_quote(list(headers))}"]


def _column(proposal: Proposal) -> list[str]:
    lines = ["[[file.sheet.column]]", f"header = {_quote(proposal.header)}"]
    lines += [f"# {_plain(comment)}" for comment in proposal.comments]
    return lines + [f"{key} = {_quote(value)}" for key, value in proposal.values.items()]


def _plain(comment: str) -> str:
    return re.sub(r"[\x00-\x1f\x7f]", " ", comment)


def _quote(value: object) -> str:
    """A value as TOML. Basic strings of TOML and JSON agree in everything a header can hold after the strict reader."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{_quote(str(k))} = {_quote(v)}" for k, v in value.items()) + " }" if value else "{}"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(_quote(v) for v in _items(value)) + "]"
    return json.dumps(str(value), ensure_ascii=False).replace("\x7f", "\\u007f")


def _items(values: Iterable[object]) -> list[object]:
    return list(values)

"""What a draft proposes for one column: field, unit, codes, pattern; the evidence of each in a comment above it."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from outcomes.intake.draft_analyte import BLOOD_PRESSURE
from outcomes.intake.draft_codes import MISSING, OPEN, if_one_is_yes, numbered, propose_code
from outcomes.intake.draft_match import complication_in, is_private, matches, settled
from outcomes.intake.draft_profile import Profile, quartile_words
from outcomes.intake.draft_unit import propose_unit
from outcomes.intake.draft_words import plain
from outcomes.intake.vocabulary import Field, vocabulary

TIMED = ("moment", "moment_before", "birth_date", "year_of")
COUNTED = ("number", "integer", "duration", "scale", "birth_year")
CODED = ("code", "boolean")
_MOST_TRUTHS = 6
_KINDS = {
    "moment": "dates or times",
    "number": "numbers",
    "time": "times of day",
    "empty": "nothing at all",
    "text": "words",
}


@dataclass
class Proposal:
    """What the draft says of one column. values: key -> value, in order, not yet quoted; comments: key -> lines above it.

    role: 'column', 'leave_out' or 'join' (its text belongs to another column). why: reason of a leave_out.
    """

    header: str
    profile: Profile
    role: str = "column"
    why: str = ""
    target: str = OPEN
    values: dict[str, object] = field(default_factory=dict)
    comments: dict[str, list[str]] = field(default_factory=dict)

    def say(self, key: str, words: str) -> None:
        if words:
            self.comments.setdefault(key, []).append(words)


@dataclass(frozen=True)
class CodeList:
    """A code list of the source: code -> meaning, and which meanings may be shown if their code is frequent or known."""

    key: str
    meanings: dict[str, str]
    may_show: bool


def propose(
    header: str, seen: Profile, row_is: str, subject: str, lists: list[CodeList], counts: dict[str, int]
) -> Proposal:
    """subject: table of a detail sheet; counts: distinct text -> how often, looked at and never shown."""
    made = Proposal(header, seen)
    if is_private(header):
        made.role, made.why = "leave_out", "by its header it names people or holds free words"
    elif seen.kind == "split":
        _split(made)
    else:
        _field(made, row_is, subject)
        if made.role == "column" and made.target != OPEN:
            _details(made, vocabulary().fields[made.target], lists, counts)
    if seen.others and made.role == "column":
        made.say(
            "field" if "field" in made.values else "fields",
            f"cells of another kind, which an import reports: {'; '.join(seen.others)}",
        )
    return made


def _field(made: Proposal, row_is: str, subject: str) -> None:
    found = matches(made.header, row_is, subject)
    fitting = [m for m in found if _fits(vocabulary().fields[m.field], made.profile)]
    made.target = settled(fitting) or OPEN
    made.values["field"] = made.target
    if made.target != OPEN:
        return
    candidates = list(dict.fromkeys(m.field for m in fitting))
    seen = made.profile
    if candidates:
        made.say("field", f"two or more fields are near: {', '.join(candidates[:5])}")
        if all(vocabulary().fields[name].kind == "boolean" for name in candidates):
            _codes(made, vocabulary().fields[candidates[0]], [], {})
            return
    elif _stays_out(made):
        return
    elif complication_in(made.header) and seen.kind in ("text", "number"):
        made.say(
            "field",
            f"it reads like {complication_in(made.header)}, but holds no times of onset, which a complication needs; list it in leave_out if there are none",
        )
    else:
        near = f"; by its header it could be {found[0].field}, but the cells do not fit that" if found else ""
        made.say(
            "field",
            f"no trade word settles it; the cells hold {_KINDS[seen.kind]}{near}. Name a field (outcomes describe lists them), or move the header to leave_out",
        )
    if seen.quartiles:
        made.say("field", quartile_words(seen.quartiles))
    if seen.codes and seen.kind in ("text", "number"):
        made.say(
            "field",
            "if it holds codes, add: codes = { "
            + ", ".join(f'"{_bare(c)}" = "..."' for c in seen.codes)
            + " }",
        )


def _bare(code: str) -> str:
    return code.replace("\\", "\\\\").replace('"', '\\"')


def _stays_out(made: Proposal) -> bool:
    """Columns without a known field that look like free words, numbers of people, or nothing at all."""
    seen = made.profile
    if seen.kind == "empty":
        made.why = "it is empty"
    elif seen.is_identifying:
        made.why = "its cells look like numbers or addresses of people"
    elif seen.kind == "text" and seen.n_words >= 3 and seen.distinct_share > 0.5:
        made.why = "its cells look like free words"
    else:
        return False
    made.role = "leave_out"
    return True


def _fits(known: Field, seen: Profile) -> bool:
    if seen.kind == "empty":
        return True
    if known.kind in TIMED:
        return seen.kind == "moment"
    if known.kind in COUNTED:
        return seen.kind == "number"
    if known.kind == "boolean":
        return seen.kind in ("text", "number") and seen.n_distinct <= _MOST_TRUTHS
    return seen.kind in ("text", "number") and not (seen.kind == "number" and bool(seen.marks.decimal))


def _details(made: Proposal, known: Field, lists: list[CodeList], counts: dict[str, int]) -> None:
    if known.kind in COUNTED and known.quantity not in ("", "count"):
        unit, evidence = propose_unit(made.header, known, made.profile.quartiles, made.profile.n_numbers)
        made.values["unit"] = unit
        made.say("unit", evidence)
    if known.kind in CODED:
        _codes(made, known, lists, counts)
    if known.kind == "word":
        made.say("field", "kept as the source's own word; it is never turned into a consequence")


def _split(made: Proposal) -> None:
    """Two numbers in one cell: pressures if the header says so, otherwise a question for each."""
    names = (
        ["measurement.sbp", "measurement.dbp"]
        if re.search(BLOOD_PRESSURE, plain(made.header))
        else [OPEN, OPEN]
    )
    made.values = {"split": "/", "fields": names}
    made.say(
        "split",
        f"{made.profile.n_numbers} cells hold two numbers with / between; each part is a field of its own",
    )
    made.target = names[0]
    if names[0] == OPEN:
        made.say(
            "fields",
            "name both fields; measured values also need unit = and, here or for the sheet, window =",
        )
        return
    units = {
        propose_unit(made.header, vocabulary().fields[name], q, made.profile.n_numbers)
        for name, q in zip(names, made.profile.parts, strict=True)
    }
    named = sorted({unit for unit, _ in units})
    made.values["unit"] = named[0] if len(named) == 1 else OPEN
    for evidence in sorted(evidence for _, evidence in units):
        made.say("unit", evidence)
    made.say("reading", "both parts were read together")
    made.values["reading"] = "bp"


def _codes(made: Proposal, known: Field, lists: list[CodeList], counts: dict[str, int]) -> None:
    list_name = "boolean" if known.kind == "boolean" else known.list_name
    seen = made.profile
    found = _list_of(counts, list_name, lists)
    if found is not None:
        _from_list(made, found, list_name, counts)
    elif not seen.codes:
        made.values["codes"] = OPEN
        made.say("codes", _hidden(seen))
    else:
        _from_cells(made, list_name)
    if list_name != "boolean":
        made.say("codes", "our codes: " + ", ".join(sorted(vocabulary().lists[list_name])))


def _from_cells(made: Proposal, list_name: str) -> None:
    """Codes as they stand in the cells; where 0 and 1 say nothing, one question for both."""
    seen, header = made.profile, made.header
    codes = numbered(header, sorted(seen.codes), list_name) or {
        c: propose_code(c, list_name, header) for c in sorted(seen.codes)
    }
    habit = if_one_is_yes(header, list(codes), list_name) if set(codes.values()) == {OPEN} else {}
    if set(codes.values()) == {OPEN} and all(code.isdigit() for code in codes):
        made.say(
            "codes",
            "numbers do not say what they mean: "
            + ", ".join(f"{code} stands in {seen.codes[code]} cells" for code in codes),
        )
    if habit:
        made.say(
            "codes",
            "if this is meant, write: codes = { "
            + ", ".join(f'"{c}" = "{v}"' for c, v in habit.items())
            + " }",
        )
    if any(value == OPEN and code in MISSING for code, value in codes.items()):
        made.say("codes", 'a word that may say "not applicable", or "not recorded"; which of them?')
    if seen.rare:
        made.say(
            "codes",
            f"codes seen fewer than five times are not shown; add those that you know, the rest is reported at import: {'; '.join(seen.rare)}",
        )
    made.values["codes"] = OPEN if habit else codes
    if seen.folds:
        made.values["ignore_case"] = True
        made.say("ignore_case", "some codes differ only in capitals")


def _hidden(seen: Profile) -> str:
    """Why codes are not shown, and how to write them."""
    if not seen.n_filled:
        return 'the column is empty; write the codes that it will hold: { "source text" = "our code" }'
    return (
        f"the {seen.n_distinct} different codes are too many, too long or too rare to be shown here; "
        'look them up in the file and write { "source text" = "our code", ... }'
    )


def _from_list(made: Proposal, found: CodeList, list_name: str, counts: dict[str, int]) -> None:
    """Meanings of the source's own list; one that no trade word knows is shown only if its code is frequent."""
    made.values["codes_from"] = found.key
    made.say(
        "codes_from",
        "the codes of this column stand in that list; below, its meanings are mapped, not its codes",
    )
    shown: dict[str, str] = {}
    hidden = 0
    for code, meaning in found.meanings.items():
        proposed = propose_code(meaning, list_name)
        if found.may_show and len(meaning) <= 24 and (proposed != OPEN or counts.get(code, 0) >= 5):
            shown[meaning] = proposed
        else:
            hidden += 1
    made.values["codes"] = dict(sorted(shown.items())) or OPEN
    if hidden:
        made.say("codes", f"{hidden} meanings of the list are not shown here; add those that you need")
    strange = sum(n for code, n in counts.items() if code not in found.meanings and code not in MISSING)
    if strange:
        made.say("codes", f"{strange} cells hold a code that is not in the list; they are reported at import")


def _list_of(counts: dict[str, int], list_name: str, lists: list[CodeList]) -> CodeList | None:
    """The code list that holds nearly all cells of the column and most of whose meanings fit the field."""
    filled = {code: n for code, n in counts.items() if code not in MISSING}
    total = sum(filled.values())
    best, most = None, 0.0
    for found in lists:
        inside = sum(n for code, n in filled.items() if code in found.meanings)
        known = sum(propose_code(m, list_name) != OPEN for m in found.meanings.values())
        share = known / len(found.meanings) if found.meanings else 0.0
        if total and inside >= 0.95 * total and share >= 0.5 and share > most:
            best, most = found, share
    return best

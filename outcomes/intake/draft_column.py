"""What a draft proposes for one column: field, unit, codes, pattern; the evidence of each in a comment above it."""

from __future__ import annotations

import re

from outcomes.intake.draft_analyte import BLOOD_PRESSURE
from outcomes.intake.draft_coded import add_codes
from outcomes.intake.draft_codes import OPEN, propose_code
from outcomes.intake.draft_match import complication_in, is_private, matches, settled
from outcomes.intake.draft_profile import Profile, quartile_words
from outcomes.intake.draft_proposal import CodeList, Proposal
from outcomes.intake.draft_text import quoted
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
            add_codes(made, vocabulary().fields[candidates[0]], [], {})
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
    if seen.codes and not seen.rare and (candidates or all(_says_nothing(code) for code in seen.codes)):
        codes = ", ".join(f"{quoted(code)} = ..." for code in seen.codes)
        made.say("field", f"if it holds codes, add: codes = {{ {codes} }}")
    elif seen.codes:
        made.say("field", f"it holds {seen.n_distinct} different codes")


def _says_nothing(code: str) -> bool:
    """A code that can stand in any column: a number, or a yes or no."""
    return code.isdigit() or propose_code(code, "boolean") != OPEN


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
        add_codes(made, known, lists, counts)
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

"""What a draft proposes for one column: field, unit, codes, pattern; the evidence of each in a comment."""

from __future__ import annotations

from dataclasses import dataclass, field

from outcomes.intake.draft_profile import Profile
from outcomes.intake.draft_words import is_private, propose_code, propose_field, propose_unit
from outcomes.intake.typical import typical_range
from outcomes.intake.vocabulary import Field, vocabulary

OPEN = "?"
_TIMED = ("moment", "moment_before", "birth_date")
_COUNTED = ("number", "integer", "duration", "scale", "birth_year")


@dataclass
class Proposal:
    """lines: key = value lines in order, values not yet quoted. comments stand above them. role: column, run, person,
    or leave_out."""

    header: str
    profile: Profile
    role: str = "column"
    target: str = OPEN
    values: dict[str, object] = field(default_factory=dict)
    comments: list[str] = field(default_factory=list)


def propose(header: str, seen: Profile, row_is: str, lists: dict[str, dict[str, str]]) -> Proposal:
    """lists: key of a code list -> code -> meaning."""
    made = Proposal(header, seen)
    if is_private(header):
        made.role = "leave_out"
        return made
    if seen.kind == "split":
        made.values = {"split": "/", "fields": [OPEN, OPEN]}
        made.comments.append("cells hold two whole numbers with / between: name a field for each, and the unit")
        return made
    candidates = [name for name in propose_field(header, row_is) if _fits(vocabulary().fields[name], seen)]
    made.target = candidates[0] if candidates else _by_kind(seen, row_is)
    if len(candidates) > 1:
        made.comments.append("also possible: " + ", ".join(candidates[1:4]))
    if made.target == OPEN:
        made.comments.append(f"no trade word recognised; the cells look like: {_kind_words(seen)}. Name a field, or list the column in leave_out")
    made.values["field"] = made.target
    if made.target != OPEN:
        _details(made, vocabulary().fields[made.target], lists)
    elif seen.quartiles:
        made.comments.append(_quartile_words(seen))
    return made


def _kind_words(seen: Profile) -> str:
    return {"moment": "dates or times", "number": "numbers", "time": "times of day", "empty": "nothing"}.get(seen.kind, "words")


def _by_kind(seen: Profile, row_is: str) -> str:
    """In a sheet of events or studies the one column of times is when it happened."""
    if seen.kind == "moment" and row_is == "event":
        return "complication_event.onset"
    return "weaning_step.study" if seen.kind == "moment" and row_is == "detail" else OPEN


def _fits(known: Field, seen: Profile) -> bool:
    if seen.kind == "empty":
        return True
    if known.kind in _TIMED:
        return seen.kind == "moment"
    if known.kind in _COUNTED:
        return seen.kind == "number"
    return seen.kind in ("text", "number")


def _details(made: Proposal, known: Field, lists: dict[str, dict[str, str]]) -> None:
    if known.kind in _COUNTED and known.quantity not in ("", "count"):
        _unit(made, known)
    if known.kind in ("code", "boolean"):
        _codes(made, known, lists)
    if known.kind == "word":
        made.comments.append("kept as the source's own word; it is never turned into a consequence")
    if known.kind in _TIMED and made.profile.pattern:
        made.values["pattern"] = made.profile.pattern
        made.comments.append(f"pattern: {made.profile.proof}")
    if known.name in ("measurement.sbp", "measurement.dbp", "measurement.map"):
        made.values["reading"] = "pressure"
        made.comments.append("reading: pressures taken together carry the same word; change it if they were not")


def _quartile_words(seen: Profile) -> str:
    assert seen.quartiles is not None
    low, middle, high = seen.quartiles
    return f"median about {middle:g} (25th to 75th percentile {low:g} to {high:g})"


def _unit(made: Proposal, known: Field) -> None:
    units = {r: c for (q, r), c in vocabulary().conversions.items() if q == known.quantity}
    stated = propose_unit(made.header)
    stated = stated if stated in units else ""
    usual = typical_range(known.name)
    if made.profile.quartiles is None or usual is None:
        same = len({(c.factor, c.shift) for c in units.values()}) == 1
        made.values["unit"] = stated or (next(iter(units)) if same else OPEN)
        if made.values["unit"] == OPEN:
            made.comments.append("the unit is one of " + ", ".join(sorted(units)))
        return
    middle = made.profile.quartiles[1]
    fitting = sorted(r for r, c in units.items() if usual[0] <= middle * c.factor + c.shift <= usual[1])
    words = _quartile_words(made.profile)
    if stated and stated in fitting:
        made.values["unit"] = stated
        made.comments.append(f"{words}: fits {stated}, which the header says")
    elif stated:
        made.values["unit"] = OPEN
        made.comments.append(f"the header says {stated}, but {words} does not fit it" + (f"; it would fit {' or '.join(fitting)}" if fitting else ""))
    elif len({(units[r].factor, units[r].shift) for r in fitting}) == 1:
        made.values["unit"] = fitting[0]
        made.comments.append(f"{words}: more likely {fitting[0]}")
    else:
        made.values["unit"] = OPEN
        fits = f"; it would fit {' or '.join(fitting)}" if fitting else ""
        made.comments.append(f"{words}{fits}; the unit is one of {', '.join(sorted(units))}")


def _codes(made: Proposal, known: Field, lists: dict[str, dict[str, str]]) -> None:
    list_name = "boolean" if known.kind == "boolean" else known.list_name
    found = _code_list(made.profile, list_name, lists)
    seen = made.profile
    if found:
        made.values["codes_from"] = found
        made.values["codes"] = {m: propose_code(m, list_name) for m in lists[found].values()}
        made.comments.append("the codes stand in a list of the source; its meanings are mapped")
    elif not seen.codes:
        made.values["codes"] = OPEN
        made.comments.append("the codes may not be shown here: write them as { \"source text\" = \"our code\" }")
    else:
        made.values["codes"] = _proposed(made.header, seen, list_name)
        if len({c.lower() for c in seen.codes}) < len(seen.codes):
            made.values["ignore_case"] = True
            made.comments.append("some codes differ only in capitals: ignore_case joins them")
            made.values["codes"] = {c.lower(): v for c, v in dict(made.values["codes"]).items()}  # type: ignore[call-overload]
    if seen.rare:
        made.comments.append("seen fewer than five times, as count and shape: " + "; ".join(seen.rare[:12]))
    allowed = sorted(vocabulary().lists[list_name])
    made.comments.append("our codes: " + ", ".join(allowed) if len(allowed) < 25 else f"our codes: outcomes describe {list_name}")


def _proposed(header: str, seen: Profile, list_name: str) -> dict[str, str]:
    if list_name == "boolean" and "(0/1)" in header and set(seen.codes) <= {"0", "1"}:
        return {c: {"0": "false", "1": "true"}[c] for c in seen.codes}
    return {c: propose_code(c, list_name) for c in seen.codes if c not in seen.missing or propose_code(c, list_name) != OPEN}


def _code_list(seen: Profile, list_name: str, lists: dict[str, dict[str, str]]) -> str:
    """The code list that holds nearly all codes of the column and whose meanings fit best; '' if none does."""
    shown = set(seen.codes)
    best, most = "", 0
    for key, pairs in lists.items():
        inside = len(shown & pairs.keys())
        fits = sum(propose_code(m, list_name) != OPEN for m in pairs.values())
        if shown and inside >= 0.8 * len(shown) and fits > most:
            best, most = key, fits
    return best

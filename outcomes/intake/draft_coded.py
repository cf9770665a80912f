"""Codes of a column: shown and proposed, taken from a list of the source, or only described."""

from __future__ import annotations

from outcomes.intake.draft_codes import MISSING, OPEN, if_one_is_yes, numbered, propose_code
from outcomes.intake.draft_profile import FEWEST_SEEN, LONGEST_CODE
from outcomes.intake.draft_proposal import CodeList, Proposal
from outcomes.intake.vocabulary import Field, vocabulary


def add_codes(made: Proposal, known: Field, lists: list[CodeList], counts: dict[str, int]) -> None:
    """Set `codes` of a coded field, and say what they rest on. counts: distinct text -> how often; never shown."""
    list_name = "boolean" if known.kind == "boolean" else known.list_name
    seen = made.profile
    found = _list_of(counts, list_name, lists)
    if found is not None:
        _from_list(made, found, list_name, counts)
    elif not seen.codes:
        _hide(made, list_name, counts)
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


def _hide(made: Proposal, list_name: str, counts: dict[str, int]) -> None:
    """Codes that may not be shown: why, how to write them, and which of our codes their words are likely to mean."""
    seen = made.profile
    made.values["codes"] = OPEN
    form = '{ "source text" = "our code", ... }'
    if not seen.n_filled:
        made.say("codes", f"the column is empty; write the codes that it will hold: {form}")
        return
    why = seen.hidden or "each is seen fewer than five times"
    if seen.rare:
        why += f" ({'; '.join(seen.rare)})"
    made.say(
        "codes",
        f"its {seen.n_distinct} different codes are not shown here: {why}. Look them up and write {form}",
    )
    known: dict[str, int] = {}
    for text, n in counts.items():
        code = propose_code(text, list_name, made.header)
        known[code] = known.get(code, 0) + n
    made.likely = tuple(
        sorted(c for c, n in known.items() if n >= FEWEST_SEEN and c in vocabulary().lists[list_name])
    )
    if made.likely:
        made.say("codes", f"by their words they are likely to mean: {', '.join(made.likely)}")


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
        if (
            found.may_show
            and len(meaning) <= LONGEST_CODE
            and (proposed != OPEN or counts.get(code, 0) >= FEWEST_SEEN)
        ):
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

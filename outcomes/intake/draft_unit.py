"""The unit of a column: what its header says, tested against where its values lie."""

from __future__ import annotations

import re

from outcomes.intake.draft_codes import OPEN
from outcomes.intake.draft_profile import quartile_words
from outcomes.intake.draft_words import plain
from outcomes.intake.typical import typical_range
from outcomes.intake.vocabulary import Conversion, Field, vocabulary

FEWEST_FOR_GUESS = 20

# Words of a header (folded) and the listed units that they can stand for; the first that the quantity knows is meant.
_STATED: tuple[tuple[str, tuple[str, ...]], ...] = (
    (r"(bun|nitrogen).*mg/dl", ("mg/dL{urea_nitrogen}",)), (r"u?mol/l|mmol/l", ()), (r"mg/dl|mg%", ("mg/dL",)), (r"mg/l", ("mg/L",)), (r"m(eq|val)/l", ("meq/L",)),
    (r"g/dl", ("g/dL",)), (r"(k|1000|tsd\.?|10[*^]?3|10³)/ul|k/mm3|1000/mm3", ("10*3/uL",)), (r"/ul|/mm3", ("/uL",)),
    (r"10[*^]?9/l|10⁹/l", ("10*9/L",)), (r"gpt/l|g/l", ("g/L", "G/L")), (r"ukat/l", ("ukat/L",)), (r"m?[iu]u?/l", ("U/L",)),
    (r"mbar", ("mbar",)), (r"cm ?h2o", ("cm[H2O]",)), (r"\bkpa\b", ("kPa",)), (r"mm ?hg|torr", ("mm[Hg]",)),
    (r"(u|mc)g/kg/min", ("ug/kg/min",)), (r"\bmu/kg/min", ("mU/kg/min",)), (r"\bi?[ue]/kg/min", ("[iU]/kg/min",)),
    (r"ml/min/1[.,]73", ("mL/min/{1.73_m2}",)), (r"ml/min", ("mL/min", "mL/min/{1.73_m2}")), (r"\bl/min", ("L/min",)), (r"ml/(d|day|24 ?h|tag)\b", ("mL/d",)),
    (r"\blbs?\b|pounds?", ("[lb_av]",)), (r"\(in\)|\[in\]|\binch(es)?\b|\bin\.?$", ("[in_i]",)), (r"\bkg\b", ("kg",)),
    (r"cm/s", ("cm/s",)), (r"\bm/s", ("m/s",)), (r"\bcm\b", ("cm",)), (r"\bmm\b", ("mm",)), (r"\(m\)|\[m\]|\bm$", ("m",)),
    (r"°f|\(f\)|fahrenheit", ("[degF]",)), (r"°c|celsius|\(c\)", ("Cel",)), (r"\bfr\b|french|charr\w*|\bch\b", ("[Ch]",)),
    (r"\bmin(s|utes?|uten)?\b", ("min",)), (r"stunden|\bstd\b|\bhours?\b|\bhrs?\b|\bh\b", ("h",)), (r"\bdays?\b|\btagen?\b", ("d",)),
    (r"\bsec(onds?)?\b|sekunden|\bs\b", ("s",)), (r"/min\b|\bbpm\b|\brpm\b", ("/min",)), (r"%|percent|prozent", ("%",)), (r"fraction|anteil", ("1",)),
)  # fmt: skip


def stated_unit(header: str, units: dict[str, Conversion]) -> tuple[str, str]:
    """(unit of the quantity that the header states, the words if they are a unit that the quantity does not know)."""
    text = re.sub(r"\b([um]?mol|m?g|u?g|meq)(?: per | )(?=(?:d|u)?l\b)", r"\1/", plain(header))
    mol = re.search(r"\b(m|u)mol/l", text)
    if mol:
        name = f"{mol[1]}mol/L"
        return (name, "") if name in units else ("", mol[0])
    for words, names in _STATED:
        found = re.search(words, text)
        if found and names:
            name = next((n for n in names if n in units), "")
            return (name, "") if name else ("", found[0])
    return "", ""


def propose_unit(
    header: str, known: Field, quartiles: tuple[float, float, float] | None, n: int
) -> tuple[str, str]:
    """(unit or '?', evidence in words). quartiles: of the values as they stand; n: how many values.

    A unit that the header states must also fit the values; one that it does not state is proposed only if a single
    one fits the median of at least twenty values.
    """
    units = {
        received: c
        for (quantity, received), c in vocabulary().conversions.items()
        if quantity == known.quantity
    }
    stated, foreign = stated_unit(header, units)
    usual = typical_range(known.name)
    seen = quartile_words(quartiles) if quartiles else "too few values to test the unit by"
    if foreign and not stated:
        return (
            OPEN,
            f"the header says {foreign}, which is no unit of this field here; {seen}; it must be one of {_listed(units)}",
        )
    if not stated and len(_scales(units)) == 1:
        return next(r for r, c in units.items() if r == c.unit), ""
    if quartiles is None or usual is None:
        why = seen if quartiles is None else f"{seen}; every unit is possible"
        return (
            (stated, f"the header says {stated}; {seen}")
            if stated
            else (OPEN, f"{why}; the unit is one of {_listed(units)}")
        )
    low, middle, high = usual[0], quartiles[1], usual[1]
    fitting = {r: c for r, c in units.items() if low <= middle * c.factor + c.shift <= high}
    if stated:
        return _tested(stated, seen, fitting)
    if len(_scales(fitting)) == 1 and n >= FEWEST_FOR_GUESS:
        likely = next((r for r, c in fitting.items() if r == c.unit), min(fitting))
        return likely, f"{seen}: more likely {likely}"
    fits = f"it would fit {_listed(fitting)}; " if fitting else "it fits no unit well; "
    return OPEN, f"{seen}; {fits}the unit is one of {_listed(units)}"


def _tested(stated: str, seen: str, fitting: dict[str, Conversion]) -> tuple[str, str]:
    if stated in fitting:
        return stated, f"{seen}: fits {stated}, which the header says"
    fits = f"; it would fit {_listed(fitting)}" if fitting else ""
    return OPEN, f"the header says {stated}, but {seen} does not fit it{fits}"


def _scales(units: dict[str, Conversion]) -> set[tuple[float, float]]:
    return {(c.factor, c.shift) for c in units.values()}


def _listed(units: dict[str, Conversion]) -> str:
    """One name a scale: two names of the same unit are no choice."""
    names: dict[tuple[float, float], str] = {}
    for received, c in sorted(units.items(), key=lambda item: (item[0] != item[1].unit, item[0])):
        names.setdefault((c.factor, c.shift), received)
    return " or ".join(sorted(names.values()))

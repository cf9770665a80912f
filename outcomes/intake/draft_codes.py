"""Trade words of codes, English and German: which of our codes a source text may mean. Common practice; proposals only."""

from __future__ import annotations

import re

from outcomes.intake.draft_match import complication_in
from outcomes.intake.draft_words import plain
from outcomes.intake.vocabulary import vocabulary

OPEN = "?"

# Words that many exports write where a value is missing; they are no values of the data.
MISSING = (
    "n/a", "N/A", "n.a.", "na", "NA", "nan", "NaN", "null", "NULL", "none", "unk", "UNK", "unkn.", "unknown", "Unknown", "unbekannt",
    "Unbekannt", "k.A.", "k. A.", "keine Angabe", "nicht bekannt", "not known", "not recorded", "missing", "-", "--", "---", "–", ".", "..", "?", "??",
)  # fmt: skip

_YES, _NO = r"yes|y|true|ja|j", r"no|n|false|nein"
_UNKNOWN = re.compile(
    r"unk|unkn\.|unknown|unbekannt|k\. ?a\.|keine angabe|nicht bekannt|not known|not recorded|missing|null|nan"
)
_DEATH = re.compile(r"\bdead\b|died|death|deceased|mortality|verstorben|gestorben|\btot\b")
_ALIVE_OR_DEAD = re.compile(
    r"(?P<alive>alive|survived|survivor|lebend|ueberlebt)|dead|died|deceased|verstorben|gestorben"
)

_CODES: dict[str, tuple[tuple[str, str], ...]] = {
    "boolean": ((_YES, "true"), (_NO, "false")),
    "sex": ((r"m|male|maennlich|mann|herr", "male"), (r"f|w|female|weiblich|frau", "female"), (r"d|divers|x|other", "other")),
    "intended_pathway": (
        (r"(bridge to |bt)?recovery|btr|erholung", "recovery"), (r"(bridge to )?decision|btd|entscheidung", "decision"),
        (r"(bridge to )?(durable )?l?vad|bridge to bridge", "durable_lvad"), (r"(bridge to )?(heart )?transplant(ation)?|btt|htx", "transplantation"),
    ),
    "end_kind": (
        (r"weaned( off)?|recovery|recovered|weaning|entwoehnt|erholung", "recovery"), (r"(durable )?l?vad( implant\w*)?", "durable_lvad"),
        (r"(heart )?transplant(ation|ed)?|htx|transplantiert", "transplantation"), (r"died( on (support|pump))?|death( on support)?|verstorben|tod", "death"),
        (r"(support )?withdrawn|withdrawal|therapiebegrenzung|abbruch", "withdrawal"), (r"transfer(red)?( out)?|verlegt", "transfer_out"),
        (r"(still )?(on support|running)|laufend", "open"),
    ),
    "arterial_return": ((r"femoral|femoralis|leiste", "femoral"), (r"axillary|axillaer|axillaris|subclavi\w*", "axillary"), (r"central|zentral|aort\w*", "central")),
    "vital_status": ((r"dead|deceased|died|verstorben|tot", "dead"), (r"alive|living|lebend|lebt", "alive")),
    "indication_group": (
        (r"(acute )?(myocardial infarct(ion)?|mi|ami|stemi|myokardinfarkt|herzinfarkt)( with shock)?|infarkt", "acute_myocardial_infarction"),
        (r"(decompensated )?(chronic )?(cardiomyopathy|heart failure)|(dcm|icm)|chronische herzinsuffizienz", "decompensated_chronic_heart_failure"),
        (r"myo[ck]arditis", "myocarditis"), (r"(refractory )?(vt/vf|vf/vt|vt|vf|arrhythmia|electrical storm)|rhythmusstoerung", "refractory_ventricular_arrhythmia"),
        (r"post-? ?[ck]ardiotom(y|ie)( shock)?", "post_cardiotomy"), (r"(primary )?graft (failure|dysfunction)|transplantatversagen", "primary_graft_dysfunction_heart"),
        (r"(pulmonary embolism|pe|lungenembolie|lae)", "pulmonary_embolism"), (r"septic cardiomyopathy|sepsis|septische kardiomyopathie", "septic_cardiomyopathy"),
        (r"intoxi[ck]ation|poisoning|overdose|vergiftung", "toxic_or_drug"), (r"congenital( heart disease)?|angeboren\w*", "congenital_adult"),
        (r"(cardiac )?arrest|kreislaufstillstand", "arrest_without_cause"), (r"(acute )?valve disease|valve|klappenvitium", "valve_disease_acute"),
        (r"(accidental )?hypothermi[ae]", "accidental_hypothermia"), (r"peripartum( cardiomyopathy)?", "peripartum"),
        (r"pulmonary hypertension|rv failure|right heart failure", "pulmonary_hypertension_rv_failure"), (r"other|sonstige[s]?", "other"),
    ),
    "repair": ((_YES, "open_repair"), (_NO, "not_open_repair"), (r"open( repair)?|surgical|offen", "open_repair"), (r"closure device|verschlusssystem", "closure_device")),
    "side": ((r"l|left|links", "left"), (r"r|right|rechts", "right")),
    "technique": ((r"percutan(eous)?|perkutan", "percutaneous"), (r"(surgical )?cut-?down|offen", "surgical_cutdown")),
    "discharge_to": ((r"home|zu ?hause", "home"), (r"rehab(ilitation)?|reha", "rehabilitation"), (r"died|verstorben", "died"), (r"(other )?hospital|krankenhaus", "other_acute_hospital")),
    "arrest_location": ((r"ohca|out of hospital|ausserklinisch", "out_of_hospital"), (r"ihca|in hospital|innerklinisch", "in_hospital")),
    "rhythm": ((r"vf|kammerflimmern", "vf"), (r"vt|pvt|pulseless vt", "pulseless_vt"), (r"pea", "pea"), (r"asystol[ey]|asystolie", "asystole")),
    "study_result": ((rf"passed|pass|{_YES}|bestanden", "passed"), (rf"failed|fail|{_NO}", "failed")),
    "config": ((r"v-?a", "va"), (r"v-?a-?v|v-?v-?a", OPEN), (r"v-?v", "vv")),
}  # fmt: skip
_COMPILED = {
    name: tuple((re.compile(words), code) for words, code in pairs) for name, pairs in _CODES.items()
}


def propose_code(text: str, list_name: str, header: str = "") -> str:
    """Our code for a source text, '?' if no trade word settles it.

    A plain yes or no takes its meaning from the header. n/a stays open: it may say "not applicable" or "not available".

    >>> propose_code("Yes", "vital_status", "Dead at last seen"), propose_code("1", "sex"), propose_code("Graft Failure", "indication_group")
    ('dead', '?', 'primary_graft_dysfunction_heart')
    """
    folded = plain(text)
    if _UNKNOWN.fullmatch(folded):
        return "unknown" if "unknown" in vocabulary().lists[list_name] else "not recorded"
    if list_name == "complication_kind":
        return complication_in(text) or OPEN
    if list_name == "boolean" and (said := _ALIVE_OR_DEAD.fullmatch(folded)):
        return "true" if said["alive"] else "false"
    about_death = bool(_DEATH.search(plain(header)))
    if list_name == "vital_status" and re.fullmatch(f"{_YES}|{_NO}", folded):
        return "dead" if bool(re.fullmatch(_YES, folded)) == about_death else "alive"
    for words, code in _COMPILED.get(list_name, ()):
        if words.fullmatch(folded):
            return (
                {"true": "false", "false": "true"}.get(code, code)
                if about_death and list_name == "boolean"
                else code
            )
    return _same_word(folded, list_name)


def _same_word(folded: str, list_name: str) -> str:
    """The source may use our own word for it."""
    return next(
        (v for v in sorted(vocabulary().lists[list_name]) if plain(v) == folded.replace("-", " ")), OPEN
    )


def numbered(header: str, codes: list[str], list_name: str) -> dict[str, str] | None:
    """0 and 1 mean no and yes only where the header says "(0/1)"; otherwise numbers say nothing. None: not numbers."""
    if not codes or not all(re.fullmatch("[0-9]+", code) for code in codes):
        return None
    if re.search(r"\b0 ?/ ?1\b", header) and set(codes) <= {"0", "1"}:
        return if_one_is_yes(header, codes, list_name) or dict.fromkeys(codes, OPEN)
    return dict.fromkeys(codes, OPEN)


def if_one_is_yes(header: str, codes: list[str], list_name: str) -> dict[str, str]:
    """What the codes 0 and 1 (or 1 and 2 for the sex) would mean by the commonest habit; {} if there is none.

    >>> if_one_is_yes("died", ["0", "1"], "vital_status"), if_one_is_yes("how ended", ["1", "2"], "end_kind")
    ({'0': 'alive', '1': 'dead'}, {})
    """
    if list_name == "sex" and set(codes) == {"1", "2"}:
        return {"1": "male", "2": "female"}
    if not set(codes) <= {"0", "1"}:
        return {}
    found = {code: propose_code("yes" if code == "1" else "no", list_name, header) for code in sorted(codes)}
    return {} if OPEN in found.values() else found

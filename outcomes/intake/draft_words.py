"""Trade words, English and German, by which a draft proposes fields, units and codes. Proposals only: a person decides."""

from __future__ import annotations

import re

# (pattern on the folded header, field). The first that matches proposes; a tie between fields is left open.
FIELDS: tuple[tuple[str, str], ...] = (
    (r"date of birth|birth ?date|\bdob\b|geburtsdatum|\bborn\b", "person.birth_date"),
    (r"birth ?year|year of birth|\byob\b|geburtsjahr", "person.birth_year"),
    (r"\bsex\b|gender|geschlecht", "person.sex_recorded"),
    (r"\bage\b|\balter\b", "support_run.age_years"),
    (r"weight|gewicht|body mass\b|\bkg\b", "support_run.weight_kg"),
    (r"height|gr(oe|ö)sse|größe", "person.height_cm"),
    (r"first onset|onset", "complication"),
    (r"(arrest|cpr).*(before|vor)|vor.*cpr|cpr vor", "pre_support_state.had_arrest"),
    (r"low.?flow|minutes of cpr|cpr.*min", "arrest_episode.low_flow_min"),
    (r"intubat", "pre_support_state.intubated_at"),
    (r"beatmungsstunden|ventilat.*hours|hours.*ventilat", "pre_support_state.intubation_hours"),
    (r"\bpip\b|peak insp|pmax|airway pressure", "measurement.peak_inspiratory_pressure"),
    (r"\bsbp\b|rrsys|systol", "measurement.sbp"),
    (r"\bdbp\b|rrdia|diastol", "measurement.dbp"),
    (r"\bmap\b|mean arterial", "measurement.map"),
    (r"^ph\b|arterial ph", "measurement.ph_arterial"),
    (r"bicarb|hco3", "measurement.bicarbonate"),
    (r"lact|laktat", "measurement.lactate"),
    (r"creatinine|kreatinin|\bcrea\b", "measurement.creatinine"),
    (r"bilirubin", "measurement.bilirubin_total"),
    (r"\balt\b|\bgpt\b", "measurement.alt"),
    (r"\bast\b|\bgot\b", "measurement.ast"),
    (r"\binr\b", "measurement.inr"),
    (r"platelet|thrombo(zyten)?\b|\bplt\b", "measurement.platelets"),
    (r"glucose|glukose", "measurement.glucose"),
    (r"h(a)?emoglobin|\bhb\b", "measurement.haemoglobin"),
    (r"prothrombin|quick", "measurement.prothrombin_activity"),
    (r"\bgcs\b|glasgow", "measurement.gcs_total"),
    (r"vti", "lvot_vti"),
    (r"s'|s prime|lateral s", "lateral_s_prime"),
    (r"lvef|ejection|\bef\b", "lvef"),
    (r"flow l|fluss|pump flow|trial flow", "weaning_step.flow_l_min"),
    (r"chron.*(kidney|renal|niere)|dialysis|\bckd\b", "history.chronic_kidney_disease"),
    (r"(acute|akut|kidney fail|renal fail).*|nierenversagen", "pre_support_state.acute_renal_failure"),
    (r"liver|leber", "pre_support_state.liver_failure"),
    (r"\bcns\b|\bzns\b|neurolog", "pre_support_state.cns_dysfunction"),
    (r"leg (perf|cann)|beinperf|limb perf", "cannulation.leg_cannula"),
    (r"right radial|radialis rechts|right.*line", "cannulation.right_sided_monitoring"),
    (r"return|r(ue|ü)ckgabe", "cannulation.arterial_return"),
    (r"how.*ended|ende ?code|exit|end(ing)? (kind|code)|outcome of support", "support_end.kind"),
    (r"surgical (removal|repair)|arterial repair", "support_end.arterial_repair"),
    (r"alive|lebend|survived", "hospital_outcome.is_alive_at_discharge"),
    (r"discharge|entlass", "hospital_outcome.discharge"),
    (r"\bcpc\b", "neuro_outcome.cpc"),
    (r"\bmrs\b|rankin", "neuro_outcome.mrs"),
    (r"dead|verstorben|deceased|died", "follow_up.vital_status"),
    (r"last (seen|contact)|letzter kontakt", "follow_up.contact"),
    (r"reason|diagnos|indication|grund", "indication.group"),
    (r"plan|strateg|intended", "support_run.intended_pathway"),
    (r"complication|komplikation|event (kind|code)", "complication_event.kind"),
    (r"severity|schwere|grade", "complication_event.grade"),
    (r"on support|support start|^start|^beginn|flow on|on pump", "support_run.start"),
    (r"off support|support end|^end$|^ende$|flow off|off pump", "support_end.end"),
)  # fmt: skip

PRIVATE = r"name\b|nickname|phone|telefon|address|adresse|e-?mail|comment|remark|notes?\b|bemerk|notiz|free text|insurance|versicher"

UNITS: tuple[tuple[str, str], ...] = (
    (r"mg/dl", "mg/dL"), (r"mmol/l", "mmol/L"), (r"[uµ]mol/l", "umol/L"), (r"meq/l", "meq/L"), (r"g/dl", "g/dL"), (r"k/ul", "K/uL"),
    (r"g/l\b", "G/L"), (r"mbar", "mbar"), (r"cm ?h2o", "cm[H2O]"), (r"kpa", "kPa"), (r"mm ?hg", "mm[Hg]"), (r"\blb", "[lb_av]"),
    (r"\(in\)|inch", "[in_i]"), (r"\bkg\b", "kg"), (r"cm/s", "cm/s"), (r"\bcm\b", "cm"), (r"l/min", "L/min"), (r"\bmin(utes)?\b", "min"),
    (r"stunden|hours|\(h\)", "h"), (r"%", "%"),
)  # fmt: skip

COMPLICATIONS: tuple[tuple[str, str], ...] = (
    (r"cannulation site|kan(ue|ü)lierungsstelle", "bleeding_cannulation_site"), (r"gastrointestinal", "bleeding_gastrointestinal"),
    (r"limb isch|bein.*isch", "limb_ischaemia"), (r"h(a)?emolysis|h(ae|ä)molyse", "haemolysis"), (r"circuit thromb", "circuit_thrombosis"),
    (r"oxygenator", "oxygenator_thrombosis"), (r"stroke|schlaganfall", "stroke"), (r"bloodstream|sepsis", "infection_bloodstream"),
    (r"lv dist|ventricular dist", "lv_distension"), (r"differential hypox", "differential_hypoxaemia"),
    (r"renal replacement|nierenersatz|\brrt\b", "renal_replacement"), (r"arrest", "arrest_on_support"),
)  # fmt: skip

CODES: dict[str, tuple[tuple[str, str], ...]] = {
    "boolean": ((r"(yes|y|true|ja|j)", "true"), (r"(no|n|false|nein)", "false"), (r"n/?a|entf(ä|ae)llt", "not applicable")),
    "sex": ((r"(m|male|m(ae|ä)nnlich)", "male"), (r"(f|w|female|weiblich)", "female")),
    "intended_pathway": (
        (r"recovery|erholung", "recovery"), (r"decision|entscheidung", "decision"), (r"(durable )?lvad", "durable_lvad"),
        (r"transplant(ation)?", "transplantation"),
    ),
    "end_kind": (
        (r"weaned|recovery|entw(oe|ö)hnt", "recovery"), (r"(durable )?lvad", "durable_lvad"), (r"transplant(ation|ed)?", "transplantation"),
        (r"died.*|death.*|verstorben", "death"), (r".*withdrawn|withdrawal", "withdrawal"), (r"transfer.*", "transfer_out"),
        (r"(still )?on support", "open"),
    ),
    "arterial_return": ((r"femoral", "femoral"), (r"axillary|axill(ae|ä)r", "axillary"), (r"central|zentral", "central")),
    "vital_status": ((r"(yes|dead|ja|verstorben)", "dead"), (r"(no|alive|nein|lebend)", "alive")),
    "indication_group": (
        (r".*infarct.*", "acute_myocardial_infarction"), (r"(chronic )?cardiomyopathy|heart failure", "decompensated_chronic_heart_failure"),
        (r"myocarditis", "myocarditis"), (r".*vt/?vf.*|.*arrhythmia", "refractory_ventricular_arrhythmia"), (r"post.?cardiotomy", "post_cardiotomy"),
        (r"graft (failure|dysfunction)", "primary_graft_dysfunction_heart"), (r"pulmonary embolism", "pulmonary_embolism"),
        (r"septic cardiomyopathy", "septic_cardiomyopathy"), (r"intoxication|poisoning", "toxic_or_drug"), (r"congenital", "congenital_adult"),
        (r"(cardiac )?arrest", "arrest_without_cause"), (r"valve.*", "valve_disease_acute"),
    ),
    "complication_kind": tuple((f".*({p}).*", k) for p, k in COMPLICATIONS),
}  # fmt: skip

MISSING = ("n/a", "N/A", "na", "NA", "unk", "unknown", "unbekannt", "k.A.", "k. A.", "-", "--", ".", "?", "missing")


def propose_field(header: str, row_is: str) -> list[str]:
    """Fields that the words of a header suggest, the likeliest first."""
    text = header.strip().lower()
    found = []
    for pattern, field in FIELDS:
        if re.search(pattern, text):
            found += _fields_of(field, text, row_is)
    return list(dict.fromkeys(found))


def _fields_of(field: str, text: str, row_is: str) -> list[str]:
    if field == "complication":
        return [f"complication.{kind}" for pattern, kind in COMPLICATIONS if re.search(pattern, text)]
    if field in ("lvef", "lvot_vti", "lateral_s_prime"):
        column = {"lvef": "lvef_percent", "lvot_vti": "lvot_vti_cm", "lateral_s_prime": "lateral_s_prime_cm_s"}[field]
        return [f"weaning_step.{column}" if row_is == "detail" else f"measurement.{field}"]
    return [field]


def propose_unit(header: str) -> str:
    """The unit that a header states, '' if it states none."""
    return next((unit for pattern, unit in UNITS if re.search(pattern, header.lower())), "")


def propose_code(text: str, list_name: str) -> str:
    """Our code for a source text, '?' if no trade word fits."""
    folded = text.strip().lower()
    return next((code for pattern, code in CODES.get(list_name, ()) if re.fullmatch(pattern, folded)), "?")


def is_private(header: str) -> bool:
    return bool(re.search(PRIVATE, header.lower()))

"""Trade words of laboratory values, measurements and drugs, English and German. Common practice; proposals only."""

from __future__ import annotations

ANALYTES: tuple[tuple[str, str], ...] = (
    ("lactate", r"\blac\b|lactate|laktat"),
    ("ph_arterial", r"(arterial )?\bph\b"),
    ("bicarbonate", r"bicarb\w*|hco3"),
    ("bicarbonate_standard", r"stand\w*[- ]?(bicarb\w*|hco3)"),
    ("base_excess", r"base excess|basenueberschuss|^be\b"),
    ("pao2", r"\bpa?o2\b"),
    ("paco2", r"\bpa?co2\b"),
    ("fio2", r"\bfio2\b"),
    ("sao2", r"\bsao2\b"),
    ("spo2", r"\bspo2\b"),
    ("creatinine", r"creatinine|kreatinin|\bk?crea\b|\bkrea\b"),
    ("egfr", r"\be?gfr\b"),
    ("urea", r"\burea\b( nitrogen)?|harnstoff|\bbun\b"),
    ("bilirubin_total", r"(total )?bili(rubin)?\b( total)?|gesamtbilirubin"),
    ("alt", r"\balt\b|\bgpt\b|\balat\b"),
    ("ast", r"\bast\b|\bgot\b|\basat\b"),
    ("glucose", r"glu[ck]ose|blood sugar|blutzucker"),
    ("haemoglobin", r"ha?emoglobin|\bhb\b|\bhgb\b"),
    ("platelets", r"platelets?|thrombo(zyten)?\b|\bplt\b"),
    ("inr", r"\binr\b"),
    ("prothrombin_activity", r"\bquick\b|prothrombin activity"),
    ("aptt", r"\ba?ptt\b"),
    ("fibrinogen", r"fibrinogen"),
    ("plasma_free_hb", r"(plasma[- ])?free (hb|ha?emoglobin)|freies (hb|haemoglobin)|\bp?fhb\b"),
    ("ldh", r"\bldh\b"),
    ("ck_mb_activity", r"\bck-?mb\b"),
    ("albumin", r"albumin"),
    ("sodium", r"sodium|natrium|^na\+?\b"),
    ("potassium", r"potassium|kalium|^k\+?( |$)"),
    ("anion_gap", r"anion gap|anionenluecke"),
    ("temperature", r"\btemp(erature?|eratur)?\b"),
    ("sbp", r"\bsbp\b|\brr[- ]?sys\w*|systol\w*|\bsys\b"),
    ("dbp", r"\bdbp\b|\brr[- ]?dia\w*|diastol\w*|\bdia\b"),
    ("map", r"\bmap\b|mean (arterial )?(pressure|bp)|mitteldruck"),
    ("heart_rate", r"heart rate|\bhr\b|herzfrequenz"),
    ("cvp", r"\bcvp\b|\bzvd\b|central venous pressure"),
    ("lvef", r"\b(lv ?)?ef\b|ejection( fraction)?"),
    ("lvot_vti", r"(lvot[- ]?)?vti\b"),
    ("lateral_s_prime", r"(lateral )?(\bs'|s[- ]prime)"),
    ("peak_inspiratory_pressure", r"\bpip\b|peak insp\w*( pressure)?|\bp ?max\b|spitzendruck|peak airway pressure"),
    ("gcs_total", r"\bgcs\b|glasgow( coma)?"),
    ("urine_day", r"\burine?\b( output)?|diurese|urinmenge"),
)  # fmt: skip

DRUGS: tuple[tuple[str, str], ...] = (
    ("dopamine", r"\bdopamine?\b"),
    ("dobutamine", r"\bdobutamine?\b"),
    ("adrenaline", r"\badrenaline?\b|\bepinephrine?\b"),
    ("noradrenaline", r"\bnor-?adrenaline?\b|\bnor-?epinephrine?\b"),
    ("vasopressin", r"\bvasopressin\b"),
    ("milrinone", r"\bmilrinone?\b"),
    ("enoximone", r"\benoximone?\b"),
    ("levosimendan", r"\blevosimendan\b"),
    ("phenylephrine", r"\bphenylephrine?\b"),
    ("isoprenaline", r"\bisoprenaline?\b"),
)  # fmt: skip

BLOOD_PRESSURE = r"\bbp\b|blood pressure|blutdruck|\brr\b"

# Headers of columns that name people or hold free words: they stay out.
PRIVATE = (
    r"(?<!code )(?<!device )(?<!drug )\bname\b|\b(sur|first|last|fore|nick|vor|nach|familien)[- ]?name\b|patientenname|phone|telefon|\btel\b|mobile\b"
    r"|handy|\bfax\b|address|adresse|anschrift|\bstreet\b|strasse|\bplz\b|postcode|\bzip\b|wohnort|e-?mail|comment|kommentar|remark|bemerk|anmerk"
    r"|\bnotes?\b|notiz|free ?text|freitext|insurance|versicher|social security|next of kin|angehoerig|relative|contact person"
    r"|surgeon|operat(or|eur)|physician|consultant|nurse|\barzt\b|chirurg\b|behandler|serial|seriennummer|narrative|verlauf\b|epikrise"
)  # fmt: skip

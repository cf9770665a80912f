"""Units, dates, decimal marks, codes and two values in a cell: what the distribution proves, and what stays open."""

from __future__ import annotations

import datetime as dt
import tomllib

import pytest
from draft_made import as_csv, as_workbook, beside, columns, draft, said, settled, with_columns

from outcomes.intake.draft_codes import propose_code
from outcomes.intake.draft_moment import pattern_of
from outcomes.intake.draft_number import Marks, marks_of
from outcomes.intake.draft_unit import stated_unit
from outcomes.intake.mapping_file import read_mapping
from outcomes.intake.moment_pattern import moment_form
from outcomes.intake.vocabulary import vocabulary


def _spread(low: float, high: float, n: int = 60) -> list[str]:
    return [f"{low + (high - low) * (i % 20) / 19:.1f}" for i in range(n)]


def _unit(header: str, cells: list[str]) -> tuple[str, str]:
    text = draft(with_columns({header: cells}, headers=["Run no", "Record no", "Flow on"]))
    return columns(text)[header]["unit"], beside(text, header)


def test_a_unit_that_fits_alone_is_proposed_with_its_evidence() -> None:
    assert _unit("Lactate", _spread(22, 60)) == ("mg/dL", "median about 41, half of the values between 32 and 50: more likely mg/dL")
    assert _unit("Lactate", _spread(2, 8))[0] == "mmol/L"
    assert _unit("Creatinine", _spread(1, 3))[0] == "mg/dL"


def test_a_unit_of_header_and_distribution_that_agree_is_proposed() -> None:
    unit, why = _unit("Creatinine mg/dL", _spread(1, 3))
    assert unit == "mg/dL" and "fits mg/dL, which the header says" in why


def test_a_unit_that_the_distribution_contradicts_stays_open() -> None:
    unit, why = _unit("Lactate mmol/L", _spread(22, 60))
    assert unit == "?" and "the header says mmol/L, but median about 41" in why and "it would fit mg/dL" in why


def test_a_unit_stays_open_if_two_fit_or_too_few_values_or_a_foreign_one() -> None:
    unit, why = _unit("Bilirubin", _spread(4, 6))
    assert unit == "?" and "it would fit mg/dL or umol/L" in why
    assert _unit("Lactate", [*_spread(22, 60, 19), *[""] * 41])[0] == "?"
    assert _unit("Plasma free Hb", _spread(20, 60))[0] == "?"
    unit, why = _unit("Lactate (mg/L)", _spread(22, 60))
    assert unit == "?" and "the header says mg/l, which is no unit of this field here" in why
    assert _unit("ALT", _spread(22, 60))[0] == "?"


@pytest.mark.parametrize(
    ("header", "quantity", "unit"),
    [
        ("Bicarb mEq/L", "monovalent", "meq/L"), ("Creatinine mg/dL", "creatinine", "mg/dL"), ("Platelets K/uL", "platelets", "10*3/uL"),
        ("Thrombo G/l", "platelets", "G/L"), ("Hb g/l", "haemoglobin", "g/L"), ("Plt 10^9/L", "platelets", "10*9/L"), ("Pmax mbar", "airway_pressure", "mbar"),
        ("Weight (lb)", "mass", "[lb_av]"), ("Weight lbs", "mass", "[lb_av]"), ("Height (in)", "length", "[in_i]"), ("Gewicht kg", "mass", "kg"),
        ("Groesse cm", "length", "cm"), ("RR kPa", "pressure", "kPa"), ("Krea µmol/l", "creatinine", "umol/L"), ("Laktat mmol/l", "lactate", "mmol/L"),
        ("PIP cmH2O", "airway_pressure", "cm[H2O]"), ("EF %", "percent", "%"), ("BUN mg/dL", "urea", "mg/dL{urea_nitrogen}"), ("Fluss l/min", "flow", "L/min"),
        ("Minutes of CPR", "time_min", "min"), ("Beatmungsstunden", "time_h", "h"), ("S' cm/s", "velocity", "cm/s"), ("MAP mmHg", "pressure", "mm[Hg]"),
        ("lactate_mmol_l", "lactate", "mmol/L"), ("Hb g per dL", "haemoglobin", "g/dL"), ("Lactate", "lactate", ""), ("Time of flow", "time_min", ""), ("Temp °F", "temperature", "[degF]"), ("ALT U/L", "enzyme", "U/L"),
    ],
)  # fmt: skip
def test_units_of_headers(header: str, quantity: str, unit: str) -> None:
    units = {r: c for (q, r), c in vocabulary().conversions.items() if q == quantity}
    assert stated_unit(header, units) == (unit, "")


@pytest.mark.parametrize(
    ("cells", "pattern"),
    [
        (["05/16/2021", "05/02/2021"], "MM/DD/YYYY"), (["16.05.2021", "02.05.2021"], "DD.MM.YYYY"), (["16.5.2021 9:05", "2.12.2021 10:05"], "D.M.YYYY H:mm"),
        (["05/16/2021 08:15 AM"], "MM/DD/YYYY hh:mm AM"), (["5/16/2021 8:15 PM", "5/2/2021 11:15 PM"], "M/D/YYYY h:mm AM"), (["2021-05-16"], "YYYY-MM-DD"),
        (["2021-05-16T08:15:30Z"], "YYYY-MM-DDTHH:mm:ssZ"), (["2021-05-16 08:15:30 +02:00"], "YYYY-MM-DD HH:mm:ss Z"), (["05/06/2021", "07/08/2021"], "?"),
        (["2021-05-06"], "?"), (["16/05/2021", "05/16/2021"], "?"), (["16.05.21"], "?"),
    ],
)  # fmt: skip
def test_date_patterns_are_proven_by_a_part_above_twelve_or_stay_open(cells: list[str], pattern: str) -> None:
    found = pattern_of(dict.fromkeys(cells, 3))
    assert found.text == pattern
    if found.text != "?":
        moment_form(found.text)


def test_a_slip_among_many_proofs_is_named_and_does_not_open_the_question() -> None:
    found = pattern_of({"05/16/2021": 199, "16/05/2021": 1})
    assert found.text == "MM/DD/YYYY"
    assert found.proof == "199 cells have a second part above 12 and 1 a first: the month stands before the day; 1 will be reported at import"
    assert pattern_of({"05/16/2021": 40, "16/05/2021": 1}).text == "?"


def test_the_pattern_of_the_file_is_written_once_and_unproven_columns_ask() -> None:
    text = draft(with_columns({"DOB": ["03/04/1951"] * 60}))
    assert tomllib.loads(text)["file"][0]["pattern"] == "MM/DD/YYYY hh:mm AM"
    assert "cells prove the order of day and month" in said(text)
    made = columns(text)
    assert "pattern" not in made["Flow on"]
    assert made["DOB"]["pattern"] == "?"
    assert 'no cell has a part above 12; it is either "DD/MM/YYYY" or "MM/DD/YYYY"' in beside(text, "DOB")


def test_a_single_question_if_no_column_proves_the_order() -> None:
    few = as_csv(["Run no", "Record no", "Begin", "Ende"], [[f"R{i}", f"P{i % 30}", "03/04/2021", "05/06/2021"] for i in range(40)])
    text = draft(few)
    assert tomllib.loads(text)["file"][0]["pattern"] == "?"
    assert not any("pattern" in c for c in columns(text).values())


def test_typed_dates_and_numbers_need_no_pattern_and_no_mark() -> None:
    body = [["Run no", "Record no", "Beginn", "Gewicht kg", "Laktat"],
            *([f"R{i}", f"P{i % 30}", dt.datetime(2021, 5, 1 + i % 20, 8, 15), 70.5 + i, "2,5"] for i in range(40))]  # fmt: skip
    text = draft(as_workbook(body))
    assert "pattern" not in tomllib.loads(text)["file"][0]
    made = columns(text)
    assert made["Beginn"] == {"header": "Beginn", "field": "support_run.start"}
    assert "decimal_mark" not in made["Gewicht kg"] and tomllib.loads(text)["file"][0]["decimal_mark"] == ","


def test_a_time_of_day_joins_the_date_that_is_called_the_same() -> None:
    data = with_columns({"End date": ["05/16/2023", "05/02/2023"] * 30, "End time": ["21:30", "08:15"] * 30, "Alarm": ["10:00"] * 60},
                        headers=["Run no", "Record no", "Flow on"])  # fmt: skip
    text = draft(data)
    made = columns(text)
    assert made["End date"] == {"header": "End date", "field": "support_end.end", "join": ["End time"], "pattern": "MM/DD/YYYY HH:mm"}
    assert made["Alarm"]["field"] == "?" and "End time" not in made


@pytest.mark.parametrize(
    ("cells", "marks"),
    [
        (["13,9", "7"], Marks(",", "", 1)), (["0.51", "12"], Marks(".", "", 1)), (["1,234"], Marks("?")), (["0,234"], Marks(",", "", 1)),
        (["1.234,5"], Marks(",", ".", 1)), (["1'234.5"], Marks(".", "'", 1)), (["1,234,567"], Marks(".", ",", 1)), (["1,5", "1.5"], Marks("?")), (["12"], Marks()),
    ],
)  # fmt: skip
def test_decimal_marks(cells: list[str], marks: Marks) -> None:
    assert marks_of(dict.fromkeys(cells, 1)) == marks


def test_a_column_with_another_decimal_mark_says_so() -> None:
    data = with_columns({"Lactate": ["22,5", "60,1"] * 30, "Creatinine": ["1.5", "2.5"] * 30, "Bilirubin mg/dL": ["0.7", "1.2"] * 30, "ALT U/L": ["1,234"] * 60})
    text = draft(data)
    made = columns(text)
    assert tomllib.loads(text)["file"][0]["decimal_mark"] == "."
    assert made["Lactate"]["decimal_mark"] == "," and made["ALT U/L"]["decimal_mark"] == "?" and "decimal_mark" not in made["Creatinine"]


def test_two_values_in_a_cell() -> None:
    text = draft(with_columns({"BP mmHg": ["92/54", "101 / 60"] * 27 + ["92"] * 6, "Ratio": ["1/2"] * 60}, headers=["Run no", "Record no", "Flow on"]))
    made = columns(text)
    assert made["BP mmHg"] == {"header": "BP mmHg", "split": "/", "fields": ["measurement.sbp", "measurement.dbp"], "unit": "mm[Hg]", "reading": "bp"}
    assert made["Ratio"] == {"header": "Ratio", "split": "/", "fields": ["?", "?"]}
    assert "54 cells hold two numbers" in beside(text, "BP mmHg") and "6 x 99" in beside(text, "BP mmHg")
    assert "split" not in columns(draft(with_columns({"BP": ["92/54"] * 53 + ["92"] * 7})))["BP"]


def test_pressures_in_two_columns_are_one_reading_if_they_are_filled_together() -> None:
    text = draft(with_columns({"SBP": ["92", "101"] * 30, "DBP": ["54", "60"] * 30}))
    assert columns(text)["SBP"]["reading"] == columns(text)["DBP"]["reading"] == "bp"
    assert "the systolic one lies above in 60" in beside(text, "SBP")
    assert "reading" not in columns(draft(with_columns({"SBP": ["92", ""] * 30, "DBP": ["", "60"] * 30})))["SBP"]


def test_words_for_missing_values() -> None:
    data = with_columns({"Creatinine mg/dL": ["1.5", "2.5", "unk", "k.A."] * 15, "Leg perfusion cannula": ["Yes", "No", "n/a"] * 20,
                         "Lactate": [*_spread(22, 60, 54), "n/a", "n/a", "n/a", "afterwards", "<5", "-"]})  # fmt: skip
    text = draft(data)
    assert tomllib.loads(text)["file"][0]["missing"] == ["-", "k.A.", "unk"]
    made = columns(text)
    assert made["Leg perfusion cannula"]["codes"] == {"No": "false", "Yes": "true", "n/a": "?"}
    assert made["Lactate"]["missing"] == ["n/a"] and "afterwards" not in text
    assert "1 x <9; 1 x aaaaaaaaaa" in beside(text, "Lactate")
    read_mapping(settled(text.replace('"n/a" = "?"', '"n/a" = "not applicable"'), {"Lactate.unit": '"mg/dL"', "Creatinine mg/dL.unit": '"mg/dL"'}))


@pytest.mark.parametrize(
    ("text", "list_name", "header", "code"),
    [
        ("Ja", "boolean", "", "true"), ("n", "boolean", "", "false"), ("Yes", "boolean", "Died in hospital", "false"), ("alive", "boolean", "Died / alive", "true"),
        ("w", "sex", "", "female"), ("Männlich", "sex", "", "male"), ("1", "sex", "", "?"), ("No", "vital_status", "Dead at last seen", "alive"),
        ("No", "vital_status", "Alive at last contact", "dead"), ("LVAD", "end_kind", "", "durable_lvad"), ("support withdrawn", "end_kind", "", "withdrawal"),
        ("Transplant", "intended_pathway", "", "transplantation"), ("unknown", "intended_pathway", "", "unknown"), ("unk", "sex", "", "not recorded"),
        ("n/a", "boolean", "", "?"), ("Gastrointestinal bleeding", "complication_kind", "", "bleeding_gastrointestinal"), ("Yes", "repair", "", "open_repair"),
        ("post cardiotomy", "indication_group", "", "post_cardiotomy"), ("pulseless vt", "rhythm", "", "pulseless_vt"), ("something", "end_kind", "", "?"),
    ],
)  # fmt: skip
def test_codes(text: str, list_name: str, header: str, code: str) -> None:
    assert propose_code(text, list_name, header) == code
    assert code == "?" or code in vocabulary().lists[list_name] | {"not recorded", "not applicable", "none"}


def test_numbers_as_codes_say_nothing_unless_the_header_does() -> None:
    made = with_columns({"Liver failure": ["0", "1"] * 30, "Kidney failure (0/1)": ["0", "1"] * 30, "Sex": ["1", "2"] * 30, "How support ended": ["1", "2", "3"] * 20})
    text = draft(made)
    found = columns(text)
    assert found["Liver failure"]["codes"] == "?" and found["Sex"]["codes"] == "?"
    assert 'if this is meant, write: codes = { "1" = "male", "2" = "female" }' in beside(text, "Sex")
    assert found["Kidney failure (0/1)"]["codes"] == {"0": "false", "1": "true"}
    assert found["How support ended"]["codes"] == {"1": "?", "2": "?", "3": "?"}


def test_codes_that_differ_by_capitals_are_joined() -> None:
    made = columns(draft(with_columns({"How support ended": ["weaned", "Weaned", "WEANED", "LVAD"] * 15})))["How support ended"]
    assert made["codes"] == {"LVAD": "durable_lvad", "weaned": "recovery"} and made["ignore_case"] is True

"""Fields, keys, tables and code lists that a draft proposes from headers. Trade words are common practice."""

from __future__ import annotations

import pytest
from draft_made import (
    RUNS,
    as_csv,
    as_workbook,
    beside,
    columns,
    draft,
    rows,
    said,
    settled,
    sheets,
    with_columns,
)

from outcomes.intake import draft_match
from outcomes.intake.draft_match import is_private, matches
from outcomes.intake.mapping_file import read_mapping
from outcomes.intake.vocabulary import vocabulary


@pytest.mark.parametrize(
    ("header", "field"),
    [
        ("Lac", "measurement.lactate"), ("Laktat mmol/l", "measurement.lactate"), ("Kreatinin umol/l", "measurement.creatinine"),
        ("Gewicht kg", "support_run.weight_kg"), ("Größe (cm)", "person.height_cm"), ("Geschlecht", "person.sex_recorded"),
        ("On support", "support_run.start"), ("Beginn", "support_run.start"), ("Off support", "support_end.end"), ("Ende", "support_end.end"),
        ("Endecode", "support_end.kind"), ("How support ended", "support_end.kind"), ("RRsys kPa", "measurement.sbp"), ("DBP", "measurement.dbp"),
        ("Pmax mbar", "measurement.peak_inspiratory_pressure"), ("PIP cmH2O", "measurement.peak_inspiratory_pressure"),
        ("HCO3", "measurement.bicarbonate"), ("Thrombo G/l", "measurement.platelets"), ("INR", "measurement.inr"), ("EF %", "measurement.lvef"),
        ("Bilirubin", "measurement.bilirubin_total"), ("Plan at start", "support_run.intended_pathway"), ("Strategie", "support_run.intended_pathway"),
        ("Reason for support", "indication.group"), ("Diagnosecode", "indication.group"), ("Rueckgabe", "cannulation.arterial_return"),
        ("Rückgabe", "cannulation.arterial_return"), ("Beinperfusion", "cannulation.leg_cannula"), ("A. radialis rechts", "cannulation.right_sided_monitoring"),
        ("ZNS", "pre_support_state.cns_dysfunction"), ("Leberversagen", "pre_support_state.liver_failure"), ("CPC", "neuro_outcome.cpc"),
        ("akutes Nierenversagen", "pre_support_state.acute_renal_failure"), ("chron. Niereninsuff.", "history.chronic_kidney_disease"),
        ("Noradrenaline ug/kg/min", "vasoactive_dose.noradrenaline"), ("Adrenalin", "vasoactive_dose.adrenaline"),
        ("SupportStart", "support_run.start"), ("Minutes of CPR", "arrest_episode.low_flow_min"), ("Low-flow min", "arrest_episode.low_flow_min"),
        ("Letzter Kontakt", "follow_up.contact"), ("Surgical removal", "support_end.arterial_repair"), ("Date of death", "follow_up.death"),
    ],
)  # fmt: skip
def test_headers_name_fields(header: str, field: str) -> None:
    assert field in [m.field for m in matches(header, "run")][:2]


@pytest.mark.parametrize("header", ["Name", "Vorname", "Patient name", "Phone", "Tel.", "E-Mail", "Adresse", "Remarks", "Comments", "Bemerkungen", "Notes",
                                    "Free text", "Versicherungsnr", "Surgeon", "Operateur", "Device serial no"])  # fmt: skip
def test_headers_of_people_and_free_words_stay_out(header: str) -> None:
    assert is_private(header)


def test_every_listed_field_is_one_of_the_vocabulary_and_none_is_private() -> None:
    listed = {field for field, _ in draft_match._ALL}
    assert listed <= set(vocabulary().fields)
    assert {f"complication.{kind}" for kind in vocabulary().lists["complication_kind"]} <= listed
    assert not [f for f in listed if is_private(f.split(".")[1].replace("_", " "))]


def test_two_near_fields_stay_open_with_both_named() -> None:
    assert draft_match.settled(matches("Chronic dialysis/CKD", "run")) == ""
    text = draft(with_columns({"Chronic dialysis/CKD": ["Yes", "No"] * 30}))
    assert columns(text)["Chronic dialysis/CKD"] == {"header": "Chronic dialysis/CKD", "field": "?", "codes": {"No": "false", "Yes": "true"}}
    assert "history.dialysis_dependent, history.chronic_kidney_disease" in beside(text, "Chronic dialysis/CKD")


def test_the_cells_decide_between_a_moment_and_a_code() -> None:
    made = columns(draft(with_columns({
        "Discharge": ["06/14/2023", "06/02/2023"] * 30, "Alive at discharge": ["Yes", "No"] * 30, "Intubated": ["04/13/2023 07:00 AM"] * 60,
        "Ventilated": ["y", "n"] * 30,
    })))  # fmt: skip
    assert made["Discharge"]["field"] == "hospital_outcome.discharge"
    assert made["Alive at discharge"]["field"] == "hospital_outcome.is_alive_at_discharge"
    assert made["Intubated"]["field"] == "pre_support_state.intubated_at"
    assert made["Ventilated"]["field"] == "pre_support_state.ventilated_at_zero"


def test_a_complication_without_times_is_a_question() -> None:
    text = draft(with_columns({"Haemolysis": ["Yes", "No"] * 30}))
    assert columns(text)["Haemolysis"]["field"] == "?"
    assert "holds no times of onset" in beside(text, "Haemolysis")


def test_columns_without_a_known_field_are_questions_or_stay_out() -> None:
    data = with_columns({"Ward": ["north", "south"] * 30, "Letter": [f"he went home with {i} of us" for i in range(60)], "Old": [""] * 60,
                         "Other": [str(4440000 + 7 * i) for i in range(60)]})  # fmt: skip
    text = draft(data)
    assert columns(text)["Ward"]["field"] == "?"
    assert "no trade word settles it; the cells hold words" in beside(text, "Ward")
    assert set(sheets(text)[0]["leave_out"]) == {"Name", "Remarks", "Letter", "Old", "Other"}


def test_run_and_person_columns_by_repetition_and_words() -> None:
    text = draft(with_columns({}))
    sheet = sheets(text)[0]
    assert (sheet["row_is"], sheet["run"], sheet["person"]) == ("run", ["Run no"], ["Record no"])
    assert "100% of its values are different." not in text.split("person =")[1].split("\n")[0]
    assert "# 100% of its values are different\nrun" in text and "# 95% of its values are different.\nperson" in text


def test_keys_that_are_not_clear_are_questions() -> None:
    n = 40
    body = [[f"A{i}", f"B{i}", "MF"[i % 2]] for i in range(n)]
    sheet = sheets(draft(as_csv(["ID", "Number", "Sex"], body)))[0]
    assert sheet["run"] == "?" and sheet["person"] == "?"
    text = draft(as_csv(["Run", "Sex"], [[row[0], row[2]] for row in body]))
    assert sheets(text)[0]["run"] == ["Run"] and sheets(text)[0]["person"] == "?"
    assert 'persons = "one run each"' in said(text)
    read_mapping(settled(text, {"person": '[]\npersons = "one run each"'}))


def test_two_columns_for_one_field() -> None:
    text = draft(with_columns({"Age": ["71", "64"] * 30, "Lactate 6 h": ["70.5", "33.5"] * 30, "Sex": ["M", "F"] * 30, "Gender": ["M", "F"] * 30}))
    made = columns(text)
    assert made["DOB"]["field"] == "person.birth_date" and made["Age"]["field"] == "?"
    assert made["Lactate"]["window"] == made["Lactate 6 h"]["window"] == "?"
    assert made["Sex"]["field"] == made["Gender"]["field"] == "?"
    assert "reads like person.sex_recorded, as these do: Gender" in beside(text, "Sex")


def _book() -> bytes:
    runs = [["Programme log"], [], ["Fallnr", "Pat-ID", "Beginn", "Endecode", "Diagnosecode"],
            *([f"F-{i:03d}", f"C{i - (i % 20 == 3)}", "13.04.2023 08:15", 1 + i % 3, 1 + i % 2] for i in range(40))]  # fmt: skip
    kinds = ["stroke", "haemolysis", "limb ischaemia"]
    events = [["Fallnr", "Zeit", "Komplikation", "Schwere"], *([f"F-{i % 30:03d}", "14.04.2023 10:00", kinds[i % 3], "minor"] for i in range(60))]
    steps = [["Fallnr", "Zeit", "Fluss l/min", "LVEF %", "S' cm/s"], *([f"F-{i // 3:03d}", "20.04.2023 10:00", "2,5", 20 + i % 5, "6,1"] for i in range(60))]
    lists = [["code", "meaning"], [1, "weaned"], [2, "died on support"], [3, "LVAD"], [], [1, "myocarditis"], [2, "arrest"]]
    return as_workbook(runs, events, steps, lists)


def test_a_workbook_of_runs_events_steps_and_code_lists() -> None:
    text = draft(_book())
    made = sheets(text)
    assert [s["row_is"] for s in made] == ["run", "event", "detail", "code list", "code list"]
    assert made[0]["header_line"] == 3 and [s.get("run") for s in made[:3]] == [["Fallnr"]] * 3
    assert [s["rows"] for s in made[3:]] == [[2, 4], [6, 7]]
    runs, events, steps = ({c["header"]: c for c in s["column"]} for s in made[:3])
    assert (runs["Endecode"]["codes_from"], runs["Diagnosecode"]["codes_from"]) == ("sheet4_list1", "sheet4_list2")
    assert runs["Endecode"]["codes"] == {"LVAD": "durable_lvad", "died on support": "death", "weaned": "recovery"}
    assert events["Zeit"]["field"] == "complication_event.onset" and events["Schwere"]["field"] == "complication_event.grade"
    assert events["Komplikation"]["codes"] == {"haemolysis": "haemolysis", "limb ischaemia": "limb_ischaemia", "stroke": "stroke"}
    assert [steps[h]["field"] for h in ("Zeit", "Fluss l/min", "LVEF %", "S' cm/s")] == [
        "weaning_step.study", "weaning_step.flow_l_min", "weaning_step.lvef_percent", "weaning_step.lateral_s_prime_cm_s",
    ]  # fmt: skip
    mapping = read_mapping(settled(text))
    assert mapping.source.coverage[0].kinds == ("haemolysis", "limb_ischaemia", "stroke")


def test_events_in_a_file_of_their_own_follow_the_runs() -> None:
    events = as_csv(["Run no", "Event", "When"], [[f"R{i % 20:03d}", "haemolysis" if i % 2 else "stroke", "04/15/2023"] for i in range(40)])
    text = draft(as_csv(RUNS, rows()), events)
    assert [(s["key"], s["row_is"]) for s in sheets(text)] == [("file1_sheet1", "run"), ("file2_sheet1", "event")]
    strangers = as_csv(["Nr", "Event", "When"], [["Z9", "haemolysis", "04/15/2023"]] * 40)
    assert [s["row_is"] for s in sheets(draft(as_csv(RUNS, rows()), strangers))] == ["run", "?"]


def test_events_without_their_runs() -> None:
    body = [[f"F{i % 9}", "13.04.2021", "10:15", ["Schlaganfall", "Hämolyse", "Beinischämie"][i % 3], "2"] for i in range(45)]
    text = draft(as_csv(["Fallnr", "Datum", "Uhrzeit", "Ereignis", "Schwere"], body, ";"))
    sheet = sheets(text)[0]
    assert (sheet["row_is"], sheet["run"]) == ("event", ["Fallnr"]) and "person" not in sheet
    made = columns(text)
    assert made["Datum"] == {"header": "Datum", "field": "complication_event.onset", "join": ["Uhrzeit"], "pattern": "DD.MM.YYYY HH:mm"}
    assert made["Ereignis"]["codes"] == {"Beinischämie": "limb_ischaemia", "Hämolyse": "haemolysis", "Schlaganfall": "stroke"}
    assert "the runs themselves must be known from elsewhere" in said(text)
    read_mapping(settled(text))

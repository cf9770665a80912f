"""For every check in sql/checks two small sets of candidates: rows that violate it and rows that only just do not.

Runs of each table are named in the first column; the lines of its rows count from 1 unless given. What `wrong` violates
is always run a, in the line and with the field stated.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Pair:
    """wrong, right: candidate table -> text table. hits: (line, field or '') of the rows of `wrong` that are found."""

    wrong: dict[str, str]
    right: dict[str, str]
    hits: tuple[tuple[int, str], ...] = ((1, ""),)


def end(kind: str, hours: str = "100", more: str = "", value: str = "") -> dict[str, str]:
    head, cell = (f" | {more}", f" | {value}") if more else ("", "")
    return {"support_end": f"run_key | end_h | end_kind{head}\na | {hours} | {kind}{cell}"}


def outcome(alive: str, discharge: str = "") -> dict[str, str]:
    return {"hospital_outcome": f"run_key | discharge_h | is_alive_at_discharge\na | {discharge} | {alive}"}


def pressures(sbp: str, dbp: str, mean: str = "", reading: str = "bp") -> dict[str, str]:
    rows = [f"a | {kind} | pre_last | {value} | 1 | {reading}" for kind, value in (("sbp", sbp), ("dbp", dbp), ("map", mean)) if value]
    return {"measurement": "run_key | analyte | window_label | value | line | reading\n" + "\n".join(rows)}


def event(onset: str, resolved: str = "", grade: str = "", kind: str = "stroke") -> dict[str, str]:
    return {"complication_event": f"run_key | kind | onset_h | resolved_h | grade\na | {kind} | {onset} | {resolved} | {grade}"}


def two_runs(second_from: str, first_end: str, kind: str = "recovery", line: str = "2") -> dict[str, str]:
    return {
        "support_run": f"run_key | person_key | hours_from_first_run | line\nb | p | 0 |\na | p | {second_from} | {line}",
        "support_end": f"run_key | end_h | end_kind\nb | {first_end} | {kind}\na | 10 | recovery",
    }


def death(hours: str) -> dict[str, str]:
    return {"follow_up": f"run_key | vital_status | death_h\na | dead | {hours}"}


def grade(cpc: str, mrs: str) -> dict[str, str]:
    return {"neuro_outcome": f"run_key | scale | value\na | cpc | {cpc}\na | mrs | {mrs}"}


def peak(ventilated: str) -> dict[str, str]:
    return {
        "measurement": "run_key | analyte | window_label | value\na | peak_inspiratory_pressure | pre_last | 25",
        "pre_support_state": f"run_key | ventilated_at_zero\na | {ventilated}",
    }


def arrest(had: str, minutes: str) -> dict[str, str]:
    return {
        "arrest_episode": f"run_key | low_flow_min\na | {minutes}",
        "pre_support_state": f"run_key | had_arrest\na | {had}",
    }


def circuits(second_from: str) -> dict[str, str]:
    return {"circuit_configuration": f"run_key | config | from_h | to_h\na | va | 0 | 20\na | vav | {second_from} |\nb | va | 0 | 90"}


PAIRS = {
    "arrest/low_flow_without_arrest": Pair(arrest("false", "12"), arrest("true", "12") | {}),
    "cannulation/leg_cannula_without_femoral": Pair(
        {"cannulation": "run_key | leg_cannula | arterial_return\na | true | axillary"},
        {"cannulation": "run_key | leg_cannula | arterial_return\na | true | femoral\nb | false | axillary\nc | true |"},
    ),
    "circuit/fresh_gas_off": Pair(
        {"support_setting": "run_key | fresh_gas_flow_l_min | blood_flow_l_min\na | 0 | 3"},
        {"support_setting": "run_key | fresh_gas_flow_l_min | blood_flow_l_min\na | 0.5 | 3\na | 0 | 0"},
    ),
    "circuit/intervals_overlap": Pair(circuits("19"), circuits("20"), ((2, ""),)),
    "complication/long_after_end": Pair(
        end("recovery") | event("268.5"), end("recovery") | event("268"), ((1, "complication.stroke"),)
    ),
    "complication/resolved_before_onset": Pair(event("20", "19"), event("20", "20")),
    "ending/alive_then_dead_status": Pair(death(""), death("50")),
    "ending/dead_yet_alive": Pair(end("death") | outcome("true", "200"), end("death") | outcome("false", "100")),
    "ending/implant_outside_support": Pair(
        end("durable_lvad", more="device_implant_h", value="124.5"), end("durable_lvad", more="device_implant_h", value="124")
    ),
    "ending/kind_missing": Pair(end(""), end("recovery")),
    "ending/missing": Pair({"support_run": "run_key\na"}, {"support_run": "run_key\na"} | end("recovery")),
    "ending/open_with_end": Pair(end("open"), end("open", "")),
    "ending/open_yet_ended": Pair(end("recovery", ""), end("open", "")),
    "ending/recovery_with_durable_pump": Pair(
        end("recovery", more="device_implanted", value="durable_lvad"), end("recovery", more="device_implanted", value="none")
    ),
    "ending/withdrawn_yet_alive": Pair(end("withdrawal") | outcome("true"), end("withdrawal") | outcome("false")),
    "neuro/deceased_grade_of_survivor": Pair(
        grade("5", "6") | outcome("true"), grade("4", "5") | outcome("true"), ((1, "neuro_outcome.cpc"), (2, "neuro_outcome.mrs"))
    ),
    "person/overlapping_runs": Pair(two_runs("99", "100"), two_runs("100", "100"), ((2, ""),)),
    "person/run_after_death": Pair(two_runs("200", "100", "death"), two_runs("200", "100", "withdrawal"), ((2, ""),)),
    "person/under_18": Pair({"support_run": "run_key | age_years\na | 17"}, {"support_run": "run_key | age_years\na | 18\nb |"}),
    "pressure/diastolic_not_below_systolic": Pair(
        pressures("90", "90"), pressures("90", "89"), ((1, "measurement.dbp"), (1, "measurement.sbp"))
    ),
    "pressure/mean_outside": Pair(pressures("90", "50", "91"), pressures("90", "50", "50")),
    "privacy/date_in_words": Pair(event("20", grade="seen 3-4-21"), event("20", grade="3b of 4")),
    "time/death_before_discharge": Pair(
        outcome("true", "200") | death("198.5"), outcome("true", "200") | death("199")
    ),
    "time/death_before_end": Pair(end("recovery") | death("99.5"), end("recovery") | death("100")),
    "time/discharge_before_end": Pair(end("recovery") | outcome("true", "99.5"), end("recovery") | outcome("true", "100")),
    "time/end_before_start": Pair(end("recovery", "0"), end("recovery", "0.5")),
    "time/end_very_late": Pair(end("recovery", "2880.5"), end("recovery", "2880")),
    "ventilation/pressure_without_ventilation": Pair(peak("false"), peak("")),
    "weaning/study_after_end": Pair(
        end("recovery") | {"weaning_step": "run_key | study_h\na | 100.5"}, end("recovery") | {"weaning_step": "run_key | study_h\na | 100"}
    ),
}  # fmt: skip

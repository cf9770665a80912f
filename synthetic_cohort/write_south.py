"""Style "south": a workbook with numeric codes, the units of the United States and two kinds of dates.

A title stands above the header of the run sheet, whose dates are typed, while those of events are texts. The
codes are explained in a sheet of their own.
Of the birth only the year is kept; of the time after, only the last contact.
"""

from __future__ import annotations

import pandas as pd

from synthetic_cohort.cohort import Cohort
from synthetic_cohort.complications import KIND_KEYS
from synthetic_cohort.settings import ENDINGS, GROUPS
from synthetic_cohort.sheets import (
    Cell,
    Column,
    Form,
    Sheet,
    Tables,
    build_sheet,
    coded,
    flat_frame,
    moments,
    wall,
)
from synthetic_cohort.south_columns import (
    CAUSE_WORDS,
    CONSEQUENCES,
    ENDING_WORDS,
    EVENT_WORDS,
    FLAGS,
    HEARD_BY,
    VALUES,
    WORDS,
)

FILE = "south_ledger.xlsx"
_TEXT = "%m/%d/%Y %I:%M %p"
_YES_NO: dict[object, Cell] = {True: 1, False: 0}


def south_tables(cohort: Cohort) -> Tables:
    """The sheets: runs, events, weaning steps, circuits, attempts, codes."""
    flat = flat_frame(cohort)
    title: list[list[Cell]] = [[f"{cohort.programme.short} - circulatory support ledger"], []]
    runs = build_sheet(FILE, "Episodes", _run_columns(flat), flat["run_no"].tolist(), title)
    sheets = [
        runs,
        _events(cohort, flat),
        _weaning(cohort, flat),
        _circuits(cohort, flat),
        _attempts(cohort),
        _codes(),
    ]
    return Tables("south", _form(), sheets, flat, cohort.programme.zone)


def _form() -> Form:
    return Form(
        patterns={"": (_TEXT,), "start": (None,), "end": (None,), "discharge": (None,), "birth": ("%Y",)},
        decimal_mark=None,
        words={"alive": 1, "unknown_code": 9, "text": "pending", "error": "#DIV/0!"},
        slips={"creatinine": (88.4017, 0.06, 33.0), "haemoglobin": (10.0, 1.5, 25.0)},
    )


def _episode(run_no: pd.Series) -> list[Cell]:
    return [f"E-{n:04d}" for n in run_no]


def typed(values: pd.Series, digits: int) -> list[Cell]:
    """Numbers as typed cells, whole ones as integers; empty where missing."""
    return [
        None if pd.isna(v) else (round(float(v)) if digits == 0 else round(float(v), digits)) for v in values
    ]


def _dates(values: pd.Series) -> list[Cell]:
    return [None if pd.isna(v) else v.to_pydatetime() for v in values]


def _codes_of(words: dict[str, str], keys: tuple[str, ...]) -> dict[object, Cell]:
    return {key: i for i, key in enumerate((k for k in keys if k in words), start=1)}


_GROUP_KEYS = tuple(g.key for g in GROUPS)
CAUSES = _codes_of(CAUSE_WORDS, _GROUP_KEYS)
ENDS = {**_codes_of(ENDING_WORDS, ENDINGS), "open": None}
EVENTS = _codes_of(EVENT_WORDS, KIND_KEYS)


def _run_columns(flat: pd.DataFrame) -> list[Column]:
    columns = [*_who_and_when(flat), *_words(flat)]
    columns += [
        (header, role, typed(flat[name] * factor, digits)) for header, name, factor, digits, role in VALUES
    ]
    columns += [(header, "", coded(flat[name], _YES_NO, None)) for header, name in FLAGS]
    return [*columns, *_after(flat)]


def _who_and_when(flat: pd.DataFrame) -> list[Column]:
    nicknames = [f"{a[:2]}{b[:3]}" for a, b in zip(flat["first_name"], flat["last_name"], strict=True)]
    return [
        ("Episode", "run", _episode(flat["run_no"])),
        ("Chart", "person", [f"C{r}" for r in flat["record_number"]]),
        ("Nickname", "", list(nicknames)),
        ("YOB", "birth", [d.year for d in flat["birth_date"]]),
        ("Sex code", "sex", coded(flat["sex"], {"female": 2, "male": 1})),
        ("Reason code", "cause", coded(flat["indication_group"], CAUSES)),
        ("Flow on", "start", _dates(flat["start_local"])),
        ("Flow off", "end", _dates(flat["end_at"])),
        ("Exit code", "end_kind", coded(flat["end_kind"], ENDS, None)),
        ("Reached us", "", _dates(flat["arrival_at"])),
    ]


def _words(flat: pd.DataFrame) -> list[Column]:
    return [(header, "", coded(flat[name], codes, None)) for header, name, codes in WORDS]


def _after(flat: pd.DataFrame) -> list[Column]:
    return [
        ("Out of hospital", "discharge", _dates(flat["discharge_at"])),
        ("Alive out", "alive", coded(flat["is_alive_at_discharge"], _YES_NO, None)),
        ("CPC at exit", "cpc", typed(flat["cpc_recorded"], 0)),
        ("mRS at exit", "", typed(flat["mrs_recorded"], 0)),
        ("Last heard", "", _dates(flat["contact_at"])),
        ("Status then", "", coded(flat["vital_status"], {"alive": "A", "dead": "D"}, None)),
        ("Heard by", "", coded(flat["contact_kind"], HEARD_BY, None)),
    ]


def _events(cohort: Cohort, flat: pd.DataFrame) -> Sheet:
    events = cohort.complication
    start = flat.set_index("run_no")["start_utc"].reindex(events["run_no"]).reset_index(drop=True)
    columns: list[Column] = [
        ("Ep.", "run", _episode(events["run_no"])),
        ("Event code", "event", coded(events["kind"], EVENTS)),
        ("Seen at", "onset", moments(wall(cohort, start, events["onset_h"]), _TEXT)),
        ("Over at", "", moments(wall(cohort, start, events["resolved_h"]), _TEXT)),
        ("Weight 1-5", "", coded(events["consequence"], CONSEQUENCES)),
    ]
    return build_sheet(FILE, "Events", columns, events["run_no"].tolist())


def _weaning(cohort: Cohort, flat: pd.DataFrame) -> Sheet:
    steps = cohort.weaning_step
    start = flat.set_index("run_no")["start_utc"].reindex(steps["run_no"]).reset_index(drop=True)
    columns: list[Column] = [
        ("Ep.", "run", _episode(steps["run_no"])),
        ("Trial at", "", moments(wall(cohort, start, steps["study_h"]), _TEXT)),
        ("Flow mL/min", "", typed(steps["flow_l_min"] * 1000.0, 0)),
        ("MAP", "", typed(steps["map_mmhg"], 0)),
        ("CVP", "", typed(steps["cvp_mmhg"], 0)),
        ("EF", "", typed(steps["lvef_percent"], 0)),
        ("VTI mm", "", typed(steps["lvot_vti_cm"] * 10.0, 0)),
        ("S prime", "", typed(steps["lateral_s_prime_cm_s"], 1)),
        ("Verdict", "", coded(steps["result"], {"passed": "ok", "failed": "no"})),
    ]
    return build_sheet(FILE, "Flow trials", columns, steps["run_no"].tolist())


def _circuits(cohort: Cohort, flat: pd.DataFrame) -> Sheet:
    parts = cohort.configuration
    start = flat.set_index("run_no")["start_utc"].reindex(parts["run_no"]).reset_index(drop=True)
    columns: list[Column] = [
        ("Ep.", "run", _episode(parts["run_no"])),
        ("Layout", "", coded(parts["config"], {"va": "V-A", "vav": "V-AV"})),
        ("From", "", moments(wall(cohort, start, parts["from_h"]), _TEXT)),
        ("Until", "", moments(wall(cohort, start, parts["to_h"]), _TEXT)),
    ]
    return build_sheet(FILE, "Circuits", columns, parts["run_no"].tolist())


def _attempts(cohort: Cohort) -> Sheet:
    tries = cohort.attempt
    columns: list[Column] = [
        ("Chart", "", [f"C{r}" for r in tries["record_number"]]),
        ("Tried at", "", moments(tries["at_local"], _TEXT)),
        (
            "Why no flow",
            "",
            coded(
                tries["reason"],
                {
                    "no_access": "access",
                    "no_flow": "no flow",
                    "died_before_flow": "died",
                    "injury": "vessel",
                    "other": "misc",
                },
            ),
        ),
    ]
    return build_sheet(FILE, "Never on flow", columns, [0] * len(tries))


def _codes() -> Sheet:
    """Three lists one under the other in one sheet; the mapping says which rows belong to which."""
    pairs: list[tuple[Cell, Cell]] = []
    for codes, words in ((CAUSES, CAUSE_WORDS), (ENDS, ENDING_WORDS), (EVENTS, EVENT_WORDS)):
        pairs += [(number, words[str(key)]) for key, number in codes.items() if number is not None]
    return build_sheet(
        FILE,
        "Legend",
        [("No.", "", [a for a, _ in pairs]), ("Stands for", "", [b for _, b in pairs])],
        [0] * len(pairs),
    )

"""Reference cases: another program's numbers, our public functions, and what joins the two.

`data/cases.json` holds every case (inputs, expected numbers, the R call that made them). `data/*.csv` holds
the data that may be shared: invented data under CC0, a published table of facts. Three more sets come from
lifelines' loaders. The rest belongs to R packages and is read only from the folder named by the environment
variable OUTCOMES_REFERENCE_DATA (with a `data` folder inside); without it those cases are skipped by name.

To join in, write a module `answers_<subject>.py` beside this file with

    ANSWERS   case id or method of the case → function of a Case giving {field: value or list}
    EXPECTED  (optional) case id or method → function of a Case giving the expected fields in our convention,
              for instance limits cut to [0, 1]; None in it stands for "missing", ANY for "not compared"
    NOT_OURS  (optional) case id or method → {field: why no public function prints it}
    LEFT_OUT  (optional) case id → why no public function answers the case at all

A field of the case that is neither answered nor named in NOT_OURS fails the test.
"""

from __future__ import annotations

import importlib
import json
import math
import os
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
from lifelines.datasets import load_lung, load_psychiatric_patients, load_stanford_heart_transplants

HERE = Path(__file__).resolve().parent
DATA = HERE / "data"
OUTSIDE = Path(
    os.environ.get("OUTCOMES_REFERENCE_DATA", HERE.parents[1].parent / "shared/evidence/reference")
)
TIGHT = 1e-8
ANY = object()


@dataclass(frozen=True)
class Case:
    id: str
    method: str
    dataset: Any
    inputs: Mapping[str, Any]
    expected: Mapping[str, Any]
    tol: Mapping[str, float]
    source: str

    def data(self, name: str = "") -> pd.DataFrame:
        """The data set (of several: the named one), with the filter of the case applied."""
        frame = dataset(name or self.dataset)
        return frame.query(self.inputs["filter"]).reset_index(drop=True) if "filter" in self.inputs else frame

    def column(self, key: str, frame: pd.DataFrame) -> np.ndarray:
        """The column or expression that the case names under `key`."""
        return np.asarray(frame.eval(self.inputs[key]))

    @property
    def level(self) -> float:
        return float(self.inputs.get("level", 0.95))


@cache
def cases() -> tuple[Case, ...]:
    content = json.loads((DATA / "cases.json").read_text(encoding="utf-8"))
    return tuple(
        Case(c["id"], c["method"], c["dataset"], c["inputs"], c["expected"], c["tol"], c.get("r_call", ""))
        for c in content["cases"]
    )


def _lung() -> pd.DataFrame:
    frame = load_lung().rename(columns={"status": "event", "ph.ecog": "ph_ecog"})
    return frame.assign(id=np.arange(1, len(frame) + 1))[
        ["id", "time", "event", "age", "sex", "ph_ecog", "inst"]
    ]


def _psychiatric() -> pd.DataFrame:
    frame = load_psychiatric_patients()
    frame = frame.assign(id=np.arange(1, len(frame) + 1), exit=frame["Age"] + frame["T"])
    return frame.rename(columns={"Age": "entry", "C": "event"})[["id", "entry", "exit", "event", "sex"]]


LOADERS: Mapping[str, Callable[[], pd.DataFrame]] = {
    "lung": _lung,
    "heart": load_stanford_heart_transplants,
    "km_psych": _psychiatric,
}


@cache
def dataset(name: str) -> pd.DataFrame:
    if (DATA / f"{name}.csv").exists():
        return pd.read_csv(DATA / f"{name}.csv")
    if name in LOADERS:
        return LOADERS[name]()
    return pd.read_csv(outside(name))


def outside(name: str) -> Path:
    return OUTSIDE / "data" / f"{name}.csv"


def missing_data(case: Case) -> list[str]:
    """Names of data sets of the case that are neither here nor in the outside folder."""
    names = case.dataset if isinstance(case.dataset, list) else [case.dataset]
    return [
        n for n in names
        if n != "inline" and n not in LOADERS and not (DATA / f"{n}.csv").exists() and not outside(n).exists()
    ]  # fmt: skip


@cache
def joined() -> Mapping[str, dict[str, Any]]:
    """ANSWERS, EXPECTED, NOT_OURS and LEFT_OUT of every answers module, merged; a key may occur once."""
    merged: dict[str, dict[str, Any]] = {"ANSWERS": {}, "EXPECTED": {}, "NOT_OURS": {}, "LEFT_OUT": {}}
    for path in sorted(HERE.glob("answers_*.py")):
        module = importlib.import_module(path.stem)
        for part, found in merged.items():
            for key, value in getattr(module, part, {}).items():
                if key in found:
                    raise ValueError(f"{key} of {part} occurs twice")
                found[key] = value
    return merged


def of(part: str, case: Case) -> Any:
    """The entry of a case in one part: by its id, else by its method, else None."""
    found = joined()[part]
    return found.get(case.id, found.get(case.method))


def differences(case: Case, answer: Mapping[str, Any]) -> list[str]:
    """What does not fit, in words; empty if all is well."""
    adjust = of("EXPECTED", case)
    expected = dict(case.expected) | (dict(adjust(case)) if adjust else {})
    not_ours = of("NOT_OURS", case) or {}
    out = [f"{name}: not answered" for name in expected if name not in answer and name not in not_ours]
    out += [f"{name}: answered though the case has no such field" for name in answer if name not in expected]
    out += [f"{name}: answered though NOT_OURS names it" for name in answer if name in not_ours]
    for name in expected.keys() & answer.keys():
        out += _compare(name, answer[name], expected[name], case.tol)
    return sorted(out)


def _compare(name: str, ours: Any, theirs: Any, tol: Mapping[str, float]) -> list[str]:
    if theirs is ANY:
        return []
    if isinstance(theirs, str | bool) and theirs != "Inf":
        return [] if ours == theirs else [f"{name}: {ours!r} is not {theirs!r}"]
    if isinstance(theirs, list):
        got = list(ours)
        if len(got) != len(theirs):
            return [f"{name}: {len(got)} values instead of {len(theirs)}"]
        return [
            w
            for i, (a, b) in enumerate(zip(got, theirs, strict=True))
            for w in _compare(f"{name}[{i}]", a, b, tol)
        ]
    if isinstance(theirs, dict):
        return [w for key in theirs for w in _compare(f"{name}.{key}", ours.get(key), theirs[key], tol)]
    return [] if _close(ours, theirs, tol) else [f"{name}: {ours!r} is not {theirs!r}"]


def _close(ours: Any, theirs: Any, tol: Mapping[str, float]) -> bool:
    """Within 1e-8, absolute or relative, or within the case's own tolerance where that is wider than 1e-6."""
    absent = ours is None or ours is pd.NA or ours != ours
    if theirs is None or absent:
        return theirs is None and bool(absent)
    if theirs == "Inf":
        return math.isinf(ours)
    relative = tol["rel"] if tol["rel"] > 1e-6 else TIGHT
    absolute = tol["abs"] if tol["abs"] > 1e-8 else TIGHT
    gap = abs(float(ours) - float(theirs))
    return gap <= absolute or gap <= relative * abs(float(theirs))

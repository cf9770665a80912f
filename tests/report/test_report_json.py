"""results.json holds everything: the page made from it alone has the same bytes."""

import hashlib
import json
import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pandas as pd
import pytest
from made_report import made

from outcomes.analysis.result import Method, Result
from outcomes.errors import DisclosureRefused, UsageError
from outcomes.report.codec import report_from_json, report_id, results_json
from outcomes.report.render import render, render_json


def test_the_page_is_a_rendering_of_the_json_alone():
    report = made()
    text = results_json(report)
    assert render_json(text) == render(report)


def test_json_is_canonical_and_survives_a_round_trip():
    text = results_json(made())
    assert text.isascii()
    assert json.dumps(json.loads(text), sort_keys=True, separators=(",", ":")) == text
    assert results_json(report_from_json(text)) == text


def test_json_holds_estimates_intervals_counts_methods_and_cautions():
    content = json.loads(results_json(made()))["report"]
    at = content["results"]["survival"]["at"]
    assert at["table"]["columns"] == ["time", "estimate", "lower", "upper", "at_risk", "reason"]
    assert at["table"]["values"]["estimate"] == [0.78, 0.55, None]
    assert at["table"]["values"]["reason"] == [None, None, "too_few"]
    assert at["method"]["estimator"] == "Kaplan-Meier estimate of survival"
    assert at["notes"] == [{"code": "FU", "text": "Follow-up is shorter than the longest time asked for."}]
    assert content["profile"] == "internal"


def test_the_identity_is_the_hash_of_the_file_and_follows_the_numbers():
    text = results_json(made())
    assert report_id(text) == hashlib.sha256(text.encode()).hexdigest()[:12]
    assert report_id(results_json(made("Another label"))) != report_id(text)


def test_the_same_bytes_in_every_process():
    code = (
        "import hashlib\nfrom made_report import made\nfrom outcomes.report.render import render\n"
        "print(hashlib.sha256(render(made()).encode()).hexdigest())"
    )
    here = Path(__file__).parent
    seen = set()
    for seed, zone in (("0", "UTC"), ("11", "Asia/Tokyo")):
        path = f"{here}:{here.parents[1]}"
        environment = {**os.environ, "PYTHONHASHSEED": seed, "TZ": zone, "PYTHONPATH": path}
        run = subprocess.run(
            [sys.executable, "-c", code], env=environment, capture_output=True, text=True, check=True
        )
        seen.add(run.stdout)
    assert len(seen) == 1


@pytest.mark.parametrize("text", ["", "[]", "{}", '{"format": 99}', '{"format": 1, "report": {"key": "x"}}'])
def test_a_foreign_file_is_refused(text):
    with pytest.raises(UsageError, match="results file"):
        report_from_json(text)


def test_a_json_that_claims_another_profile_is_not_rendered():
    text = results_json(made()).replace('"profile":"internal"', '"profile":"shareable"')
    with pytest.raises(DisclosureRefused):
        render_json(text)


@pytest.mark.parametrize("value", [float("inf"), float("-inf")])
def test_a_number_without_end_is_refused(value):
    report = made()
    result = Result(pd.DataFrame({"estimate": [value]}), Method("x"))
    with pytest.raises(ValueError, match="not JSON compliant"):
        results_json(replace(report, results={"x": {"y": result}}))


def test_column_types_survive():
    frame = pd.DataFrame(
        {
            "group": pd.array([None, None], dtype="string"),
            "time": pd.array([1, 2], dtype="Int64"),
            "estimate": [0.5, float("nan")],
            "is_last": [True, False],
            "empty": pd.array([None, None], dtype="Float64"),
        }
    )
    report = replace(made(), results={"x": {"y": Result(frame, Method("m"))}})
    text = results_json(report)
    back = report_from_json(text).results["x"]["y"].table
    assert [str(t) for t in back.dtypes] == ["string", "Int64", "Float64", "boolean", "Float64"]
    assert results_json(report_from_json(text)) == text


def test_a_mapping_keeps_its_order():
    report = replace(made(), provenance={"b": ("1",), "a": ("2",)})
    assert list(report_from_json(results_json(report)).provenance) == ["b", "a"]
    with pytest.raises(ValueError, match="tilde"):
        results_json(replace(made(), provenance={"~": ("1",)}))

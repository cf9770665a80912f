"""Laws of the answers: bounds hold whatever was missing, information narrows, order changes nothing."""

from itertools import product

import numpy as np
import pandas as pd
import pytest
import scores_oracle as oracle
from hypothesis import given, settings
from hypothesis import strategies as st

from outcomes.scores.catalogue import chosen_options, our_catalogue
from outcomes.scores.conventions import option_sets
from outcomes.scores.engine import compute
from outcomes.scores.model import under
from outcomes.scores.units import factor

TABLES = our_catalogue()
IMPLEMENTED = [score.key for score in TABLES.scores() if score.is_implemented]
WHOLE = [key for key in IMPLEMENTED if TABLES.score(key).is_whole_numbered]


def active(key, options=None):
    score = TABLES.score(key)
    return under(score, chosen_options(score, options))


def bounds_of(score, key):
    tests = [
        t for item in score.items for row in item.rows for t in row.when if t.input == key and t.interval
    ]
    return sorted({e for t in tests for e in (t.interval.low, t.interval.high) if e is not None})


def value_strategy(score, entry):
    """Values inside the hard limits, often near a bound, with two decimals like a laboratory's."""
    field = entry.field
    if field.kind == "yes_no":
        return st.booleans()
    if field.kind == "choice":
        return st.sampled_from(field.choices)
    if field.kind != "number":
        return st.integers(int(field.low), int(field.high))
    digits = 4 if field.high <= 1.0 else 2
    step = 10.0**-digits
    low, high = int(np.ceil(field.low / step)), int(field.high / step)
    near = [round(b, digits) + d * step for b in bounds_of(score, entry.key) for d in (-1, 0, 1)]
    near = [round(v, digits) for v in near if field.low <= v <= field.high]
    anywhere = st.integers(low, high).map(lambda n: round(n * step, digits))
    return st.one_of(anywhere, st.sampled_from(near)) if near else anywhere


@st.composite
def complete_runs(draw, key, options=None):
    score = active(key, options)
    return {entry.key: draw(value_strategy(score, entry)) for entry in score.inputs}


@st.composite
def run_and_gaps(draw):
    key = draw(st.sampled_from(IMPLEMENTED))
    _, options = draw(st.sampled_from(option_sets(key)))
    run = draw(complete_runs(key, options))
    speaking = empty_cells_that_speak(active(key, options), run)
    lost = draw(st.lists(st.sampled_from(sorted(set(run) - speaking)), unique=True, max_size=6))
    return key, options, run, lost


def empty_cells_that_speak(score, run):
    """Inputs whose empty cell is itself a statement in this run: 'none given', 'not applicable'."""
    zero = {x.key for x in score.inputs if x.zero_when_true and run[x.zero_when_true]}
    absent = {
        item.inputs[0]
        for item in score.items
        for gate in item.not_applicable
        if all(run[test.input] in test.equals for test in gate.when)
    }
    return zero | absent


def ends(key, options, run):
    frame = pd.DataFrame({name: pd.Series([value], dtype=object) for name, value in run.items()})
    row = compute(key, frame, options=options).iloc[0]
    return float(row["total_low"]), float(row["total_high"]), row


@settings(max_examples=100, deadline=None)
@given(run_and_gaps())
def test_a_complete_run_agrees_with_a_plain_reading_of_the_table(case):
    key, options, run, _ = case
    low, high, row = ends(key, options, run)
    assert low == high == float(row["total"])
    assert low == pytest.approx(float(oracle.total(key, run, options)), abs=1e-9)
    assert row["missing"] == ""


@settings(max_examples=100, deadline=None)
@given(run_and_gaps())
def test_the_total_lies_inside_the_bounds_whatever_was_missing_and_information_narrows(case):
    key, options, run, lost = case
    full_low, full_high, _ = ends(key, options, run)
    gone = dict(run)
    low, high = full_low, full_high
    for name in lost:
        gone[name] = None
        new_low, new_high, row = ends(key, options, gone)
        slack = 1e-9 * max(1.0, abs(high))
        assert new_low <= low + slack and high <= new_high + slack, "less is known, so no less is possible"
        assert pd.isna(row["total"]) == (new_low != new_high)
        low, high = new_low, new_high


@settings(max_examples=60, deadline=None)
@given(
    st.integers(18, 89), st.integers(0, 3), st.integers(0, 3), st.sampled_from(["save", "pc_ecmo", "tips65"])
)
def test_an_age_interval_gives_the_hull_of_its_ages(age, before, after, key):
    score = active(key)
    run = {entry.key: sample for entry in score.inputs if (sample := plain(entry)) is not None}
    del run["age_years"]
    ages = range(age - before, age + after + 1)
    each = compute(key, pd.DataFrame([{**run, "age_years": a} for a in ages]))["total"]
    row = compute(key, pd.DataFrame([{**run, "age_low": ages[0], "age_high": ages[-1]}])).iloc[0]
    assert (row["total_low"], row["total_high"]) == (each.min(), each.max())
    assert pd.isna(row["total"]) == (each.nunique() > 1)
    if each.nunique() > 1:
        assert row["missing"] == "age_years (known only within limits)"


def plain(entry):
    """Some ordinary value of an input."""
    if entry.field.kind == "yes_no":
        return False
    if entry.field.kind == "choice":
        return entry.field.choices[0]
    return entry.field.low if entry.field.kind == "whole" else (entry.field.low + entry.field.high) / 2


def random_frame(score, n, seed):
    draw = np.random.default_rng(seed)
    data = {}
    for entry in score.inputs:
        field = entry.field
        if field.is_numeric:
            values = draw.uniform(field.low, field.high, n)
            values = np.floor(values) if field.kind != "number" else np.round(values, 3)
            data[field.name] = np.where(draw.random(n) < 0.1, np.nan, np.clip(values, field.low, field.high))
        else:
            words = [True, False, None] if field.kind == "yes_no" else [*field.choices, None]
            data[field.name] = pd.Series([words[n] for n in draw.integers(0, len(words), n)], dtype=object)
    return pd.DataFrame(data)


@pytest.mark.parametrize("key", IMPLEMENTED)
def test_order_of_rows_and_columns_subsets_and_duplicates_change_nothing(key):
    frame = random_frame(active(key), 300, 7)
    whole = compute(key, frame)
    shuffled = frame.sample(frac=1.0, random_state=3)[list(reversed(frame.columns))]
    pd.testing.assert_frame_equal(compute(key, shuffled).loc[frame.index].astype(str), whole.astype(str))
    some = frame.iloc[40:60]
    pd.testing.assert_frame_equal(compute(key, some).astype(str), whole.iloc[40:60].astype(str))
    twice = pd.concat([frame, frame], ignore_index=True)
    assert compute(key, twice)["total_low"].tolist() == 2 * whole["total_low"].tolist()


@pytest.mark.parametrize("key", IMPLEMENTED)
def test_a_change_of_unit_changes_no_answer(key):
    """Values at every bound too: received = canonical / factor, then converted back."""
    score = active(key)
    frame = random_frame(score, 200, 11)
    for entry in score.inputs:
        edges = [b for b in bounds_of(score, entry.key) if entry.field.low <= b <= entry.field.high]
        for place, bound in enumerate(edges):
            frame.loc[place, entry.field.name] = bound
    expected = compute(key, frame)
    for name, unit in (
        ("creatinine_umol_l", "mg/dL"),
        ("lactate_mmol_l", "mg/dL"),
        ("glucose_mmol_l", "mg/dL"),
        ("bilirubin_umol_l", "mg/dL"),
        ("urea_mmol_l", "mg/dL{urea_nitrogen}"),
        ("dbp_mmhg", "kPa"),
        ("weight_kg", "[lb_av]"),
        ("intubation_hours", "min"),
        ("peak_inspiratory_pressure_cmh2o", "mbar"),
        ("noradrenaline_ug_kg_min", "mg/kg/h"),
        ("vasopressin_u_kg_min", "mU/kg/min"),
    ):
        entry = next((x for x in score.inputs if x.field.name == name), None)
        if entry is None:
            continue
        times, _ = factor(entry.field, unit)
        other = frame.assign(**{name: frame[name] / times})
        found = compute(key, other, units={name: unit})
        numbers = ["total", "total_low", "total_high"]
        words = [c for c in found.columns if c not in numbers]
        pd.testing.assert_frame_equal(found[words], expected[words])
        pd.testing.assert_frame_equal(found[numbers], expected[numbers], rtol=1e-12)


@pytest.mark.parametrize("key", IMPLEMENTED)
def test_chunks_give_what_single_rows_give(key, monkeypatch):
    frame = random_frame(active(key), 50, 5)
    whole = compute(key, frame)
    monkeypatch.setattr("outcomes.scores.engine.CHUNK", 7)
    pd.testing.assert_frame_equal(compute(key, frame), whole)


@pytest.mark.parametrize("key", WHOLE)
def test_both_sides_of_every_bound(key):
    """One step of 0.01 (0.001 where the range ends below 10) either side, against the plain reading."""
    for label, options in option_sets(key):
        score = active(key, options)
        run = {x.key: plain(x) for x in score.inputs}
        runs = []
        for entry in score.inputs:
            step = 1 if entry.field.kind != "number" else (0.001 if entry.field.high < 10 else 0.01)
            for bound, shift in product(bounds_of(score, entry.key), (-step, 0, step)):
                value = bound + shift if entry.field.kind == "number" else int(bound + shift)
                value = round(value, 12) if isinstance(value, float) else value
                if entry.field.low <= value <= entry.field.high:
                    runs.append({**run, entry.key: value})
        if not runs:
            continue
        found = compute(key, pd.DataFrame(runs), options=options)["total"]
        for one, got in zip(runs, found, strict=True):
            if one_is_a_converted_bound(score, one, run):
                continue
            assert got == oracle.total(key, one, options), (label, one)


def one_is_a_converted_bound(score, one, run):
    """A bound given in mg/dL is no short decimal in the canonical unit: its own value is tested by unit."""
    changed = next((k for k in one if one[k] != run[k]), None)
    return changed is not None and any(
        abs(one[changed] - b) < 1e-9 and abs(round(b, 6) - b) > 0 for b in bounds_of(score, changed)
    )

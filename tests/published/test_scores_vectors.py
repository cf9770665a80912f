"""Every score table: its worked vectors, its range by brute force, and what its paper says about both.

Sources are in each table's citation; the vectors were computed by hand from the printed point tables.
"""

from itertools import product

import numpy as np
import pandas as pd
import pytest

from outcomes.scores.catalogue import chosen_options, our_catalogue
from outcomes.scores.checking import check_table
from outcomes.scores.engine import compute, item_table
from outcomes.scores.model import under

TABLES = our_catalogue()
IMPLEMENTED = [score.key for score in TABLES.scores() if score.is_implemented]
WHOLE = [key for key in IMPLEMENTED if TABLES.score(key).is_whole_numbered]


def representatives(score, key):
    """Values that between them fall into every band of an input."""
    source = next(x for x in score.inputs if x.key == key)
    if source.field.kind == "yes_no":
        return [True, False]
    if source.field.kind == "choice":
        return list(source.field.choices)
    low, high = source.field.low, source.field.high
    edges = [low, high]
    for item in score.items:
        for test in (t for row in item.rows for t in row.when if t.input == key and t.interval):
            edges += [e for e in (test.interval.low, test.interval.high) if e is not None]
    step = 1.0 if source.field.kind != "number" else 1e-3
    values = {min(max(edge + shift, low), high) for edge in edges for shift in (-step, 0.0, step)}
    return sorted(values)


def grid(score, keys):
    values = [representatives(score, key) for key in keys]
    return pd.DataFrame(list(product(*values)), columns=list(keys))


def active(key):
    score = TABLES.score(key)
    return under(score, chosen_options(score, None))


@pytest.mark.parametrize("key", TABLES.keys)
def test_every_table_is_consistent_and_its_vectors_agree(key):
    check = check_table(TABLES.text(key))
    assert check.lines() == [check.lines()[0]] and check.is_good, check.lines()
    if TABLES.score(key).is_implemented:
        assert check.n_vectors >= 7


def test_the_vectors_are_all_there():
    """Ids of the worked vectors: TiPS65 8, PC-ECMO 9, SAVE 21 … none may get lost in a table edit."""
    counts = {key: len(TABLES.score(key).vectors) for key in IMPLEMENTED}
    assert counts == {
        "be_alive": 7,
        "bos_ma2": 8,
        "cardshock": 9,
        "encourage": 14,
        "iabp_shock_ii": 8,
        "pc_ecmo": 9,
        "save": 21,
        "shock_stage": 17,
        "sofa": 8,
        "tips65": 8,
        "vasoactive_inotropic": 21,
    }


# Ranges as the papers print or imply them: Schmidt 2015 (from memory), Muller 2016, Okada 2020, Biancari,
# Tindale 2023, Yamga 2023, Harjola 2015 (from memory), Pöss 2017, Vincent 1996, Naidu 2022 (ranks A-E).
RANGES = {
    "save": (-35, 17),
    "encourage": (0, 45),
    "tips65": (0, 4),
    "pc_ecmo": (0, 17),
    "be_alive": (-1, 17),
    "bos_ma2": (0, 6),
    "cardshock": (0, 9),
    "iabp_shock_ii": (0, 9),
    "sofa": (0, 24),
    "shock_stage": (1, 5),
}


@pytest.mark.parametrize("key", WHOLE)
def test_range_by_brute_force_over_each_item(key):
    score = active(key)
    reachable = {score.constant}
    for item in score.items:
        frame = grid(score, item.inputs)
        points = item_table(key, frame)
        own = points.loc[points["item"] == item.key]
        assert (own["points_low"] == own["points_high"]).all(), "a full input leaves nothing open"
        reachable = {total + value for total in reachable for value in set(own["points_low"])}
    assert (min(reachable), max(reachable)) == RANGES[key]


@pytest.mark.parametrize("key", ["encourage", "pc_ecmo", "tips65", "cardshock", "iabp_shock_ii"])
def test_range_by_brute_force_over_whole_runs(key):
    score = active(key)
    keys = [k for item in score.items for k in item.inputs]
    values = []
    for item in score.items:
        frame = grid(score, item.inputs)
        points = item_table(key, frame)
        own = points.loc[points["item"] == item.key, "points_low"].to_numpy()
        first = np.unique(own, return_index=True)[1]
        values.append([frame.iloc[n, 0] for n in first])
    runs = pd.DataFrame(list(product(*values)), columns=keys)
    totals = compute(key, runs)["total"]
    assert totals.notna().all()
    assert (totals.min(), totals.max()) == RANGES[key]
    if key == "encourage":
        # Muller 2016, arithmetic on the point table: these totals cannot be put together.
        assert set(range(46)) - set(totals) == {1, 2, 3, 4, 9, 41, 43, 44}


def test_save_range_over_every_combination_of_rows():
    """Schmidt 2015: 17 and −35 need summed diagnoses and 3 points for the diastolic pressure."""
    score = active("save")
    values = {}
    for item in score.items:
        frame = grid(score, item.inputs)
        points = item_table("save", frame)
        own = points.loc[points["item"] == item.key, "points_low"].to_numpy()
        values[item.inputs[0]] = [frame.iloc[n, 0] for n in np.unique(own, return_index=True)[1]]
    small = {k: v[:1] for k, v in values.items() if k in ("is_myocarditis", "is_congenital")}
    runs = pd.DataFrame(list(product(*{**values, **small}.values())), columns=list(values))
    totals = compute("save", runs)["total"]
    assert len(runs) > 50_000 and totals.notna().all()
    # Without myocarditis (+3) and congenital disease (−3), whose first value (no / yes) is fixed here:
    fixed = item_table("save", runs.iloc[:1]).set_index("item")["points_low"]
    shift = fixed["myocarditis"] + fixed["congenital"]
    assert (totals.min(), totals.max()) == (-35 + 3 + shift, 17 - 3 + shift)


@pytest.mark.parametrize("key", IMPLEMENTED)
def test_monotone_only_where_claimed(key):
    """SAVE weight is not monotone (as printed) and claims nothing; every claim holds everywhere."""
    score = active(key)
    for item in score.items:
        if item.kind == "per_unit" or not item.claims_monotone:
            continue
        frame = grid(score, item.inputs)
        points = item_table(key, frame)
        own = points.loc[points["item"] == item.key, "points_low"].to_numpy()
        steps = np.diff(own[np.argsort(frame.iloc[:, 0].to_numpy(dtype=float), kind="stable")])
        assert (steps >= 0).all() or (steps <= 0).all(), item.key
    if key == "save":
        assert not next(item for item in score.items if item.key == "weight").claims_monotone

"""The scikit-learn faces: the library's own contract, and what a score adds to it."""

import pickle

import numpy as np
import pandas as pd
import pytest
from sklearn.base import clone
from sklearn.compose import ColumnTransformer
from sklearn.linear_model import LogisticRegression
from sklearn.metrics import roc_auc_score
from sklearn.model_selection import cross_val_predict
from sklearn.pipeline import make_pipeline
from sklearn.preprocessing import StandardScaler
from sklearn.utils import check_array
from sklearn.utils.estimator_checks import check_estimator

from outcomes.errors import InputRefused, UsageError
from outcomes.scores.engine import compute
from outcomes.scores.gate import DeclaredCheck
from outcomes.scores.learn import ScoreRisk, ScoreTotal

FACTS = {
    "is_extracorporeal_cpr": True,
    "arrest_location": "out_of_hospital",
    "had_first_rhythm_shockable": True,
    "nth_run": 1,
}
FIELDS = ["age_years", "call_to_arrival_min", "ph", "rhythm_shockable_at_arrival"]


def frame_of(X):
    """Any array of numbers as runs, so that the library's checks can drive a score."""
    if isinstance(X, pd.DataFrame) and "age_years" in X:
        return X
    values = check_array(X, dtype=np.float64)
    wide = np.column_stack([values] + [values[:, 0]] * max(0, 4 - values.shape[1]))
    share = 1.0 / (1.0 + np.exp(-np.clip(wide, -30, 30)))
    runs = pd.DataFrame(
        {
            FIELDS[0]: 18.0 + 70.0 * share[:, 0],
            FIELDS[1]: 60.0 * share[:, 1],
            FIELDS[2]: 6.5 + share[:, 2],
            FIELDS[3]: share[:, 3] > 0.5,
        }
    )
    return runs.assign(**{f"other_{n}": wide[:, n] for n in range(4, wide.shape[1])})


class _AsArray:
    def _frame(self, X):
        return frame_of(X)

    def __sklearn_tags__(self):
        tags = super().__sklearn_tags__()
        tags.input_tags.two_d_array = True
        tags.input_tags.allow_nan = tags.input_tags.string = tags.input_tags.categorical = False
        return tags


class ArrayTotal(_AsArray, ScoreTotal):
    """The transformer behind an adapter from arrays to runs."""


class ArrayRisk(_AsArray, ScoreRisk):
    """The classifier behind the same adapter."""


BY_NAME = "columns are found by name, so a frame with more or fewer other columns is no error"
TWO_LABELS = "with one label nobody can say which label is the event: refused by a coded error of our own"
EXPECTED_TOTAL = {
    "check_n_features_in_after_fitting": BY_NAME,
    "check_transformer_general": BY_NAME,
    "check_n_features_in": "the adapter makes four columns out of fewer",
}
EXPECTED_RISK = {
    "check_n_features_in_after_fitting": BY_NAME,
    "check_classifiers_train": BY_NAME,
    "check_n_features_in": "the adapter makes four columns out of fewer",
    "check_classifiers_one_label": TWO_LABELS,
    "check_fit2d_1sample": TWO_LABELS,
    "check_classifier_not_supporting_multiclass": "three labels are refused by a coded error of our own",
}
# Needs an environment variable of another library to run at all.
SKIPPED = {"check_array_api_input"}


@pytest.mark.filterwarnings("ignore")
@pytest.mark.parametrize(
    ("estimator", "expected"),
    [
        (ArrayTotal("tips65"), EXPECTED_TOTAL),
        (ArrayRisk("tips65", event="favourable_neurology", declared=FACTS), EXPECTED_RISK),
    ],
)
def test_the_librarys_contract_with_every_expected_failure_named(estimator, expected):
    found = check_estimator(estimator, on_fail=None, on_skip=None)
    failed = {check["check_name"] for check in found if check["status"] == "failed"}
    assert failed == set(expected), "a new failure, or one that is gone and must leave the list"
    assert {c["check_name"] for c in found if c["status"] == "skipped"} <= SKIPPED
    assert sum(check["status"] == "passed" for check in found) > 40


@pytest.mark.filterwarnings("ignore::sklearn.exceptions.SkipTestWarning")
@pytest.mark.parametrize("estimator", [ScoreTotal("tips65"), ScoreRisk("tips65")])
def test_the_faces_themselves_say_that_they_take_no_plain_array(estimator):
    assert {c["status"] for c in check_estimator(estimator, on_skip=None)} == {"passed"}
    with pytest.raises(UsageError, match=r"SCORE\.FRAME"):
        estimator.fit(np.zeros((3, 4)), [0, 1, 0])


def generated(n=400, seed=4):
    """Runs whose outcome follows the score along a shifted line: recalibration has something to do."""
    draw = np.random.default_rng(seed)
    runs = pd.DataFrame(
        {
            "age_years": draw.integers(18, 90, n),
            "call_to_arrival_min": draw.integers(5, 60, n).astype(float),
            "ph": draw.uniform(6.6, 7.4, n).round(2),
            "rhythm_shockable_at_arrival": draw.random(n) < 0.5,
            "hospital": draw.choice(["north", "south"], n),
        }
    )
    totals = compute("tips65", runs)["total"].to_numpy(dtype=float)
    return runs, (draw.random(n) < 1 / (1 + np.exp(3.5 - 1.4 * totals))).astype(int)


def test_clone_parameters_pickle_and_names():
    runs, _ = generated(30)
    part = ScoreTotal("tips65", outputs=("total", "total_low"), declared={"nth_run": 1})
    twin = clone(part)
    assert twin.get_params() == part.get_params() and twin is not part
    assert clone(part.set_params(outputs=("total",))).outputs == ("total",)
    fitted = part.fit(runs)
    assert list(fitted.get_feature_names_out()) == ["tips65_total"]
    assert list(fitted.feature_names_in_) == list(runs.columns) and fitted.n_features_in_ == 5
    again = pickle.loads(pickle.dumps(fitted))
    np.testing.assert_array_equal(again.transform(runs), fitted.transform(runs))


def test_set_output_keeps_index_and_names():
    runs, _ = generated(10)
    runs.index = [f"run{n}" for n in range(10)]
    out = (
        ScoreTotal("tips65", outputs=("total", "total_high"))
        .set_output(transform="pandas")
        .fit_transform(runs)
    )
    assert list(out.columns) == ["tips65_total", "tips65_total_high"] and list(out.index) == list(runs.index)
    assert out["tips65_total"].tolist() == compute("tips65", runs)["total"].tolist()


def test_reordered_extra_and_missing_columns():
    runs, _ = generated(20)
    part = ScoreTotal("tips65").fit(runs)
    expected = part.transform(runs)
    np.testing.assert_array_equal(part.transform(runs[list(reversed(runs.columns))]), expected)
    np.testing.assert_array_equal(part.transform(runs.assign(more=1)), expected)
    np.testing.assert_array_equal(part.transform(runs.drop(columns="hospital")), expected)
    with pytest.raises(UsageError, match="ph"):
        part.transform(runs.drop(columns="ph"))


def test_an_unsettled_total_is_nan_never_zero():
    runs, _ = generated(5)
    runs.loc[2, "ph"] = np.nan
    out = ScoreTotal("tips65", outputs=("total", "total_low", "total_high")).fit_transform(runs)
    assert np.isnan(out[2, 0]) and out[2, 2] - out[2, 1] == 1 and not np.isnan(out[[0, 1, 3, 4]]).any()


def test_subset_and_order_invariance():
    runs, y = generated(60)
    risk = ScoreRisk("tips65", event="favourable_neurology", declared=FACTS).fit(runs, y)
    whole = risk.predict_proba(runs)
    order = np.random.default_rng(1).permutation(60)
    np.testing.assert_array_equal(risk.predict_proba(runs.iloc[order]), whole[order])
    np.testing.assert_array_equal(np.vstack([risk.predict_proba(runs.iloc[[n]]) for n in range(60)]), whole)


def test_score_and_logistic_recalibration_by_cross_val_predict():
    """Score, then logistic recalibration: out-of-fold risks rank like the score and fit the rate."""
    runs, y = generated()
    pipe = make_pipeline(ScoreTotal("tips65"), LogisticRegression())
    risk = cross_val_predict(pipe, runs, y, cv=5, method="predict_proba")[:, 1]
    printed = ScoreRisk("tips65", event="favourable_neurology", declared=FACTS).fit(runs, y)
    raw = printed.predict_proba(runs)[:, 1]
    assert roc_auc_score(y, risk) == pytest.approx(roc_auc_score(y, raw), abs=0.03)
    assert risk.mean() == pytest.approx(y.mean(), abs=0.02)
    assert np.mean((risk - y) ** 2) < np.mean((raw - y) ** 2), (
        "recalibration helps where the line was shifted"
    )
    assert printed.score(runs, y) == pytest.approx(np.mean((raw >= 0.5) == y))


def test_column_transformer_beside_another_step():
    runs, y = generated()
    both = ColumnTransformer(
        [("score", ScoreTotal("tips65"), FIELDS), ("age", StandardScaler(), ["age_years"])],
        verbose_feature_names_out=False,
    )
    pipe = make_pipeline(both, LogisticRegression())
    risk = cross_val_predict(pipe, runs, y, cv=3, method="predict_proba")
    assert risk.shape == (len(runs), 2) and np.isfinite(risk).all()
    assert list(both.fit(runs).get_feature_names_out()) == ["tips65_total", "age_years"]


PC_RUNS = pd.DataFrame(
    {
        "age_years": [50, 72],
        "sex": ["male", "female"],
        "prior_cardiac_surgery": [False, True],
        "lactate_mmol_l": [3.0, 9.0],
        "aortic_arch_surgery": [False, False],
        "preoperative_stroke_or_unconscious": [False, False],
        "is_post_cardiotomy": [True, True],
        "nth_run": [1, 1],
    }
)


def test_survival_is_the_complement_of_death_and_other_events_are_refused():
    dead = ScoreRisk("pc_ecmo", event="death").fit(PC_RUNS, [0, 1])
    alive = ScoreRisk("pc_ecmo", event="survival").fit(PC_RUNS, [True, False])
    np.testing.assert_allclose(dead.predict_proba(PC_RUNS)[:, 1], [0.456, 0.897])
    np.testing.assert_allclose(alive.predict_proba(PC_RUNS)[:, 1], [0.544, 0.103])
    assert list(dead.predict(PC_RUNS)) == [0, 1] and list(alive.predict(PC_RUNS)) == [True, False]
    with pytest.raises(UsageError, match=r"SCORE\.OUTCOME"):
        ScoreRisk("pc_ecmo", event="favourable_neurology").fit(PC_RUNS, [0, 1])
    with pytest.raises(UsageError, match=r"SCORE\.OUTCOME"):
        ScoreRisk("tips65", event="survival").fit(generated(4)[0], [0, 1, 0, 1])


def test_runs_without_a_prediction_are_refused_or_nan_never_a_number():
    runs = PC_RUNS.assign(is_post_cardiotomy=[True, False])
    with pytest.raises(InputRefused, match="1 of 2"):
        ScoreRisk("pc_ecmo").fit(runs, [0, 1]).predict_proba(runs)
    lenient = ScoreRisk("pc_ecmo", when_none="nan").fit(runs, [0, 1])
    assert np.isnan(lenient.predict_proba(runs)[1]).all()
    with pytest.raises(InputRefused):
        lenient.predict(runs)


def test_the_gate_holds_for_the_classifier():
    frame = pd.DataFrame({"age_years": [50, 60], "nth_run": [1, 1]})
    with pytest.raises(UsageError, match=r"SCORE\.NOT-USABLE"):
        ScoreRisk("save", event="survival").fit(frame, [0, 1])
    checked = ScoreRisk(
        "save", event="survival", declared_checks=[DeclaredCheck("save", "2024-05-01", "intensivist")]
    )
    assert checked.fit(frame, [0, 1]).classes_.tolist() == [0, 1]
    with pytest.raises(UsageError, match=r"SCORE\.NOT-USABLE"):
        ScoreRisk("sofa").fit(pd.DataFrame({"gcs_total": [3, 4]}), [0, 1])

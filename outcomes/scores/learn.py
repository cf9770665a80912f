"""Scores as scikit-learn parts: a transformer that gives totals, a classifier that gives printed risks.

Both take a data frame whose columns are named as the score's inputs (or mapped with `columns`); order of rows
and columns does not matter, other columns are ignored. Nothing is learnt from the data: `fit` only looks at
the names, so a fold of a cross-validation cannot leak.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd
from sklearn.base import BaseEstimator, ClassifierMixin, TransformerMixin
from sklearn.utils import assert_all_finite, check_consistent_length, column_or_1d
from sklearn.utils.multiclass import check_classification_targets
from sklearn.utils.validation import check_is_fitted

from outcomes.errors import InputRefused, UsageError
from outcomes.scores.catalogue import Catalogue, chosen_options, implemented_score
from outcomes.scores.columns import Source, read_columns
from outcomes.scores.engine import compute
from outcomes.scores.gate import DeclaredCheck, usable_for_expectation
from outcomes.scores.model import Score, under

OUTPUTS = ("total", "total_low", "total_high", "predicted")
COMPLEMENT = {"death": "survival", "survival": "death"}


class _ScorePart(BaseEstimator):  # type: ignore[misc]
    """What both faces share: the parameters that `compute` takes, and the look at the columns."""

    key: str
    columns: Mapping[str, str] | None
    units: Mapping[str, str] | None
    options: Mapping[str, str] | None
    declared: Mapping[str, Any] | None
    tables: Catalogue | None

    def _frame(self, X: Any) -> pd.DataFrame:
        if not isinstance(X, pd.DataFrame):
            raise UsageError(
                "SCORE.FRAME",
                "a score needs a data frame with named columns",
                todo="in a pipeline call set_output(transform='pandas') on the steps before it",
            )
        return X

    def _learn_names(self, X: Any) -> Score:
        frame = self._frame(X)
        whole = implemented_score(self.key, self.tables)
        active = under(whole, chosen_options(whole, dict(self.options or {})))
        source = Source(frame, self.columns, self.units, self.declared)
        read_columns(active, source)
        places = [source.place(entry)[0] for entry in active.inputs]
        self.used_columns_ = [name for name in places if name is not None]
        self.n_features_in_ = frame.shape[1]
        if all(isinstance(name, str) for name in frame.columns):
            self.feature_names_in_ = np.asarray(frame.columns, dtype=object)
        return whole

    def _compute(self, X: Any) -> pd.DataFrame:
        check_is_fitted(self)
        frame = self._frame(X)
        lacking = [name for name in self.used_columns_ if name not in frame.columns]
        if lacking:
            raise UsageError("SCORE.COLUMN", f"columns seen when fitting are missing: {', '.join(lacking)}")
        return compute(
            self.key,
            frame,
            columns=self.columns,
            units=self.units,
            options=self.options,
            declared=self.declared,
            tables=self.tables,
        )

    def __sklearn_tags__(self) -> Any:
        tags = super().__sklearn_tags__()
        tags.input_tags.two_d_array = False
        tags.input_tags.categorical = True
        tags.input_tags.string = True
        tags.input_tags.allow_nan = True
        return tags


class ScoreTotal(TransformerMixin, _ScorePart):  # type: ignore[misc]
    """Transformer: frame of runs → one column an output ('total', 'total_low', 'total_high', 'predicted').

    An unsettled total is NaN, never zero. key: the score; the other parameters as in `engine.compute`.

    >>> runs = pd.DataFrame({"age_years": [64], "call_to_arrival_min": [25.0], "ph": [7.1],
    ...                      "rhythm_shockable_at_arrival": [True]})
    >>> float(ScoreTotal("tips65").fit_transform(runs)[0, 0])
    4.0
    """

    def __init__(
        self,
        key: str = "save",
        *,
        outputs: Sequence[str] = ("total",),
        columns: Mapping[str, str] | None = None,
        units: Mapping[str, str] | None = None,
        options: Mapping[str, str] | None = None,
        declared: Mapping[str, Any] | None = None,
        tables: Catalogue | None = None,
    ) -> None:
        self.key = key
        self.outputs = outputs
        self.columns = columns
        self.units = units
        self.options = options
        self.declared = declared
        self.tables = tables

    def fit(self, X: Any, y: Any = None) -> ScoreTotal:
        """Look at the columns; UsageError or InputRefused as in `compute`."""
        unknown = [name for name in self.outputs if name not in OUTPUTS]
        if unknown or not self.outputs:
            raise UsageError("SCORE.OPTION", f"outputs must be among {', '.join(OUTPUTS)}")
        self._learn_names(X)
        return self

    def transform(self, X: Any) -> npt.NDArray[np.float64]:
        """Array (runs × outputs), NaN where a total is not settled or a prediction does not exist."""
        answer = self._compute(X)
        parts = [answer[name].to_numpy(dtype=np.float64, na_value=np.nan) for name in self.outputs]
        return np.column_stack(parts)

    def get_feature_names_out(self, input_features: Any = None) -> npt.NDArray[np.object_]:
        """`<score>_<output>` for each output."""
        check_is_fitted(self)
        return np.asarray([f"{self.key}_{name}" for name in self.outputs], dtype=object)


class ScoreRisk(ClassifierMixin, _ScorePart):  # type: ignore[misc]
    """Classifier: the printed probability of the run's class; nothing is fitted.

    key: the score. event: 'death', 'survival' or 'favourable_neurology'; the second label of y means that it
    happened.
    A table with second-hand or remembered lines needs a `DeclaredCheck` in `declared_checks`.
    when_none: 'refuse' raises if a run has no prediction (not eligible, not complete), 'nan' gives NaN.
    """

    def __init__(
        self,
        key: str = "save",
        *,
        event: str = "death",
        declared_checks: Sequence[DeclaredCheck] = (),
        when_none: str = "refuse",
        columns: Mapping[str, str] | None = None,
        units: Mapping[str, str] | None = None,
        options: Mapping[str, str] | None = None,
        declared: Mapping[str, Any] | None = None,
        tables: Catalogue | None = None,
    ) -> None:
        self.key = key
        self.event = event
        self.declared_checks = declared_checks
        self.when_none = when_none
        self.columns = columns
        self.units = units
        self.options = options
        self.declared = declared
        self.tables = tables

    def fit(self, X: Any, y: Any) -> ScoreRisk:
        """Check the gate, the event and the columns; take the two labels from y."""
        if self.when_none not in ("refuse", "nan"):
            raise UsageError("SCORE.OPTION", "when_none is 'refuse' or 'nan'")
        whole = self._learn_names(X)
        usable = usable_for_expectation(
            whole, self.declared_checks, options=dict(self.options or {}), tables=self.tables
        )
        if not usable.is_usable:
            raise UsageError(
                "SCORE.NOT-USABLE",
                f"{whole.name} may not predict: {usable.reason}",
                todo="declare the check against the paper (date, role) if it was made",
            )
        if self.event not in (whole.event, COMPLEMENT.get(whole.event)):
            raise UsageError("SCORE.OUTCOME", f"{whole.name} predicts {whole.outcome}, not {self.event}")
        labels = column_or_1d(y, warn=True)
        check_consistent_length(X, labels)
        check_classification_targets(labels)
        assert_all_finite(labels)
        self.classes_ = np.unique(labels)
        if len(self.classes_) != 2:
            raise InputRefused("score_labels", "y must hold exactly two labels")
        self.is_complement_ = self.event != whole.event
        return self

    def __sklearn_tags__(self) -> Any:
        tags = super().__sklearn_tags__()
        tags.classifier_tags.multi_class = False
        tags.classifier_tags.poor_score = True  # it does not learn, so it cannot fit any data one likes
        return tags

    def predict_proba(self, X: Any) -> npt.NDArray[np.float64]:
        """Array (runs × 2), columns in the order of `classes_`."""
        answer = self._compute(X)
        printed = answer["predicted"].to_numpy(dtype=np.float64, na_value=np.nan)
        lacking = int(np.isnan(printed).sum())
        if lacking and self.when_none == "refuse":
            raise InputRefused(
                "score_no_prediction", f"{lacking} of {len(printed)} runs are not eligible or not complete"
            )
        chance = 1.0 - printed if self.is_complement_ else printed
        return np.column_stack([1.0 - chance, chance])

    def predict(self, X: Any) -> npt.NDArray[Any]:
        """The label that is at least as likely as not; refused if a run has no prediction."""
        chance = self.predict_proba(X)[:, 1]
        if np.isnan(chance).any():
            raise InputRefused("score_no_prediction", "a run without a prediction has no predicted label")
        labels: npt.NDArray[Any] = self.classes_[(chance >= 0.5).astype(int)]
        return labels

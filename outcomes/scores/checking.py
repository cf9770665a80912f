"""Checking a table: the form, every rule of consistency, and the worked vectors run through the engine."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd

from outcomes.errors import OutcomesError
from outcomes.scores.engine import compute, item_table
from outcomes.scores.model import Score, Vector
from outcomes.scores.reading import Problem, Problems
from outcomes.scores.table import read_score


@dataclass(frozen=True)
class TableCheck:
    """What a check found. `score` is None if the text could not be read at all."""

    score: Score | None
    problems: tuple[Problem, ...]
    n_vectors: int

    @property
    def is_good(self) -> bool:
        """No fault at all."""
        return not self.problems

    def lines(self) -> list[str]:
        """For a terminal: one line a fault, or one line that says what was checked."""
        if self.problems or self.score is None:
            return [problem.text() for problem in self.problems]
        what = (
            f"{self.n_vectors} worked vectors agree"
            if self.score.is_implemented
            else "reserved, no point table"
        )
        return [f"{self.score.key}: no fault found; {what}"]


def check_table(text: str) -> TableCheck:
    """Check the TOML text of one score table and run its vectors. Never raises for a fault of the table.

    >>> check_table("form = 1").is_good
    False
    """
    problems = Problems()
    score = read_score(text, problems)
    n_run = 0
    if score is not None and score.is_implemented and not problems.found:
        n_run = len(score.vectors)
        for vector in score.vectors:
            _run_vector(score, vector, problems)
    return TableCheck(score, tuple(problems.found), n_run)


def vector_frame(vector: Vector) -> pd.DataFrame:
    """The inputs of a worked vector as a frame of one run."""
    return pd.DataFrame([dict(vector.inputs)], index=[vector.key])


def _run_vector(score: Score, vector: Vector, problems: Problems) -> None:
    where = f"vector {vector.key}"
    frame = vector_frame(vector)
    try:
        answer = compute(score, frame, options=vector.options, units=vector.units).iloc[0]
        points = item_table(score, frame, options=vector.options, units=vector.units)
    except OutcomesError as error:
        problems.add("VECTOR", f"cannot be computed: {error.what}", where)
        return
    if pd.isna(answer["total"]):
        problems.add("VECTOR", f"no total: {answer['missing']} {answer['not_applicable']}".rstrip(), where)
    elif not np.isclose(float(answer["total"]), vector.total, rtol=0.0, atol=1e-9):
        problems.add("VECTOR", f"total {answer['total']}, the vector says {vector.total:g}", where)
    _compare_points(points, vector, where, problems)
    if vector.class_key is not None and answer["class"] != vector.class_key:
        problems.add("VECTOR", f"class {answer['class']}, the vector says {vector.class_key}", where)
    if vector.probability is not None:
        printed = {c.key: c.probability for c in score.classes}.get(str(answer["class"]))
        if printed is None or abs(printed - vector.probability) > 1e-9:
            problems.add("VECTOR", f"probability {printed}, the vector says {vector.probability:g}", where)


def _compare_points(points: pd.DataFrame, vector: Vector, where: str, problems: Problems) -> None:
    by_item = points.set_index("item")["points_low"].to_dict()
    by_group = points.groupby("group")["points_low"].sum().to_dict()
    for name, expected in vector.points.items():
        found = by_group.get(name, by_item.get(name))
        if found is None or abs(found - expected) > 1e-9:
            problems.add("VECTOR", f"{name} gives {found}, the vector says {expected:g}", where)

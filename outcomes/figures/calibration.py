"""Observed against predicted: a dot and interval a group of runs, the line of equality, a rug."""

from __future__ import annotations

import pandas as pd
from matplotlib.axes import Axes

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing
from outcomes.figures.palette import BLACK, EDGE, SOFT

SIDE, LEFT, BELOW, ABOVE = 250.0, 60.0, 44.0, 26.0


def calibration(drawing: Drawing) -> str:
    """results: `points` (predicted, estimate, lower, upper), shares from 0 to 1, and, if given, `rug`
    (predicted): one row a run. words: `value` (observed), `time` (predicted), `equal` (the line of equality).
    """
    with canvas.sheet(SIDE + BELOW + ABOVE) as paper:
        ax = canvas.axes(paper, LEFT, BELOW, SIDE, SIDE)
        canvas.percent_axis(ax)
        canvas.percent_across(ax, drawing.word("time"))
        ax.plot([0, 1], [0, 1], color=EDGE, linewidth=0.8, dashes=(4, 3))
        canvas.write(paper, LEFT - 30, SIDE + BELOW + 12, drawing.word("value"), fontsize=canvas.SMALL)
        ax.annotate(
            drawing.word("equal", "observed as predicted"), (1, 1), (1.02, 0.985), va="center",
            fontsize=canvas.SMALL, color=SOFT, annotation_clip=False,
        )  # fmt: skip
        _points(ax, drawing.frame("points"))
        if "rug" in drawing.results:
            _rug(ax, drawing.frame("rug"))
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _points(ax: Axes, frame: pd.DataFrame) -> None:
    for row in frame.dropna(subset=["predicted", "estimate"]).itertuples():
        x = float(row.predicted)
        if not pd.isna(row.lower) and not pd.isna(row.upper):
            ax.plot([x, x], [float(row.lower), float(row.upper)], color=BLACK, linewidth=1.0)
        ax.plot([x], [float(row.estimate)], marker="o", ms=4.5, color=BLACK, linestyle="", clip_on=False)


def _rug(ax: Axes, frame: pd.DataFrame) -> None:
    """A short stroke a prediction, in order, just above the axis."""
    for x in sorted(frame["predicted"].dropna().astype(float)):
        ax.plot([x, x], [0, 0.025], color=SOFT, linewidth=0.5)

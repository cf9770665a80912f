"""Survival curves with bands, and under them how many are at risk, censored so far and dead so far.

The table under the curve follows Morris and others, BMJ Open 2019;9:e030215: its three rows add up to all
participants at every time.
"""

from __future__ import annotations

import pandas as pd
import seaborn as sns
from matplotlib.axes import Axes
from matplotlib.figure import Figure as Sheet

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing, series
from outcomes.figures.palette import STROKES, UNRELIABLE, Stroke
from outcomes.figures.reach import parts
from outcomes.tables.format import count

LEFT, RIGHT, HEIGHT = 92.0, 92.0, 210.0
MOST_LINES = 4
MARKS_UP_TO = 60  # with more runs, marks for censored ones would hide the line


def survival(drawing: Drawing) -> str:
    """results: `curve` (group, time, estimate, lower, upper, at_risk, events, censored) and `risk` (group,
    time, at_risk, and events and censored so far). labels: group → words. words: `time`, `event`, `value`.
    """
    if len(drawing.labels) > MOST_LINES:
        raise ValueError("a panel holds at most four lines")
    risk = {key: series(drawing.frame("risk"), "group", key) for key in drawing.labels}
    ticks = [float(t) for t in next(iter(risk.values()))["time"]]
    lines = len(drawing.labels) * (4 if len(drawing.labels) > 1 else 3)
    below = 34 + canvas.LINE * (lines + 1)
    with canvas.sheet(HEIGHT + below + 26) as paper:
        ax = canvas.axes(paper, LEFT, below, canvas.WIDTH - LEFT - RIGHT, HEIGHT)
        canvas.percent_axis(ax)
        canvas.time_axis(ax, ticks, drawing.word("time"), ticks[-1])
        canvas.write(paper, LEFT - 30, HEIGHT + below + 12, drawing.word("value"), fontsize=canvas.SMALL)
        _curves(ax, drawing, ticks[-1], risk)
        _risk_table(paper, ax, drawing, risk, below - 34)
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _curves(ax: Axes, drawing: Drawing, end: float, risk: dict[str, pd.DataFrame]) -> None:
    ends = []
    for key, stroke in zip(drawing.labels, STROKES, strict=False):
        curve = series(drawing.frame("curve"), "group", key)
        firm, loose = parts(curve, end)
        band(ax, firm, stroke)
        line(ax, firm, stroke)
        line(ax, loose, stroke, reliable=False)
        if risk[key]["at_risk"].max() <= MARKS_UP_TO:
            _censored(ax, pd.concat([firm, loose]), curve, stroke)
        last = loose if len(loose) else firm
        ends.append((float(last["time"].iloc[-1]), float(last["estimate"].iloc[-1]), drawing.label(key)))
    if len(drawing.labels) > 1:
        _end_labels(ax, ends)


def band(ax: Axes, curve: pd.DataFrame, stroke: Stroke) -> None:
    """The interval as a faint area between two thin lines."""
    known = curve.dropna(subset=["lower", "upper"])
    ax.fill_between(
        known["time"],
        known["lower"],
        known["upper"],
        step="post",
        color=stroke.colour,
        alpha=0.10,
        linewidth=0,
    )
    for edge in ("lower", "upper"):
        ax.step(known["time"], known[edge], where="post", color=stroke.colour, linewidth=0.5)


def line(ax: Axes, curve: pd.DataFrame, stroke: Stroke, *, reliable: bool = True) -> None:
    """The estimate as a step line; thin and finely dashed where it cannot be relied on."""
    if curve.empty:
        return
    sns.lineplot(
        data=curve,
        x="time",
        y="estimate",
        estimator=None,
        errorbar=None,
        drawstyle="steps-post",
        color=stroke.colour,
        linewidth=1.6 if reliable else 0.9,
        dashes=False,
        sort=False,
        ax=ax,
    )
    dashes = stroke.dashes if reliable else UNRELIABLE
    if dashes:
        ax.lines[-1].set_dashes(dashes)
    ax.set_ylabel("")


def _censored(ax: Axes, drawn: pd.DataFrame, curve: pd.DataFrame, stroke: Stroke) -> None:
    last = drawn["time"].max()
    marks = curve[(curve["censored"] > 0) & (curve["time"] <= last)]
    ax.plot(
        marks["time"], marks["estimate"], linestyle="", marker="|", markersize=6, color=stroke.colour, mew=0.8
    )


def _end_labels(ax: Axes, ends: list[tuple[float, float, str]]) -> None:
    """The name of each line to the right of the panel, apart from the next, tied to its end."""
    places = canvas.spread([y for _, y, _ in ends], canvas.LINE / HEIGHT, 0.0, 1.0)
    limit = ax.get_xlim()[1]
    for (x, y, text), place in zip(ends, places, strict=True):
        canvas.label_end(ax, (x, y), (limit * 1.05, place), text)


def _risk_table(paper: Sheet, ax: Axes, drawing: Drawing, risk: dict[str, pd.DataFrame], top: float) -> None:
    rows = (("At risk", "at_risk"), ("Censored", "censored"), (drawing.word("event", "Died"), "events"))
    y = top - canvas.LINE
    for key, frame in risk.items():
        if len(risk) > 1:
            canvas.write(paper, 4, y, drawing.label(key), fontsize=canvas.SMALL, style="italic")
            y -= canvas.LINE
        for words, column in rows:
            canvas.write(paper, 4, y, words, fontsize=canvas.SMALL)
            for time, value in zip(frame["time"], frame[column], strict=True):
                x = LEFT + (canvas.WIDTH - LEFT - RIGHT) * time / ax.get_xlim()[1]
                canvas.write(paper, x, y, count(value), fontsize=canvas.SMALL, ha="center")
            y -= canvas.LINE

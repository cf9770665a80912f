"""A chart in time order: points, a centre line and limits, and a ring around each point outside them."""

from __future__ import annotations

import pandas as pd
from matplotlib.axes import Axes

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing, series
from outcomes.figures.palette import BLACK, EDGE, SOFT
from outcomes.tables.format import time_point

LEFT, RIGHT, HEIGHT, BELOW, ABOVE = 50.0, 84.0, 170.0, 42.0, 26.0
MOST_TICKS = 12


def time_order(drawing: Drawing) -> str:
    """results: `points` (time, estimate and, where they apply, centre, lower, upper). words: `time`, `value`,
    `centre`, `lower`, `upper` (names at the line ends). options: `percent` (1 for shares), `high` (top).
    """
    frame = _plain(drawing.frame("points"))
    with canvas.sheet(HEIGHT + BELOW + ABOVE) as paper:
        ax = canvas.axes(paper, LEFT, BELOW, canvas.WIDTH - LEFT - RIGHT, HEIGHT)
        _scales(ax, drawing, frame)
        canvas.write(paper, 8, HEIGHT + BELOW + 12, drawing.word("value"), fontsize=canvas.SMALL)
        ax.plot(frame["time"], frame["estimate"], color=BLACK, linewidth=0.8, marker="o", ms=3.5)
        _lines(ax, drawing, frame)
        _outside(ax, frame)
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _plain(points: pd.DataFrame) -> pd.DataFrame:
    """The points in order of time, with a column of missing numbers for a line that is not there."""
    frame = series(points, "", "")
    for name in ("centre", "lower", "upper"):
        if name in points:
            ordered = points.sort_values("time", kind="stable", ignore_index=True)[name]
            frame[name] = ordered.astype("Float64").to_numpy(dtype=float, na_value=float("nan"))
        else:
            frame[name] = float("nan")
    return frame


def _scales(ax: Axes, drawing: Drawing, frame: pd.DataFrame) -> None:
    highest = float(frame[["estimate", "upper", "centre"]].max().max())
    if drawing.options.get("percent"):
        canvas.percent_axis(ax)
    else:
        ax.set_ylim(0, drawing.options.get("high", highest * 1.08 or 1.0))
        ax.grid(axis="y")
        ax.set_axisbelow(True)
    times = [float(t) for t in frame["time"]]
    step = -(-len(times) // MOST_TICKS) or 1
    ax.set_xticks(times[::step], [time_point(t).replace(",", "") for t in times[::step]])
    margin = (times[-1] - times[0]) * 0.03 or 0.5
    ax.set_xlim(times[0] - margin, times[-1] + margin)
    ax.set_xlabel(drawing.word("time"), fontsize=canvas.SMALL)


def _lines(ax: Axes, drawing: Drawing, frame: pd.DataFrame) -> None:
    low, high = ax.get_ylim()
    ends = []
    for name, dashes in (("lower", (4, 2)), ("centre", ()), ("upper", (4, 2))):
        known = frame.dropna(subset=[name])
        if known.empty:
            continue
        ax.step(known["time"], known[name], where="mid", color=EDGE, linewidth=0.9)
        if dashes:
            ax.lines[-1].set_dashes(dashes)
        ends.append((float(known["time"].iloc[-1]), float(known[name].iloc[-1]), drawing.word(name, name)))
    places = canvas.spread([y for _, y, _ in ends], (high - low) * canvas.LINE / HEIGHT, low, high)
    left, right = ax.get_xlim()
    for (x, y, text), place in zip(ends, places, strict=True):
        canvas.label_end(ax, (x, y), (right + (right - left) * 0.03, place), text)


def _outside(ax: Axes, frame: pd.DataFrame) -> None:
    beyond = frame[(frame["estimate"] > frame["upper"]) | (frame["estimate"] < frame["lower"])]
    ax.plot(beyond["time"], beyond["estimate"], linestyle="", marker="o", ms=9, mfc="none", mec=SOFT, mew=1.0)

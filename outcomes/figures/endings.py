"""How support ended: cumulative incidences stacked to 100 %, and one panel an ending with its band."""

from __future__ import annotations

import math

import numpy as np
import pandas as pd

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing, series
from outcomes.figures.palette import FILLS, INK, STROKES
from outcomes.figures.survival import band, line

LEFT, RIGHT, HEIGHT, BELOW, ABOVE = 40.0, 128.0, 230.0, 40.0, 24.0
PANEL_WIDTH, PANEL_HEIGHT, ACROSS = 118.0, 92.0, 3


def endings_stacked(drawing: Drawing) -> str:
    """results: `curve` (cause, time, estimate), all causes at the same times; `ticks` (time), if given.
    labels: cause → words, from the bottom up. words: `time`, `value`, `rest` (the area above all causes).
    options: `end`, the last time shown.
    """
    end = drawing.options["end"]
    causes = {key: series(drawing.frame("curve"), "cause", key) for key in drawing.labels}
    times = next(iter(causes.values()))["time"].to_numpy()
    kept = times <= end
    if any(not np.array_equal(frame["time"], times) for frame in causes.values()):
        raise ValueError("a stacked figure needs every cause at the same times")
    x = np.append(times[kept], end)
    with canvas.sheet(HEIGHT + BELOW + ABOVE) as paper:
        ax = canvas.axes(paper, LEFT, BELOW, canvas.WIDTH - LEFT - RIGHT, HEIGHT)
        canvas.percent_axis(ax)
        canvas.time_axis(ax, _ticks(drawing), drawing.word("time"), end)
        canvas.write(paper, 8, HEIGHT + BELOW + 10, drawing.word("value"), fontsize=canvas.SMALL)
        base = np.zeros(len(x))
        middles = []
        for (_, frame), fill in zip(causes.items(), FILLS, strict=False):
            height = frame["estimate"].to_numpy()[kept]
            top = base + np.append(height, height[-1:])
            ax.fill_between(x, base, top, step="post", color=fill, alpha=0.6, linewidth=0)
            ax.step(x, top, where="post", color=INK, linewidth=0.8)
            middles.append(float(base[-1] + top[-1]) / 2)
            base = top
        words = [drawing.label(key) for key in drawing.labels]
        if drawing.word("rest"):
            words.append(drawing.word("rest"))
            middles.append(float(base[-1] + 1) / 2)
        _area_labels(ax, end, middles, words)
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _area_labels(ax: canvas.Axes, end: float, middles: list[float], words: list[str]) -> None:
    places = canvas.spread(middles, canvas.LINE / HEIGHT, 0.02, 0.98)
    for middle, place, text in zip(middles, places, words, strict=True):
        canvas.label_end(ax, (end, middle), (end * 1.045, place), text)


def endings_apart(drawing: Drawing) -> str:
    """One panel a cause, same axes, each with its band; as `endings_stacked` plus lower and upper.

    The curves run to `end`: when few are still supported because most have ended, an incidence is as well
    known as before, so the rule for survival curves does not apply. `end` must lie within follow-up.
    """
    end = drawing.options["end"]
    down = -(-len(drawing.labels) // ACROSS)
    row_height = PANEL_HEIGHT + 44
    top = _top(drawing, end)
    with canvas.sheet(down * row_height + 22) as paper:
        for place, key in enumerate(drawing.labels):
            row, column = divmod(place, ACROSS)
            bottom = 30 + (down - 1 - row) * row_height
            ax = canvas.axes(paper, 36 + column * (PANEL_WIDTH + 31), bottom, PANEL_WIDTH, PANEL_HEIGHT)
            canvas.percent_axis(ax, top)
            canvas.time_axis(ax, _few(_ticks(drawing)), "", end)
            ax.set_title(drawing.label(key), loc="left", fontsize=canvas.SMALL, style="italic", pad=5)
            _one_cause(ax, series(drawing.frame("curve"), "cause", key), end)
        canvas.write(paper, 36, 4, drawing.word("time"), fontsize=canvas.SMALL)
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _one_cause(ax: canvas.Axes, curve: pd.DataFrame, end: float) -> None:
    kept = curve[curve["time"] <= end]
    whole = pd.concat([kept, kept.iloc[[-1]].assign(time=end)], ignore_index=True)
    band(ax, whole, STROKES[0])
    line(ax, whole, STROKES[0])
    ax.set_xlabel("")


def _ticks(drawing: Drawing) -> list[float]:
    """The times of `ticks`, which should be those of the table beside the figure, else five equal steps."""
    if "ticks" in drawing.results:
        return [float(t) for t in drawing.frame("ticks")["time"]]
    return [float(t) for t in np.linspace(0, drawing.options["end"], 6)]


def _few(ticks: list[float]) -> list[float]:
    """At most four of them, first and last included, so that their labels do not touch in a small panel."""
    if len(ticks) <= 4:
        return ticks
    chosen = [ticks[0], *ticks[-1:]]
    for tick in reversed(ticks[1:-1]):
        if chosen[1] - tick >= (ticks[-1] - ticks[0]) / 4 and tick - ticks[0] >= (ticks[-1] - ticks[0]) / 4:
            chosen.insert(1, tick)
    return chosen


def _top(drawing: Drawing, end: float) -> float:
    """The highest limit shown, up to the next tenth: panels share it."""
    frame = drawing.frame("curve")
    shown = frame[frame["time"] <= end]
    highest = float(shown["upper"].max()) if shown["upper"].notna().any() else 1.0
    return min(1.0, math.ceil(highest * 10 - 1e-9) / 10)

"""One line a row: an estimate as a dot, its interval as a line, an earlier period as an open dot below it."""

from __future__ import annotations

import math

import pandas as pd
from matplotlib.axes import Axes
from matplotlib.ticker import FixedLocator, NullLocator

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing
from outcomes.figures.palette import BLACK, BLUE, EDGE
from outcomes.tables.format import number

LEFT, RIGHT, ROW, BELOW, ABOVE = 170.0, 20.0, 20.0, 40.0, 22.0
_COLUMNS = ["group", "estimate", "lower", "upper"]


def dots(drawing: Drawing) -> str:
    """results: `now` and, if there is one, `before` (group, estimate, lower, upper). labels: group → words,
    from the top down. words: `value` (axis), `now`, `before`. options: `reference` (a thin line there), `log`
    (1 for ratios), `low` and `high` (ends of the axis). A row without an estimate stays empty.
    """
    now = drawing.frame("now")[_COLUMNS]
    before = drawing.frame("before")[_COLUMNS] if "before" in drawing.results else None
    height = ROW * len(drawing.labels)
    with canvas.sheet(height + BELOW + ABOVE) as paper:
        ax = canvas.axes(paper, LEFT, BELOW, canvas.WIDTH - LEFT - RIGHT, height)
        ax.spines["left"].set_visible(False)
        ax.set_ylim(len(drawing.labels) - 0.5, -0.5)
        ax.set_yticks(range(len(drawing.labels)), [drawing.label(key) for key in drawing.labels])
        ax.tick_params(axis="y", length=0)
        ax.grid(axis="y")
        ax.set_axisbelow(True)
        ax.set_xlabel(drawing.word("value"), fontsize=canvas.SMALL)
        if "reference" in drawing.options:
            ax.axvline(drawing.options["reference"], color=EDGE, linewidth=0.8)
        shift = 0.0 if before is None else 0.17
        _points(ax, drawing, now, -shift, BLACK)
        if before is not None:
            _points(ax, drawing, before, shift, BLUE)
            _key(paper, drawing, height)
        _scale(ax, drawing, now if before is None else pd.concat([now, before]))
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _points(ax: Axes, drawing: Drawing, frame: pd.DataFrame, shift: float, colour: str) -> None:
    for place, key in enumerate(drawing.labels):
        for row in frame[frame["group"] == key].dropna().itertuples():
            y = place + shift
            ax.plot([float(row.lower), float(row.upper)], [y, y], color=colour, linewidth=1.0)
            face = colour if colour == BLACK else "#ffffff"
            ax.plot(
                [float(row.estimate)], [y], marker="o", ms=4.5, mfc=face, mec=colour, mew=1.0, linestyle=""
            )


def _key(paper: canvas.Sheet, drawing: Drawing, height: float) -> None:
    """Which dot is which, in one line of words above the axis: there are no line ends to label."""
    text = f"filled: {drawing.word('now')}; open: {drawing.word('before')}"
    canvas.write(paper, LEFT, height + BELOW + 8, text, fontsize=canvas.SMALL, style="italic")


def _scale(ax: Axes, drawing: Drawing, frame: pd.DataFrame) -> None:
    known = frame.dropna()
    if drawing.options.get("log"):
        ax.set_xscale("log")
        values = [v for v in (*known["lower"], *known["upper"], 1.0) if v > 0]
        low, high = min(values) / 1.15, max(values) * 1.15
        ticks = _log_ticks(low, high)
        ax.xaxis.set_major_locator(FixedLocator(ticks))
        ax.xaxis.set_minor_locator(NullLocator())
        ax.set_xticks(ticks, [number(tick, max(0, -math.floor(math.log10(tick)))) for tick in ticks])
        ax.set_xlim(low, high)
        return
    low = drawing.options.get("low", 0.0)
    high = drawing.options.get("high", float(known["upper"].max()) * 1.05 if len(known) else 1.0)
    ax.set_xlim(low, high)


def _log_ticks(low: float, high: float) -> list[float]:
    """The numbers 1, 2 and 5 of each decade within the ends."""
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    ticks = [step * 10.0**decade for decade in decades for step in (1, 2, 5)]
    return [tick for tick in ticks if low <= tick <= high]

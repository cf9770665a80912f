"""The sheet a figure is drawn on: fixed measures in points, one serif face, plain axes, no legend."""

from __future__ import annotations

import io
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import Any

import matplotlib as mpl
import seaborn as sns
from matplotlib.axes import Axes
from matplotlib.backends.backend_svg import FigureCanvasSVG
from matplotlib.figure import Figure as Sheet
from matplotlib.lines import Line2D

from outcomes.figures.palette import GRID, INK, SOFT, WHITE
from outcomes.figures.svg import clean_svg
from outcomes.tables.format import number, time_point

__all__ = [
    "Axes",
    "Line2D",
    "Sheet",
    "axes",
    "label_end",
    "percent_across",
    "percent_axis",
    "saved",
    "sheet",
    "spread",
    "time_axis",
    "write",
]

WIDTH = 470.0  # points; about the measure of the text column
SIZE, SMALL = 9.5, 8.5  # font sizes
LINE = 12.0  # distance of two lines of text

_STYLE: dict[Any, Any] = {
    "svg.fonttype": "none",
    "svg.hashsalt": "outcomes",
    "text.parse_math": False,
    "axes.unicode_minus": True,
    "font.family": "serif",
    "font.size": SIZE,
    "text.color": INK,
    "axes.labelcolor": INK,
    "axes.edgecolor": SOFT,
    "axes.linewidth": 0.8,
    "axes.facecolor": WHITE,
    "figure.facecolor": WHITE,
    "grid.color": GRID,
    "grid.linewidth": 0.6,
    "xtick.color": SOFT,
    "ytick.color": SOFT,
    "xtick.labelcolor": INK,
    "ytick.labelcolor": INK,
    "xtick.labelsize": SMALL,
    "ytick.labelsize": SMALL,
    "xtick.major.size": 3.5,
    "ytick.major.size": 3.5,
    "path.simplify": False,
}


@contextmanager
def sheet(height: float) -> Iterator[Sheet]:
    """An empty sheet WIDTH × height points, with our style in force while it is drawn and saved."""
    with warnings.catch_warnings():
        # A label may hold a sign that the measuring font lacks; the reader's own font shows it.
        warnings.filterwarnings("ignore", message="Glyph .* missing from font")
        with sns.axes_style("ticks"), mpl.rc_context(_STYLE):
            paper = Sheet(figsize=(WIDTH / 72, height / 72), dpi=72)
            FigureCanvasSVG(paper)
            yield paper


def axes(paper: Sheet, left: float, bottom: float, width: float, height: float) -> Axes:
    """Axes at this place of the sheet, in points from its lower left corner, without top and right line."""
    full_width, full_height = paper.get_size_inches() * 72
    box = (left / full_width, bottom / full_height, width / full_width, height / full_height)
    made = paper.add_axes(box)
    sns.despine(ax=made)
    return made


def write(paper: Sheet, x: float, y: float, text: str, **look: Any) -> None:
    """Text at this place of the sheet, in points from its lower left corner."""
    full_width, full_height = paper.get_size_inches() * 72
    paper.text(x / full_width, y / full_height, text, **look)


def percent_axis(ax: Axes, top: float = 1.0) -> None:
    """A vertical axis from 0 to 100 per cent (or `top`), labelled in per cent, with faint lines across."""
    step = 0.2 if top > 0.5 else 0.1
    ticks = [step * i for i in range(int(top / step + 1.0001))]
    ax.set_ylim(0, top)
    ax.set_yticks(ticks, [f"{number(tick * 100, 0)}%" for tick in ticks])
    ax.grid(axis="y")
    ax.set_axisbelow(True)


def percent_across(ax: Axes, label: str) -> None:
    """A horizontal axis from 0 to 100 per cent."""
    ticks = [0.0, 0.2, 0.4, 0.6, 0.8, 1.0]
    ax.set_xlim(0, 1)
    ax.set_xticks(ticks, [f"{number(tick * 100, 0)}%" for tick in ticks])
    ax.set_xlabel(label, fontsize=SMALL)


def time_axis(ax: Axes, ticks: Sequence[float], label: str, end: float) -> None:
    """A horizontal axis from 0 to `end`."""
    ax.set_xlim(0, end)
    ax.set_xticks(ticks, [time_point(tick) for tick in ticks])
    ax.set_xlabel(label, fontsize=SMALL)


def spread(places: Sequence[float], least: float, low: float, high: float) -> list[float]:
    """Places for labels, in the same order, at least `least` apart and between low and high if they fit.

    >>> spread([0.5, 0.5, 0.9], 0.1, 0, 1)
    [0.5, 0.6, 0.9]
    """
    order = sorted(range(len(places)), key=lambda i: (places[i], i))
    out = list(places)
    floor = low
    for i in order:
        out[i] = max(out[i], floor)
        floor = out[i] + least
    ceiling = high
    for i in reversed(order):
        out[i] = min(out[i], ceiling)
        ceiling = out[i] - least
    return out


def label_end(ax: Axes, end: tuple[float, float], place: tuple[float, float], text: str) -> None:
    """A label beside a line or area, tied to its end by a hair line."""
    hair = {"arrowstyle": "-", "color": SOFT, "linewidth": 0.6, "shrinkA": 1, "shrinkB": 1}
    ax.annotate(text, end, place, va="center", fontsize=SMALL, annotation_clip=False, arrowprops=hair)


def saved(paper: Sheet, key: str, title: str, description: str) -> str:
    """The sheet as a cleaned `<svg>` element."""
    out = io.StringIO()
    paper.savefig(out, format="svg", metadata={"Date": None})
    return clean_svg(out.getvalue(), key, title, description)

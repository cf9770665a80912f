"""Centres against limits that narrow with their size: no ranking, only whether a centre lies within them.

After Spiegelhalter, Stat Med 2005;24:1185: limits around a target at two levels, against the number of runs.
"""

from __future__ import annotations

from matplotlib.axes import Axes

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing, series
from outcomes.figures.palette import BLACK, EDGE, SOFT

LEFT, RIGHT, HEIGHT, BELOW, ABOVE = 50.0, 84.0, 210.0, 42.0, 26.0
_DASHES = ((4, 2), (1.5, 1.5))


def funnel(drawing: Drawing) -> str:
    """results: `units` (group, at_risk, estimate) and `limits` (group, at_risk, lower, upper), the group
    being the level. labels: level → words, the narrow limits first. words: `time` (number of runs), `value`
    and `target`. options: `target`.
    """
    units = drawing.frame("units").dropna(subset=["at_risk", "estimate"])
    most = float(drawing.frame("limits")["at_risk"].max())
    with canvas.sheet(HEIGHT + BELOW + ABOVE) as paper:
        ax = canvas.axes(paper, LEFT, BELOW, canvas.WIDTH - LEFT - RIGHT, HEIGHT)
        canvas.percent_axis(ax)
        ax.set_xlim(0, most)
        ax.set_xlabel(drawing.word("time"), fontsize=canvas.SMALL)
        canvas.write(paper, 8, HEIGHT + BELOW + 12, drawing.word("value"), fontsize=canvas.SMALL)
        _limits(ax, drawing, most)
        ax.plot(
            units["at_risk"].astype(float), units["estimate"].astype(float), linestyle="", marker="o", ms=4.5,
            color=BLACK, clip_on=False,
        )  # fmt: skip
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _limits(ax: Axes, drawing: Drawing, most: float) -> None:
    target = drawing.options["target"]
    ax.plot([0, most], [target, target], color=SOFT, linewidth=0.9)
    ends = [(target, drawing.word("target", "target"))]
    for key, dashes in zip(drawing.labels, _DASHES, strict=True):
        frame = drawing.frame("limits")
        sizes = frame[frame["group"] == key].sort_values("at_risk", kind="stable")["at_risk"].astype(float)
        curve = series(frame.assign(time=frame["at_risk"]), "group", key)
        for edge in ("lower", "upper"):
            ax.plot(sizes, curve[edge], color=EDGE, linewidth=0.9, dashes=dashes)
        ends.append((float(curve["upper"].iloc[-1]), drawing.label(key)))
    places = canvas.spread([y for y, _ in ends], canvas.LINE / HEIGHT, 0.0, 1.0)
    for (y, text), place in zip(ends, places, strict=True):
        canvas.label_end(ax, (most, y), (most * 1.03, place), text)

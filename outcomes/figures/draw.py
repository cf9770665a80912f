"""Every kind of figure by name, and the one function a report calls."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from types import MappingProxyType

from outcomes.figures.calibration import calibration
from outcomes.figures.dots import dots
from outcomes.figures.drawing import Drawing
from outcomes.figures.endings import endings_apart, endings_stacked
from outcomes.figures.funnel import funnel
from outcomes.figures.steps import steps
from outcomes.figures.survival import survival
from outcomes.figures.time_order import time_order

KINDS: Mapping[str, Callable[[Drawing], str]] = MappingProxyType(
    {
        "survival": survival,
        "endings_stacked": endings_stacked,
        "endings_apart": endings_apart,
        "dots": dots,
        "steps": steps,
        "calibration": calibration,
        "time_order": time_order,
        "funnel": funnel,
    }
)


def draw(kind: str, drawing: Drawing) -> str:
    """The figure as an `<svg>` element, the same bytes for the same drawing. KeyError: no such kind."""
    return KINDS[kind](drawing)

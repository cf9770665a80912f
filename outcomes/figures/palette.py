"""The only colours a figure may use, on white, and how series differ without colour.

Okabe and Ito's colours that keep a contrast of 3 to 1 on white draw lines and marks; their paler colours fill
areas and always have an outline. Contrast of #767676 on white: 4.54; of #949494: 3.03; #dddddd is decoration.
"""

from __future__ import annotations

from dataclasses import dataclass

WHITE, INK, SOFT, EDGE, GRID = "#ffffff", "#1a1a1a", "#595959", "#767676", "#dddddd"

BLACK, BLUE, VERMILLION, GREEN, PURPLE = "#000000", "#0072b2", "#d55e00", "#009e73", "#cc79a7"
ORANGE, SKY, YELLOW, GREY = "#e69f00", "#56b4e9", "#f0e442", "#999999"

LINES = (BLACK, BLUE, VERMILLION, GREEN, PURPLE)
FILLS = (SKY, ORANGE, YELLOW, GREEN, GREY, PURPLE, WHITE)
ALLOWED = frozenset({WHITE, INK, SOFT, EDGE, GRID, *LINES, *FILLS})


@dataclass(frozen=True)
class Stroke:
    """Colour, dash pattern (points on and off) and marker of the n-th series of a figure."""

    colour: str
    dashes: tuple[float, ...]
    marker: str


STROKES = (
    Stroke(BLACK, (), "o"),
    Stroke(BLUE, (7, 2), "s"),
    Stroke(VERMILLION, (9, 2, 1.5, 2), "^"),
    Stroke(GREEN, (4, 1.5), "D"),
    Stroke(PURPLE, (9, 2, 3, 2), "v"),
)
UNRELIABLE = (1.2, 1.8)  # beyond the time that can be relied on: short thin dashes, used for nothing else

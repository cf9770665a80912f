"""Who is counted, step by step: how many remain, and to the side how many left and why. No boxes."""

from __future__ import annotations

import textwrap

from outcomes.figures import canvas
from outcomes.figures.drawing import Drawing
from outcomes.figures.palette import SOFT
from outcomes.tables.table import plain_words

NUMBER_AT, WORDS_AT, ASIDE_AT = 44.0, 54.0, 96.0
STEP = 40.0
ASIDE_WIDTH = 66  # characters


def steps(drawing: Drawing) -> str:
    """Drawn from the table itself: a row a stage with columns `left`, `reason` and `remaining`."""
    rows = drawing.table.rows
    with canvas.sheet(STEP * len(rows) + 6) as paper:
        y = STEP * len(rows) - 12
        for place, row in enumerate(rows):
            left = drawing.table.cell(row.key, "left").text
            reason = drawing.table.cell(row.key, "reason").text
            remaining = drawing.table.cell(row.key, "remaining").text
            if place:
                _line_down(paper, y + STEP - 5, y + 11)
                aside = textwrap.wrap(f"{left} left: {reason}", ASIDE_WIDTH, max_lines=2, placeholder=" …")
                for below, text in enumerate(aside):
                    at = y + STEP - 19 - below * (canvas.LINE - 2)
                    canvas.write(paper, ASIDE_AT, at, text, fontsize=canvas.SMALL, color=SOFT)
            canvas.write(paper, NUMBER_AT, y, remaining, ha="right")
            canvas.write(paper, WORDS_AT, y, plain_words(row.label))
            y -= STEP
        return canvas.saved(paper, drawing.key, drawing.title, drawing.description)


def _line_down(paper: canvas.Sheet, top: float, bottom: float) -> None:
    width, height = paper.get_size_inches() * 72
    x = (NUMBER_AT - 8) / width
    paper.add_artist(canvas.Line2D([x, x], [top / height, bottom / height], color=SOFT, linewidth=0.8))

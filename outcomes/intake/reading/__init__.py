"""The strict reader, first hop of a datum: bytes of an export become text cells with file, line and
column."""

from outcomes.intake.reading.grid import Cell, ErrorCell, FileSpec, Grid, Number, SheetSpec
from outcomes.intake.reading.outline import SheetOutline, outline
from outcomes.intake.reading.reader import headers, read

__all__ = [
    "Cell",
    "ErrorCell",
    "FileSpec",
    "Grid",
    "Number",
    "SheetOutline",
    "SheetSpec",
    "headers",
    "outline",
    "read",
]

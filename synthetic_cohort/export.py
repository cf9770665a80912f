"""Write an export of a cohort in one of the styles, with planted defects, and the mapping file that goes with it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from synthetic_cohort.cohort import Cohort
from synthetic_cohort.csv_file import write_csv
from synthetic_cohort.sheets import Tables
from synthetic_cohort.write_north import north_tables
from synthetic_cohort.write_plain import plain_tables

_MAKERS = {"north": north_tables, "plain": plain_tables}
STYLES = tuple(sorted(_MAKERS))


@dataclass(frozen=True)
class Export:
    """paths: the files of the export in the order of the mapping."""

    paths: tuple[Path, ...]


def tables_of(cohort: Cohort, style: str) -> Tables:
    """The export as sheets, not yet written. Raises ValueError for an unknown style."""
    if style not in _MAKERS:
        raise ValueError(f"style must be one of {', '.join(STYLES)}")
    return _MAKERS[style](cohort)


def write_export(cohort: Cohort, style: str, folder: Path, seed: int, defects: Sequence[str] = ()) -> Export:
    """Write the files of one style into an existing folder."""
    tables = tables_of(cohort, style)
    sheet = tables.sheets[0]
    path = Path(folder) / sheet.file
    separator, encoding = (";", "utf-8-sig") if style == "north" else (",", "utf-8")
    write_csv(sheet, path, separator, encoding)
    return Export((path,))

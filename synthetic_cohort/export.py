"""Write an export in one of the styles, with planted defects, and the mapping file that goes with it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from synthetic_cohort.cohort import Cohort
from synthetic_cohort.csv_file import write_csv
from synthetic_cohort.defects import plant
from synthetic_cohort.mapping import mapping_text
from synthetic_cohort.planter import Defect
from synthetic_cohort.sheets import Tables
from synthetic_cohort.write_north import north_tables
from synthetic_cohort.write_plain import plain_tables
from synthetic_cohort.write_south import south_tables
from synthetic_cohort.xlsx_file import write_workbook

_MAKERS = {"north": north_tables, "plain": plain_tables, "south": south_tables}
_CSV_FORMS = {"north": (";", "utf-8-sig"), "plain": (",", "utf-8")}
STYLES = tuple(sorted(_MAKERS))


@dataclass(frozen=True)
class Export:
    """paths: the files of the export in the order of the mapping. mapping: the mapping file, with the period
    and the dates of this cohort. defects: the truth about what was planted."""

    paths: tuple[Path, ...]
    mapping: Path
    defects: tuple[Defect, ...]


def tables_of(cohort: Cohort, style: str) -> Tables:
    """The export as sheets, not yet written. Raises ValueError for an unknown style."""
    if style not in _MAKERS:
        raise ValueError(f"style must be one of {', '.join(STYLES)}")
    return _MAKERS[style](cohort)


def write_export(
    cohort: Cohort, style: str, folder: Path, seed: int, defects: Sequence[str] = (), each: int = 1
) -> Export:
    """Write one style into an existing folder: the export and `<style>.toml`.

    seed: of the defects. defects: kinds to plant, `each` times each; kinds that the style can not carry are
    left out. Raises ValueError for an unknown style or kind.
    """
    tables, truth = plant(tables_of(cohort, style), seed, defects, each)
    path = Path(folder) / tables.sheets[0].file
    if style in _CSV_FORMS:
        write_csv(tables.sheets[0], path, *_CSV_FORMS[style])
    else:
        write_workbook(tables.sheets, path)
    mapping = Path(folder) / f"{style}.toml"
    mapping.write_text(mapping_text(cohort, style), encoding="utf-8")
    return Export((path,), mapping, tuple(truth))

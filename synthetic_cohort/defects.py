"""Plant defects in an export, and say exactly where they are.

Each defect sits in a run of its own, so that none hides another, and each is of a kind that reading the file
can show: beyond what is possible, in contradiction with itself, or twice there. A word for "missing" is no
defect.
"""

from __future__ import annotations

import copy
from collections.abc import Callable, Sequence

from synthetic_cohort import defect_cells as cells
from synthetic_cohort import defect_runs as runs
from synthetic_cohort.clock import stream
from synthetic_cohort.planter import Defect, Planter
from synthetic_cohort.sheets import Tables

# Twins and overlaps come first: they need runs that nothing else has touched.
PLANTERS: dict[str, Callable[[Planter], None]] = {
    function.__name__: function
    for function in (
        runs.run_overlap,
        runs.identical_twin,
        runs.contradicting_twin,
        runs.end_before_start,
        runs.discharge_before_end,
        runs.died_yet_alive,
        runs.death_before_end,
        runs.start_missing,
        runs.end_without_kind,
        runs.age_under_18,
        runs.event_of_unknown_run,
        runs.event_long_before_start,
        cells.unit_slip,
        cells.impossible_month,
        cells.skipped_hour,
        cells.unknown_code,
        cells.cpc_out_of_range,
        cells.diastolic_above_systolic,
        cells.negative_platelets,
        cells.text_in_number,
        cells.spreadsheet_error,
        cells.birth_after_start,
    )
}
DEFECT_KINDS = tuple(PLANTERS)


def plant(
    tables: Tables, seed: int, kinds: Sequence[str] | None = None, each: int = 1
) -> tuple[Tables, list[Defect]]:
    """A copy of the tables with `each` defects of each kind that this style can carry, and the truth.

    Raises ValueError for an unknown kind.
    """
    chosen = DEFECT_KINDS if kinds is None else tuple(kinds)
    unknown = sorted(set(chosen) - set(PLANTERS))
    if unknown:
        raise ValueError(f"no such kind of defect: {', '.join(unknown)}")
    planter = Planter(copy.deepcopy(tables), stream(seed, "defects"))
    for kind in chosen:
        for _ in range(each):
            PLANTERS[kind](planter)
    return planter.tables, planter.truth()

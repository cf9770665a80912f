"""Where the median of a column usually lies, in the canonical unit: what a unit guess is tested against."""

from __future__ import annotations

from functools import cache

import duckdb

from outcomes.intake.vocabulary import load_vocabulary


@cache
def _ranges() -> dict[str, tuple[float, float]]:
    con = duckdb.connect(":memory:")
    load_vocabulary(con)
    rows = con.execute("select field, low::double, high::double from vocabulary.typical_median").fetchall()
    con.close()
    return {field: (low, high) for field, low, high in rows}


def typical_range(field: str) -> tuple[float, float] | None:
    """(low, high) for a field of the vocabulary; None where none is listed."""
    return _ranges().get(field)

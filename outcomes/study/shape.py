"""Small builders that the audit's analyses share: counts as a result, rows of a table, lists of runs."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import pandas as pd

from outcomes.analysis.result import Caution, Method, Result, tidy
from outcomes.cohort.frames import Cohort
from outcomes.study.answer import RowOf, RunList

COUNTED = Method("counts of records")
DAY = 24.0

ENDINGS = {
    "recovery": "weaned",
    "durable LVAD": "durable LVAD",
    "transplantation": "transplantation",
    "death or withdrawal": "death or withdrawal",
    "other exit": "other exit",
}
CAUSES = tuple(ENDINGS)


def counted(
    rows: Sequence[Mapping[str, object]],
    columns: Sequence[str],
    words: Sequence[str] = (),
    notes: tuple[Caution, ...] = (),
) -> Result:
    """A result of counts. words: columns that hold text and are none of the standard text columns."""
    table = tidy(
        [{k: v for k, v in r.items() if k not in words} for r in rows], [c for c in columns if c not in words]
    )
    for name in words:
        table[name] = pd.array([r.get(name) for r in rows], dtype="string")
    return Result(table, COUNTED, {}, notes)


def rows_of(labels: Mapping[str, str], column: str = "group") -> tuple[RowOf, ...]:
    """Rows of a table, one a label; keys of rows are made of our own words only."""
    return tuple(RowOf(slug(key), label, {column: key}) for key, label in labels.items())


def slug(text: str) -> str:
    """A key of small letters, digits and single underscores.

    >>> slug("death or withdrawal")
    'death_or_withdrawal'
    """
    return "_".join("".join(c if c.isascii() and c.isalnum() else " " for c in text.lower()).split())


def run_list(label: str, keys: pd.Series) -> RunList:
    """A list of runs under short keys, as every page of the report names them."""
    return RunList(label, tuple(sorted(short_key(k) for k in keys)))


def short_key(key: object) -> str:
    """The first ten characters of a random key.

    Two runs of a thousand collide once in a million programmes.
    """
    return str(key)[:10]


def first_runs(cohort: Cohort) -> pd.DataFrame:
    """Survival rows of the first run of each person whose first run is stored and in this period."""
    return cohort.survival[cohort.survival["is_first_run"]].reset_index(drop=True)


def cause_codes(ending: pd.DataFrame) -> pd.Series:
    """Ending as one of CAUSES, '' where the run is still supported or was transferred out."""
    return ending["pathway"].where(ending["cause"] > 0, "").astype("string")


def arrays(frame: pd.DataFrame, *columns: str) -> tuple[object, ...]:
    return tuple(frame[c].to_numpy(dtype=float, na_value=float("nan")) for c in columns)

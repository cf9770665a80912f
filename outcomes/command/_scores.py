"""Score tables of a programme's own: the folder is read and every table in it is checked before anything is
computed."""

from __future__ import annotations

from pathlib import Path

from outcomes.errors import UsageError
from outcomes.scores.catalogue import Catalogue, catalogue
from outcomes.scores.checking import check_table


def score_tables(folder: str | None) -> Catalogue | None:
    """Our tables with those of the folder; None without a folder.

    UsageError USAGE.FOLDER, or SCORE-FILE.… for the first table with a fault or a vector that does not come
    out."""
    if folder is None:
        return None
    path = Path(folder)
    if not path.is_dir():
        raise UsageError("USAGE.FOLDER", "the folder of score tables does not exist")
    if not any(path.glob("*.toml")):
        raise UsageError("USAGE.FOLDER", "the folder of score tables holds no table (*.toml)")
    try:
        tables = catalogue(path)
    except UnicodeDecodeError:
        raise UsageError("SCORE-FILE.ENCODING", "a score table is not UTF-8") from None
    for score in tables.scores():
        problems = check_table(tables.text(score.key)).problems if score.whose == "site" else ()
        if problems:
            first = problems[0]
            raise UsageError(
                first.code,
                first.what,
                where=f"score table {score.key}, {first.where}",
                todo="outcomes score check --tables FOLDER lists every fault",
            )
    return tables

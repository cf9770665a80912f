"""Which scores there are: ours, and a site's own tables in the same form, in place of ours or beside them."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches
from functools import cache
from typing import Any

import pandas as pd

from outcomes.errors import UsageError
from outcomes.resources import score_files
from outcomes.scores.consistency import defaults
from outcomes.scores.model import Score
from outcomes.scores.table import parse_score


class Catalogue:
    """Score tables by key. files: (key, TOML text, 'ours' or 'site'), as `resources.score_files` has them."""

    def __init__(self, files: Iterable[tuple[str, str, str]]) -> None:
        self._texts = {key: (text, whose) for key, text, whose in files}
        self._scores: dict[str, Score] = {}

    @property
    def keys(self) -> tuple[str, ...]:
        """Every key, in order."""
        return tuple(sorted(self._texts))

    def text(self, key: str) -> str:
        """The TOML text of a table."""
        self.score(key)
        return self._texts[key][0]

    def score(self, key: str) -> Score:
        """The checked table. UsageError SCORE.UNKNOWN (the nearest name is offered) or SCORE-FILE.…"""
        if key not in self._texts:
            near = get_close_matches(
                key.lower().replace("-", "_").replace(" ", "_"), self.keys, n=1, cutoff=0.4
            )
            hint = f"did you mean {near[0]}?" if near else f"one of: {', '.join(self.keys)}"
            raise UsageError("SCORE.UNKNOWN", f"there is no score {key!r}", todo=hint)
        if key not in self._scores:
            text, whose = self._texts[key]
            self._scores[key] = parse_score(text, whose, key)
        return self._scores[key]

    def scores(self) -> tuple[Score, ...]:
        """Every table, in order of the keys."""
        return tuple(self.score(key) for key in self.keys)


@cache
def our_catalogue() -> Catalogue:
    """The tables that are shipped."""
    return Catalogue(score_files())


def catalogue(site_folder: Any = None) -> Catalogue:
    """Ours, with the tables of a site's folder (a path object) in place of or beside them."""
    return our_catalogue() if site_folder is None else Catalogue(score_files(site_folder))


def find_score(score: str | Score, tables: Catalogue | None = None) -> Score:
    """A score by key or as itself; reserved scores are found too."""
    return score if isinstance(score, Score) else (tables or our_catalogue()).score(score)


def implemented_score(score: str | Score, tables: Catalogue | None = None) -> Score:
    """Like `find_score`, but a reserved score is refused with what is missing (SCORE.NOT-IMPLEMENTED)."""
    found = find_score(score, tables)
    if found.is_implemented:
        return found
    raise UsageError(
        "SCORE.NOT-IMPLEMENTED",
        f"{found.name} is not implemented: point table not verified",
        where=f"missing: {'; '.join(found.sheet['missing'])}",
        todo=f"read it in: {found.sheet['where_printed'] or found.sheet['citation']['text']}; then put "
        f"a table {found.key}.toml in the folder of your own score tables",
    )


def chosen_options(score: Score, options: dict[str, str] | None) -> dict[str, str]:
    """The defaults with these options in place; UsageError SCORE.OPTION for a name that does not exist."""
    chosen = defaults(score)
    for key, option in (options or {}).items():
        convention = next((c for c in score.conventions if c.key == key), None)
        known = list(convention.options) if convention else list(chosen)
        if convention is None or option not in convention.options:
            wrong = option if convention else key
            near = get_close_matches(wrong, known, n=1)
            raise UsageError(
                "SCORE.OPTION",
                f"{score.name} has no {'option' if convention else 'convention'} {wrong}",
                todo=f"did you mean {near[0]}?" if near else f"one of: {', '.join(known) or 'none'}",
            )
        chosen[key] = option
    return chosen


def list_scores(tables: Catalogue | None = None) -> pd.DataFrame:
    """One row a score: key, name, status, purpose, outcome, horizon, table (ours or site), citation."""
    rows = [
        {
            "key": score.key,
            "name": score.name,
            "status": score.status,
            "purpose": score.purpose,
            "outcome": score.outcome,
            "horizon": score.horizon,
            "table": score.whose,
            "citation": score.sheet["citation"]["text"],
        }
        for score in (tables or our_catalogue()).scores()
    ]
    columns = ["key", "name", "status", "purpose", "outcome", "horizon", "table", "citation"]
    return pd.DataFrame(rows, columns=columns, dtype="string")

"""The link file (identifiers and their surrogates) and the calendar file (when each run began): both outside the store.

Both carry the number of the batch that wrote them; which of them belong to a store is said by its ledger.
"""

from __future__ import annotations

import datetime as dt
import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from outcomes.errors import StoreProblem
from outcomes.intake.identify import Identities
from outcomes.store.files import BEFORE, require_private, sha256_of

LINK = "LINK"
CALENDAR = "CALENDAR"


@dataclass(frozen=True)
class CalendarEntry:
    """Start of support in UTC to the minute, and where the run came from."""

    start_utc: dt.datetime
    batch: int
    file_key: str
    sheet_key: str
    line: int


def generation_at(path: Path, code: str, batch: int) -> Path | None:
    """The generation of this file that belongs to a store at `batch`; None if there is no file.

    Raises StoreProblem <code>.AHEAD if neither generation belongs to the store, .DAMAGED, .READABLE, .LINKED.
    """
    for candidate in (path, Path(str(path) + BEFORE)):
        if candidate.exists():
            require_private(candidate, code)
            if _load(candidate, code)["batch"] <= batch:
                return candidate
    if path.exists() and batch > 0:
        raise StoreProblem(f"{code}.AHEAD", "the file is newer than the store", todo="restore both from the same backup")
    return None


def require_unchanged(path: Path, code: str, expected: str) -> None:
    if sha256_of(path) != expected:
        raise StoreProblem(f"{code}.CHANGED", "the file is not the one that the last import wrote", todo="restore it from a backup")


def read_identities(path: Path | None, new_key: Callable[[], str]) -> Identities:
    """Identities of a link file; fresh ones if there is none yet."""
    if path is None:
        return Identities(new_key)
    raw = _load(path, LINK)
    return Identities(new_key, raw["persons"], raw["runs"])


def identities_bytes(identities: Identities, batch: int) -> bytes:
    body = {"kind": "link", "batch": batch, "persons": identities.persons, "runs": identities.runs}
    return _canonical(body)


def read_calendar(path: Path | None) -> dict[str, CalendarEntry]:
    """Run key -> entry."""
    if path is None:
        return {}
    rows = _load(path, CALENDAR)["runs"]
    return {
        key: CalendarEntry(dt.datetime.fromisoformat(start), batch, file_key, sheet_key, line)
        for key, (start, batch, file_key, sheet_key, line) in rows.items()
    }


def calendar_bytes(entries: dict[str, CalendarEntry], batch: int) -> bytes:
    rows = {
        key: [e.start_utc.isoformat(timespec="minutes"), e.batch, e.file_key, e.sheet_key, e.line]
        for key, e in entries.items()
    }
    return _canonical({"kind": "calendar", "batch": batch, "runs": rows})


def _canonical(body: dict[str, Any]) -> bytes:
    return (json.dumps(body, sort_keys=True, ensure_ascii=False, indent=0) + "\n").encode("utf-8")


def _load(path: Path, code: str) -> dict[str, Any]:
    try:
        body = json.loads(path.read_bytes())
        ok = isinstance(body, dict) and body.get("kind") == code.lower() and isinstance(body.get("batch"), int)
    except (ValueError, RecursionError):
        ok = False
    if not ok:
        raise StoreProblem(f"{code}.DAMAGED", "the file cannot be read", todo="restore it from a backup")
    return dict(body)

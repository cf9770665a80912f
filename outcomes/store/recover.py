"""After an interrupted import: the store decides, link file and calendar file follow it, leftovers are swept."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from outcomes.errors import StoreProblem
from outcomes.store.connect import connect, open_for_reading
from outcomes.store.files import (
    BEFORE,
    beside,
    drop_before,
    fsync_folder,
    put_in_place,
    require_private,
    sha256_of,
    sweep,
    write_private,
)
from outcomes.store.ledger import batch_number, verify
from outcomes.store.linkfile import CALENDAR, LINK, require_unchanged


@dataclass(frozen=True)
class Places:
    """Where the three files are. They lie apart on purpose if the programme wants it so."""

    store: Path
    link: Path
    calendar: Path

    @staticmethod
    def beside(store: Path, link: Path | None = None, calendar: Path | None = None) -> Places:
        return Places(store, link or Path(str(store) + ".link"), calendar or Path(str(store) + ".calendar"))


def current_batch(places: Places) -> int:
    """Batch of the store, verified against its ledger; 0 if there is no store."""
    if not places.store.exists() and not places.store.is_symlink():
        return 0
    con = open_for_reading(places.store)
    try:
        verify(con)
        return batch_number(con)
    finally:
        con.close()


def recover(places: Places) -> int:
    """Bring the three files back together after a kill; only under the lock. Returns the store's batch.

    Raises StoreProblem WAL.FOUND if a write-ahead log lies beside the store: this program never leaves one, so something
    else has written to it; it is put aside, never replayed.
    """
    wal = Path(str(places.store) + ".wal")
    if wal.exists():
        aside = Path(str(places.store) + ".wal.quarantine")
        wal.replace(aside)
        raise StoreProblem(
            "STORE.LOG-FOUND",
            "a write-ahead log lay beside the store; another program has written to it",
            todo="it was put aside with the ending .quarantine; run the command again to use the store as its ledger knows it",
        )
    sweep(places.store)
    for path in (places.link, places.calendar):
        beside(path).unlink(missing_ok=True)
    batch = current_batch(places)
    mark = pending_mark(places.store)
    if mark.exists():
        _settle(places, mark.read_text("utf-8").split(), batch)
        mark.unlink()
    if batch:
        _require_companions(places)
    return batch


def put_all_in_place(places: Places, batch: int, new: Path, link: Path, calendar: Path | None) -> None:
    """Let the three new files take the places of the old ones, the store last: it decides which generation holds.

    Wherever this stops, `recover` finds out by the mark.
    """
    mark = pending_mark(places.store)
    write_private(mark, mark_of(places, batch, link, calendar))
    fsync_folder(mark.parent)
    put_in_place(link, places.link)
    if calendar is not None:
        put_in_place(calendar, places.calendar)
    put_in_place(new, places.store)
    for path in (places.link, places.calendar, places.store):
        drop_before(path)
    mark.unlink()


def pending_mark(store: Path) -> Path:
    """A file that exists while the three files are being replaced, and says which companions are the new ones.

    Only those may be undone. A link file whose store is gone belongs to a lost store, and is kept: nobody may lose it.
    """
    return store.parent / f".{store.name}.pending"


def mark_of(places: Places, batch: int, link: Path, calendar: Path | None) -> bytes:
    """Content of the mark: the batch under way, then of link file and calendar file the new hash and whether there was one."""
    words = [str(batch)]
    for new, path in ((link, places.link), (calendar, places.calendar)):
        words += [sha256_of(new) if new else "-", "replaced" if path.exists() else "made"]
    return " ".join(words).encode()


def _settle(places: Places, mark: list[str], batch: int) -> None:
    """The store decides: if it is still the old one, its companions step back; then no earlier generation is needed.

    A mark that is not complete was being written when the program died: nothing had been replaced yet.
    """
    if len(mark) == 5 and int(mark[0]) > batch:
        _step_back(places.link, mark[1], mark[2])
        _step_back(places.calendar, mark[3], mark[4])
    for path in (places.link, places.calendar, places.store):
        drop_before(path)


def _step_back(path: Path, new: str, was: str) -> None:
    """Undo the replacement of one companion, if it had come to that."""
    if not path.exists() or sha256_of(path) != new:
        return
    before = Path(str(path) + BEFORE)
    if before.exists():
        before.replace(path)
    elif was == "made":
        path.unlink()


def _require_companions(places: Places) -> None:
    """The link file must be the one that the last import wrote; so must the calendar file, if it is there at all."""
    con = connect(places.store, read_only=True)
    try:
        row = con.execute("select link_sha256, calendar_sha256 from ledger.batch order by batch_no desc limit 1").fetchone()
    finally:
        con.close()
    if row is None:
        return
    if not places.link.exists():
        raise StoreProblem(
            "LINK.ABSENT",
            "the link file of this store is not there",
            todo="restore it; without it known people would get new surrogates, so nothing was imported",
        )
    require_private(places.link, LINK)
    require_unchanged(places.link, LINK, row[0])
    if places.calendar.exists():
        require_private(places.calendar, CALENDAR)
        require_unchanged(places.calendar, CALENDAR, row[1] or "")

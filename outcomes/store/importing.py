"""Hop 3: one import from files to a new store, all or nothing."""

from __future__ import annotations

import datetime as dt
import os
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import BinaryIO

import duckdb

from outcomes.errors import DataRefused, UsageError
from outcomes.findings import Finding, in_order
from outcomes.intake.mapping import Mapping
from outcomes.intake.take_in import Intake, Opener, take_in
from outcomes.intake.unit_evidence import require_units
from outcomes.store import files
from outcomes.store.build import fill_ledger, fill_store
from outcomes.store.checks import refresh_set_aside, run_checks
from outcomes.store.connect import SCHEMA_VERSION, connect, harden, open_for_reading, translate
from outcomes.store.ledger import verify, write_states
from outcomes.store.linkfile import (
    CalendarEntry,
    calendar_bytes,
    identities_bytes,
    read_calendar,
    read_identities,
)
from outcomes.store.merge import Merge, compare, note_carried_before
from outcomes.store.recover import Places, put_all_in_place, recover
from outcomes.store.run_order import run_order
from outcomes.store.schema import create_store
from outcomes.store.settle import Counts, apply_effects, list_findings, settle_keys, settle_rows
from outcomes.store.workbench import Workbench


@dataclass(frozen=True)
class Imported:
    """What one import (or one check without storing) found and did."""

    batch: int
    stored: bool
    counts: Counts
    findings: tuple[Finding, ...]
    checks: tuple[dict[str, object], ...]
    merge: Merge
    already: int = 0

    @property
    def refusals(self) -> list[Finding]:
        return [f for f in self.findings if f.effect != "note"]


@dataclass(frozen=True)
class Request:
    """One import as the command line asks for it. paths: file key of the mapping -> file."""

    places: Places
    mapping: Mapping
    paths: dict[str, Path]
    set_aside: bool = False
    replace: bool = False
    store_it: bool = True
    new_key: Callable[[], str] = lambda: os.urandom(16).hex()
    progress: Callable[[str, int], None] = lambda sheet, rows: None


def run_import(request: Request) -> Imported:
    """Import one batch. Raises DataRefused with all findings if the policy is strict and anything must be set aside.

    The store, the link file and the calendar file are the old ones or the new ones, whatever happens.
    """
    os.umask(0o077)
    store = request.places.store
    with files.told_by_the_system(), files.writer_lock(store):
        batch = recover(request.places)
        hashes = _hashes(request.paths)
        known = _already(store, batch, hashes, request.mapping.digest)
        if known and request.store_it and not request.replace:
            return Imported(known, False, Counts(0, 0, 0, 0), (), (), Merge(0, 0, 0), already=known)
        with files.work_folder(store) as folder:
            job = _Job(request, folder, batch)
            try:
                return job.run(hashes)
            except duckdb.Error as error:
                raise translate(error) from error
            finally:
                job.close()


def _hashes(paths: dict[str, Path]) -> list[tuple[str, str, int]]:
    try:
        return [(key, files.sha256_of(path), path.stat().st_size) for key, path in sorted(paths.items())]
    except OSError:
        raise UsageError("USAGE.FILE", "a file of the source cannot be read", todo="look at its permissions") from None


def _already(store: Path, batch: int, hashes: list[tuple[str, str, int]], mapping_sha256: str) -> int:
    """Number of the batch that brought exactly these files with exactly this mapping; 0 if none did."""
    if not batch:
        return 0
    con = open_for_reading(store)
    try:
        for (number,) in con.execute("select batch_no from ledger.batch where mapping_sha256 = ? order by batch_no", [mapping_sha256]).fetchall():
            rows = con.execute("select file_key, sha256, bytes from ledger.batch_file where batch_no = ? order by file_key", [number]).fetchall()
            if rows == hashes:
                return int(number)
    finally:
        con.close()
    return 0


class _Job:
    """The steps of one import; each is short, and what they share is here."""

    def __init__(self, request: Request, folder: Path, batch: int) -> None:
        self.request = request
        self.folder = folder
        self.old_batch = batch
        self.batch = batch + 1
        self.con = connect(folder / "bench.duckdb", read_only=False, spill=folder)
        if batch:
            self.con.execute("attach '" + str(request.places.store).replace("'", "''") + "' as old (read_only)")
        self.identities = read_identities(self._known_link(), request.new_key)
        self.calendar = read_calendar(request.places.calendar if request.places.calendar.exists() and batch else None)
        self.intake: Intake | None = None

    def _known_link(self) -> Path | None:
        """The link file of this store; or one whose store is gone: the same people then get the same keys again."""
        link = self.request.places.link
        if not link.exists():
            return None
        files.require_private(link, "LINK")
        return link

    def close(self) -> None:
        if self.intake is not None:
            self.intake.close()
        self.con.close()
        for path in (self.request.places.link, self.request.places.calendar):
            files.beside(path).unlink(missing_ok=True)

    def run(self, hashes: list[tuple[str, str, int]]) -> Imported:
        source = self.request.mapping.source
        bench = self._stage()
        settle_keys(self.con)
        bench.make_candidates(source.key, source.plan_written == "at start", bool(self.old_batch))
        checks = run_checks(self.con, self.request.mapping.carried_fields)
        apply_effects(self.con)
        refresh_set_aside(self.con)
        counts = settle_rows(self.con)
        assert self.intake is not None
        findings = in_order([*list_findings(self.con, self.batch), *self.intake.notes])
        self._refuse(findings, counts)
        note_carried_before(self.con, source.key, bool(self.old_batch))
        merge = compare(self.con, self.request.mapping, old=bool(self.old_batch), replace=self.request.replace, batch=self.batch)
        if not self.request.store_it or (merge.nothing_new and self.old_batch and not self._new_set_aside()):
            return Imported(self.old_batch, False, counts, tuple(findings), tuple(checks), merge)
        self._write(counts, merge, hashes, findings)
        return Imported(self.batch, True, counts, tuple(findings), tuple(checks), merge)

    def _stage(self) -> Workbench:
        bench = Workbench(self.con)
        starts = {key: entry.start_utc for key, entry in self.calendar.items()}
        stored, accepted = self._stored_runs(), self._accepted_runs()
        timed = {k: s for k, s in starts.items() if k in accepted}
        openers: dict[str, Opener] = {key: partial(_open, path) for key, path in self.request.paths.items()}
        self.intake = take_in(self.request.mapping, openers, self.identities, timed, bench.sink, self.request.progress)
        staging = self.intake.staging.con
        require_units(staging)
        self.intake.numbers.fill_persons(stored)
        bench.receive(self.intake)
        bench.copy_order(run_order(self.intake, stored, starts, staging))
        self._note_calendar(staging)
        return bench

    def _stored_runs(self) -> dict[str, str]:
        if not self.old_batch:
            return {}
        return dict(self.con.execute(
            "select run_key, person_key from old.record.support_run union all select run_key, person_key from old.record.set_aside_run"
        ).fetchall())  # fmt: skip

    def _accepted_runs(self) -> frozenset[str]:
        """Runs with data in the store: only they can be spoken of without a start of their own."""
        if not self.old_batch:
            return frozenset()
        return frozenset(k for (k,) in self.con.execute("select run_key from old.record.support_run").fetchall())

    def _note_calendar(self, staging: duckdb.DuckDBPyConnection) -> None:
        """Starts of this batch; only accepted runs are kept when the file is written."""
        assert self.intake is not None
        rows = staging.execute(
            """select r.run_no, r.start_utc, s.file_key, s.sheet_key, r.line from staging.run_start r
            join staging.sheet s using (sheet_no) order by r.run_no"""
        ).fetchall()
        keys = self.intake.numbers.run_keys
        self.fresh: dict[str, CalendarEntry] = {
            keys[no]: CalendarEntry(_naive(start), self.batch, file_key, sheet_key, line)
            for no, start, file_key, sheet_key, line in rows
        }

    def _refuse(self, findings: list[Finding], counts: Counts) -> None:
        refused = [f for f in findings if f.effect != "note"]
        if refused and not self.request.set_aside:
            raise DataRefused(
                "IMPORT.REFUSED",
                f"{len(refused)} findings in {counts.rows_read} rows; nothing was stored",
                where=f"{counts.rows_set_aside} rows would be set aside whole",
                todo="correct the source, or import again with --set-aside to keep the good rows",
                findings=findings,
            )

    def _new_set_aside(self) -> bool:
        row = self.con.execute(
            """select count(*) from work.set_aside where run_key not in
            (select run_key from old.record.set_aside_run union all select run_key from old.record.support_run)"""
        ).fetchone()
        return bool(row and row[0])

    def _write(self, counts: Counts, merge: Merge, hashes: list[tuple[str, str, int]], findings: list[Finding]) -> None:
        new = self.folder / "new.duckdb"
        self.con.execute("attach '" + str(new).replace("'", "''") + "' as new (block_size 16384)")
        harden(self.con)
        self.con.execute("begin")
        create_store(self.con, "new")
        self.con.execute("use bench")
        fill_store(self.con, self.request.mapping, old=bool(self.old_batch))
        link, calendar = self._companions()
        values = self._batch_values(counts, merge, link, calendar)
        fill_ledger(self.con, values, hashes, findings, self.request.mapping, old=bool(self.old_batch))
        write_states(self.con, self.batch, SCHEMA_VERSION, "new")
        self.con.execute("commit")
        self.con.execute("checkpoint new")
        self.con.execute("detach new")
        os.chmod(new, 0o600)
        _verify_new(new)
        files.fsync_file(new)
        places = self.request.places
        put_all_in_place(places, self.batch, new, link, calendar)

    def _companions(self) -> tuple[Path, Path | None]:
        """New link file and calendar file in the work folder; identifiers of rows that were not stored are forgotten."""
        assert self.intake is not None
        kept = {k for (k,) in self.con.execute(
            """select run_key from new.record.support_run union all select run_key from new.record.set_aside_run
            union all select attempt_key from new.record.cannulation_attempt"""
        ).fetchall()}  # fmt: skip
        people = {k for (k,) in self.con.execute(
            """select person_key from new.record.support_run union all select person_key from new.record.set_aside_run
            union all select person_key from new.record.cannulation_attempt"""
        ).fetchall()}  # fmt: skip
        self.identities.forget(kept | people)
        link = files.beside(self.request.places.link)
        files.write_private(link, identities_bytes(self.identities, self.batch))
        if self.request.mapping.source.calendar == "decline" and not self.calendar:
            return link, None
        entries = dict(self.calendar)
        if self.request.mapping.source.calendar == "keep":
            entries.update({k: e for k, e in self.fresh.items() if k in kept})
        calendar = files.beside(self.request.places.calendar)
        files.write_private(calendar, calendar_bytes(entries, self.batch))
        return link, calendar

    def _batch_values(self, counts: Counts, merge: Merge, link: Path, calendar: Path | None) -> dict[str, object]:
        source = self.request.mapping.source
        return {
            "batch_no": self.batch, "source_key": source.key, "mapping_sha256": self.request.mapping.digest,
            "policy": "set aside" if self.request.set_aside else "strict", "extent": source.extent,
            "period_from": source.period[0], "period_to": source.period[1], "extract_date": source.extract_date,
            "vital_status_checked": source.vital_status_checked, "rows_read": counts.rows_read,
            "rows_accepted": counts.rows_accepted, "rows_set_aside": counts.rows_set_aside,
            "rows_duplicate": counts.rows_duplicate, "runs_new": merge.new, "runs_unchanged": merge.unchanged,
            "runs_replaced": merge.changed, "link_sha256": files.sha256_of(link),
            "calendar_sha256": files.sha256_of(calendar) if calendar else None,
        }  # fmt: skip


def _open(path: Path) -> BinaryIO:
    return path.open("rb")


def _naive(moment: dt.datetime) -> dt.datetime:
    return moment.replace(tzinfo=None)


def _verify_new(path: Path) -> None:
    """The new file must stand alone and say what its ledger says before it takes the old one's place."""
    con = open_for_reading(path)
    try:
        verify(con)
    finally:
        con.close()

"""The replacement of the three files, stopped at every step: afterwards they are all old or all new, and clean."""

from __future__ import annotations

import errno
import os
import shutil
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest
from import_made import ROWS, SOURCE, Desk, Mapped

from outcomes.errors import OutcomesError
from outcomes.store import importing
from outcomes.store.recover import Places, put_all_in_place, recover

pytestmark = pytest.mark.thorough

STEPS = ("replace", "link", "unlink", "fsync", "open")
MORE = [ROWS[0].replace("1,A11", "8,A18")]


class Stopped(BaseException):
    """Like a kill: nothing in the program may catch it."""


@dataclass
class Prepared:
    """Both generations: files as they were, and the new ones as they lie ready before the first is put in place."""

    folder: Path
    batch: int
    old: dict[str, bytes] = field(default_factory=dict)
    new: dict[str, bytes] = field(default_factory=dict)

    def lay_out(self, folder: Path) -> tuple[Places, Path, Path, Path]:
        """A fresh folder with the old generation in place and the new one ready."""
        shutil.rmtree(folder, ignore_errors=True)
        work = folder / ".unit.duckdb.work-00"
        work.mkdir(parents=True)
        for name, data in self.old.items():
            _write(folder / name, data)
        places = Places.beside(folder / "unit.duckdb")
        ready = (work / "new.duckdb", Path(f"{places.link}.new"), Path(f"{places.calendar}.new"))
        for path, name in zip(ready, ("unit.duckdb", "unit.duckdb.link", "unit.duckdb.calendar"), strict=True):
            _write(path, self.new[name])
        return (places, *ready)

    def generation(self, folder: Path) -> str:
        found = {p.name: p.read_bytes() for p in folder.iterdir() if p.name in self.new}
        assert found in (self.old, self.new), {name: len(data) for name, data in found.items()}
        return "old" if found == self.old else "new"


def _write(path: Path, data: bytes) -> None:
    path.write_bytes(data)
    path.chmod(0o600)


@contextmanager
def stopping(at: int, error: Callable[[], BaseException], *, for_ever: bool = False) -> Iterator[list[int]]:
    """The operating system's file calls, of which number `at` (and with for_ever all later ones) fails instead."""
    count = [0]
    kept = {name: getattr(os, name) for name in STEPS}

    def wrap(real: Callable[..., Any]) -> Callable[..., Any]:
        def call(*given: Any, **options: Any) -> Any:
            count[0] += 1
            if count[0] == at or (for_ever and count[0] > at):
                raise error()
            return real(*given, **options)

        return call

    try:
        for name, real in kept.items():
            setattr(os, name, wrap(real))
        yield count
    finally:
        for name, real in kept.items():
            setattr(os, name, real)


def prepared(desk: Desk, monkeypatch: pytest.MonkeyPatch, rows: list[str]) -> Prepared:
    """One real import, its files taken just before the replacement."""
    batch = 2 if desk.store.exists() else 1
    taken = Prepared(desk.folder, batch, old=desk.state())

    def take(places: Places, batch: int, new: Path, link: Path, calendar: Path | None) -> None:
        assert calendar is not None
        for name, path in (("unit.duckdb", new), ("unit.duckdb.link", link), ("unit.duckdb.calendar", calendar)):
            taken.new[name] = path.read_bytes()
        put_all_in_place(places, batch, new, link, calendar)

    monkeypatch.setattr(importing, "put_all_in_place", take)
    assert desk.bring(Mapped(source=SOURCE | {"extent": '"addition"'}), rows)[0] == 0
    assert desk.state() == taken.new
    return taken


def clean(folder: Path) -> list[str]:
    return sorted(p.name for p in folder.iterdir() if p.name not in ("unit.duckdb", "unit.duckdb.link", "unit.duckdb.calendar"))


def stop_everywhere(both: Prepared, folder: Path, error: Callable[[], BaseException], *, for_ever: bool) -> list[str]:
    """Stop at step 1, 2, … until the replacement is through; give the generation that each recovery found."""
    found = []
    for step in range(1, 200):
        given = both.lay_out(folder)
        try:
            with stopping(step, error, for_ever=for_ever):
                put_all_in_place(given[0], both.batch, *given[1:])
        except (Stopped, OSError):
            recover(given[0])
            assert clean(folder) == []
            found.append(both.generation(folder))
        else:
            return found
    raise AssertionError("the replacement never ended")


@pytest.mark.parametrize("for_ever", [False, pytest.param(True, marks=pytest.mark.slow)], ids=["once", "for ever"])
def test_a_later_import_stopped_at_any_step_leaves_all_old_or_all_new(
    stocked: Desk, monkeypatch: pytest.MonkeyPatch, tmp_path: Path, for_ever: bool
) -> None:
    both = prepared(stocked, monkeypatch, MORE)
    found = stop_everywhere(both, tmp_path / "stopped", Stopped, for_ever=for_ever)
    assert len(found) > 12
    assert found == sorted(found, reverse=True) and {"old", "new"} == set(found)


def test_a_first_import_stopped_at_any_step_leaves_nothing_or_all(
    desk: Desk, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    both = prepared(desk, monkeypatch, ROWS)
    found = stop_everywhere(both, tmp_path / "stopped", lambda: OSError(errno.EIO, "broken"), for_ever=False)
    assert {"old", "new"} == set(found) and both.old == {}


def test_a_first_import_beside_the_link_file_of_a_lost_store_never_costs_it(
    stocked: Desk, monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    stocked.store.unlink()
    stocked.calendar.unlink()
    both = prepared(stocked, monkeypatch, ROWS)
    assert set(both.old) == {"unit.duckdb.link"}
    assert {"old", "new"} == set(stop_everywhere(both, tmp_path / "stopped", Stopped, for_ever=False))


def test_a_disk_that_is_full_at_any_step_is_said_and_costs_nothing(stocked: Desk) -> None:
    """The command itself, early and late: its exit code, its words, and that the next command cleans up."""
    before = stocked.state()
    mapped = Mapped(source=SOURCE | {"extent": '"addition"'})
    export = stocked.write("more.csv", "\n".join([mapped.header(), *MORE, ""]))
    words = ("import", stocked.write("map.toml", mapped.text()), export, "--store", str(stocked.store))
    for step in (6, 12):
        with stopping(step, lambda: OSError(errno.ENOSPC, "full"), for_ever=True):
            code, _, err = stocked.run(*words)
        assert (code, err.split(":")[0]) == (4, "STORE.DISK-FULL"), err
        recover(Places.beside(stocked.store))
        assert stocked.state() == before and stocked.leftovers() == []


@pytest.mark.slow
def test_a_recovery_that_is_stopped_too_is_taken_up_by_the_next(stocked: Desk, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    both = prepared(stocked, monkeypatch, MORE)
    folder = tmp_path / "stopped"
    for step in range(1, 40):
        for again in range(1, 20):
            given = both.lay_out(folder)
            try:
                with stopping(step, Stopped):
                    put_all_in_place(given[0], both.batch, *given[1:])
                break
            except Stopped:
                pass
            try:
                with stopping(again, Stopped):
                    recover(given[0])
                break
            except (Stopped, OutcomesError):
                recover(given[0])
            assert clean(folder) == []
            both.generation(folder)

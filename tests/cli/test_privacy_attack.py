"""What a thief of the store could work out: dates of support, order of arrival, identifiers; and who may read the files."""

from __future__ import annotations

import datetime as dt
import random
import re
import stat
from itertools import pairwise
from pathlib import Path

import pytest
from import_made import FOLLOW_UP, ROWS, SOURCE, Desk, Mapped, detail_file

from outcomes.store import recover
from outcomes.store.schema import record_columns

N = 60
FIRST = dt.datetime(2021, 1, 5, 10, 0)
SHARED = {
    "extract": dt.datetime(2024, 3, 31), "checked": dt.datetime(2024, 3, 30),
    "period from": dt.datetime(2021, 1, 1), "period to": dt.datetime(2023, 12, 31),
}  # fmt: skip


def starts() -> list[dt.datetime]:
    rng = random.Random(7)
    moments = [FIRST + dt.timedelta(days=i * 18, minutes=rng.randrange(1440)) for i in range(N)]
    return sorted(moments)


def made(desk: Desk) -> dict[str, dt.datetime]:
    """Import sixty runs in order of time, most of them alive and seen on the day of the extract; run key -> start."""
    mapped = Mapped(source=SOURCE | {"vital_status_checked": "2024-03-30"})
    mapped.more = detail_file("late", FOLLOW_UP, row_is="run")
    runs, late = [], ["Run,Status,Seen,Died on"]
    for i, start in enumerate(starts()):
        end = start + dt.timedelta(hours=60 + i)
        runs.append(f"{i},P{i},1960-05-01,M,80,{start:%Y-%m-%d %H:%M},{end:%Y-%m-%d %H:%M},Recovered,yes,4.5,")
        seen = SHARED["extract"] if i % 2 else SHARED["checked"]
        late.append(f"{i},alive,{seen:%Y-%m-%d %H:%M},")
    code, out, err = desk.bring(mapped, runs, "\n".join([*late, ""]))
    assert code == 0, out + err
    by_minute = {start: None for start in starts()}
    assert len(by_minute) == N
    found = re.findall(r'"([0-9a-f]{32})": \[\s*"([0-9T:-]{16})"', desk.calendar.read_text())
    return {key: dt.datetime.fromisoformat(moment) for key, moment in found}


@pytest.fixture
def attacked(desk: Desk) -> tuple[Desk, dict[str, dt.datetime]]:
    return desk, made(desk)


def test_what_a_thief_of_the_store_can_work_out(attacked: tuple[Desk, dict[str, dt.datetime]]) -> None:
    desk, known = attacked
    assert len(known) == N
    _no_start_from_a_shared_date(desk, known)
    _no_order_of_arrival(desk, known)
    _no_date_outside_the_ledger(desk)
    _owner_only(desk)


def _no_start_from_a_shared_date(desk: Desk, known: dict[str, dt.datetime]) -> None:
    """Every hour column taken from every date that the source shares: never within seven days of the start."""
    near = []
    for table, columns in record_columns().items():
        for column in (c for c, _ in columns if c.endswith("_h") and "run_key" in dict(columns)):
            for key, hours in desk.ask(f'select run_key, "{column}" from record.{table} where "{column}" is not null'):
                for name, day in SHARED.items():
                    guess = day - dt.timedelta(hours=hours)
                    if abs(guess - known[key]) < dt.timedelta(days=7) and not _by_chance(day, known[key], hours):
                        near.append((table, column, name))
    assert near == []


def _by_chance(day: dt.datetime, start: dt.datetime, hours: float) -> bool:
    """A run that begins in the days around the period's limit lies near it with any small number of hours."""
    return (abs(day - start) < dt.timedelta(days=14) and hours < 14 * 24) or hours in (0.0, 720.0, 2160.0, 4320.0, 8760.0)


def _no_order_of_arrival(desk: Desk, known: dict[str, dt.datetime]) -> None:
    """Neither the order of rows in a table nor the order of keys follows the order of the starts."""
    for table in ("support_run", "support_end", "measurement", "person"):
        key = "person_key" if table == "person" else "run_key"
        rows = [k for (k,) in desk.ask(f"select {key} from record.{table} order by rowid")]
        assert rows == sorted(rows)
    ordered = sorted(known)
    rises = sum(known[a] < known[b] for a, b in pairwise(ordered))
    assert N * 0.25 < rises < N * 0.75


def _no_date_outside_the_ledger(desk: Desk) -> None:
    typed = desk.ask("select table_name, column_name from duckdb_columns() where schema_name = 'record' and (data_type like '%DATE%' or data_type like 'TIME%')")
    assert typed == []
    data = desk.store.read_bytes()
    assert not re.search(rb"20[0-9]{2}-[01][0-9]-[0-3][0-9]", data)
    assert b"P12" not in data


def _owner_only(desk: Desk) -> None:
    assert desk.modes() == {"unit.duckdb": 0o600, "unit.duckdb.link": 0o600, "unit.duckdb.calendar": 0o600}
    lock = desk.folder / ".unit.duckdb.lock"
    assert stat.S_IMODE(lock.stat().st_mode) == 0o600


def test_the_work_folder_is_for_its_owner_only(desk: Desk, monkeypatch: pytest.MonkeyPatch) -> None:
    seen: dict[str, int] = {}

    def look(path: Path) -> None:
        for folder in path.glob(".unit.duckdb.work-*"):
            seen["folder"] = stat.S_IMODE(folder.stat().st_mode)
            seen.update({p.name: stat.S_IMODE(p.stat().st_mode) for p in folder.iterdir()})

    real = recover.mark_of
    monkeypatch.setattr("outcomes.store.recover.mark_of", lambda *given: (look(desk.folder), real(*given))[1])
    assert desk.bring(Mapped(), ROWS)[0] == 0
    assert seen.pop("folder") == 0o700
    assert seen and set(seen.values()) == {0o600}


def test_two_stores_give_the_same_people_different_surrogates(stocked: Desk) -> None:
    first = set(stocked.ask("select person_key from record.person"))
    other = stocked.folder / "other.duckdb"
    assert stocked.run("import", str(stocked.folder / "map.toml"), str(stocked.folder / "export0.csv"), "--store", str(other))[0] == 0
    second = set(Desk(stocked.folder, stocked.capsys).ask("select person_key from record.person"))
    assert first == second
    keys = set(re.findall(rb"[0-9a-f]{32}", Path(str(other) + ".link").read_bytes()))
    assert not {k.encode() for (k,) in first} & keys

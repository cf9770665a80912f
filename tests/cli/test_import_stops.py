"""What stops an import whole: link and calendar files that are not right, headers, files, mappings; always coded."""

from __future__ import annotations

import fcntl
import json
import os
from pathlib import Path

import pytest
from import_made import ROWS, SOURCE, Desk, Mapped


def stopped(desk: Desk, code: int, word: str, mapped: Mapped | None = None, export: str | list[str] | None = None) -> str:
    """The import stops with this exit code and word, changes nothing and shows no traceback; returns what it printed."""
    before = desk.state()
    mapped = mapped or Mapped(source=SOURCE | {"extent": '"addition"'})
    found, out, err = desk.bring(mapped, export if export is not None else [ROWS[0].replace("1,A11", "8,A18")])
    assert (found, err.split(":")[0]) == (code, word), out + err
    assert "Traceback" not in err + out
    assert desk.state() == before and desk.leftovers() == []
    return out + err


def test_an_absent_link_file(stocked: Desk) -> None:
    stocked.link.unlink()
    stopped(stocked, 4, "LINK.ABSENT")


def test_an_empty_link_file(stocked: Desk) -> None:
    stocked.link.write_bytes(b"")
    stocked.link.chmod(0o600)
    stopped(stocked, 4, "LINK.CHANGED")


def test_a_changed_link_file(stocked: Desk) -> None:
    stocked.link.write_bytes(stocked.link.read_bytes().replace(b"A11", b"A10"))
    stopped(stocked, 4, "LINK.CHANGED")


def test_a_link_file_that_others_may_read(stocked: Desk) -> None:
    stocked.link.chmod(0o644)
    stopped(stocked, 4, "LINK.READABLE")


def test_a_link_file_that_is_a_symbolic_link(stocked: Desk) -> None:
    elsewhere = stocked.folder / "elsewhere"
    stocked.link.rename(elsewhere)
    stocked.link.symlink_to(elsewhere)
    stopped(stocked, 4, "LINK.LINKED")


def test_a_changed_calendar_file(stocked: Desk) -> None:
    stocked.calendar.write_bytes(stocked.calendar.read_bytes().replace(b"2021-03", b"2021-02"))
    stopped(stocked, 4, "CALENDAR.CHANGED")


def test_the_link_file_of_a_lost_store_is_never_lost_and_gives_the_same_keys(stocked: Desk) -> None:
    """A mistyped or lost store must not cost the link file, whatever the import comes to."""
    people = json.loads(stocked.link.read_text())["persons"]
    keys = {k for (k,) in stocked.ask("select run_key from record.support_run")}
    stocked.store.unlink()
    stocked.calendar.unlink()
    stopped(stocked, 3, "IMPORT.REFUSED", export=[ROWS[0].replace("10:00,2021-03-05", "10:00,2020-03-05")])
    assert json.loads(stocked.link.read_text())["persons"] == people
    assert stocked.bring(Mapped(), ROWS[:2])[0] == 0
    assert json.loads(stocked.link.read_text())["persons"] == people
    assert {k for (k,) in stocked.ask("select run_key from record.support_run")} < keys


@pytest.mark.parametrize("name", ["store", "foreign", "empty"])
def test_a_file_that_is_no_store_of_ours(stocked: Desk, name: str) -> None:
    if name == "store":
        data = bytearray(stocked.store.read_bytes())
        for place in range(20_000, len(data), 5_000):
            data[place] ^= 0xFF
        stocked.store.write_bytes(bytes(data))
    else:
        stocked.store.write_bytes(b"" if name == "empty" else b"something else, long enough")
    words = {"store": "STORE.DAMAGED", "foreign": "STORE.FOREIGN", "empty": "STORE.EMPTY"}
    stopped(stocked, 4, words[name])


def test_a_write_ahead_log_is_put_aside_and_never_replayed(stocked: Desk) -> None:
    log = Path(str(stocked.store) + ".wal")
    log.write_bytes(b"anything")
    stopped(stocked, 4, "STORE.LOG-FOUND")
    assert not log.exists() and Path(str(log) + ".quarantine").exists()
    assert stocked.run("summary", "--store", str(stocked.store))[0] == 0


def test_a_header_that_the_mapping_does_not_list_is_named_by_place_and_shape_only(desk: Desk) -> None:
    mapped = Mapped()
    body = "\n".join([mapped.header() + ",Smith Anna 1951", *(row + ",x" for row in ROWS), ""])
    printed = stopped(desk, 3, "HEADER.MISMATCH", mapped, body)
    assert "column 12" in printed and "Aaaaa Aaaa 9999" in printed
    assert "Smith" not in printed and "1951" not in printed


def test_a_header_that_the_mapping_lists_is_named(desk: Desk) -> None:
    mapped = Mapped()
    rows = [",".join(row.split(",")[:4] + row.split(",")[5:]) for row in ROWS]
    body = "\n".join([mapped.header().replace(",Weight", ""), *rows, ""])
    assert "Weight" in stopped(desk, 3, "HEADER.MISMATCH", mapped, body)


def test_headers_match_after_trimming_folding_and_normalising(desk: Desk) -> None:
    header = Mapped().header().replace("Weight", " WEIGHT ").replace("Sex", "sex")
    assert desk.bring(Mapped(), "\n".join([header, *ROWS, ""]))[0] == 0


def test_left_out_columns_are_not_read(desk: Desk) -> None:
    mapped = Mapped(leave_out='["Remarks"]')
    body = "\n".join([mapped.header() + ",Remarks", *(row + ",fell ill in Ulm" for row in ROWS), ""])
    assert desk.bring(mapped, body)[0] == 0
    assert b"Ulm" not in b"".join(desk.state().values())


@pytest.mark.parametrize(
    ("change", "says"),
    [({"time_zone": '"Mars/Base"'}, "time_zone"), ({"extent": '"some"'}, "extent"), ({"key": '"?"'}, "source.key"),
     ({"period": "[2023-01-01, 2021-01-01]"}, "period"), ({"surplus": "1"}, "surplus")],
)  # fmt: skip
def test_a_mapping_with_a_mistake_names_its_place(desk: Desk, change: dict[str, str], says: str) -> None:
    code, _, err = desk.bring(Mapped(source=SOURCE | change), ROWS)
    assert code == 2 and says in err and "MAPPING." in err and desk.state() == {}


def test_a_field_that_two_run_sheets_give_is_a_mistake_of_the_mapping(desk: Desk) -> None:
    from_first = Mapped()
    again = from_first.sheet().replace('key = "runs"', 'key = "again"').replace("position = 1", "position = 2")
    from_first.more = again
    code, _, err = desk.bring(from_first, ROWS)
    assert code == 2 and "gives support_end.kind, which the sheet runs gives already" in err


@pytest.mark.parametrize(
    ("words", "code"),
    [((), 0), (("nonsense",), 2), (("import",), 2), (("import", "absent.toml", "absent.csv"), 2), (("summary", "--store", "absent.duckdb"), 4),
     (("describe", "CELL.LIMIT"), 0), (("describe", "no such word"), 2), (("summary", "--unknown"), 2)],
)  # fmt: skip
def test_exit_codes_and_no_traceback(desk: Desk, words: tuple[str, ...], code: int, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(desk.folder)
    found, out, err = desk.run(*words)
    assert found == code and "Traceback" not in out + err
    assert len(err.splitlines()) <= 3


def test_a_file_that_cannot_be_read_and_a_folder_that_cannot_be_written(stocked: Desk, monkeypatch: pytest.MonkeyPatch) -> None:
    real = os.open

    def refuses(path: object, *more: object, **options: object) -> int:
        if str(path).endswith(".lock"):
            raise PermissionError(13, "no", str(path))
        return real(path, *more, **options)  # type: ignore[arg-type]

    monkeypatch.setattr("outcomes.store.files.os.open", refuses)
    stopped(stocked, 4, "STORE.NOT-WRITABLE")


def test_files_on_another_disk(stocked: Desk, tmp_path: Path) -> None:
    """Link and calendar file may lie on a disk of their own."""
    other = Path("/dev/shm")
    if not other.is_dir() or other.stat().st_dev == tmp_path.stat().st_dev:
        pytest.skip("there is only one disk here")
    link, calendar = other / f"{tmp_path.name}-link", other / f"{tmp_path.name}-calendar"
    try:
        places = ("--link", str(link), "--calendar", str(calendar))
        store = stocked.folder / "apart.duckdb"
        code, out, err = stocked.run("import", str(stocked.folder / "map.toml"), str(stocked.folder / "export0.csv"), "--store", str(store), *places)
        assert code == 0, out + err
        assert link.exists() and calendar.exists()
    finally:
        link.unlink(missing_ok=True)
        calendar.unlink(missing_ok=True)


def test_another_writer_makes_the_import_wait_and_then_give_up(stocked: Desk, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("outcomes.store.files.time.sleep", lambda seconds: None)
    handle = os.open(stocked.folder / ".unit.duckdb.lock", os.O_RDWR | os.O_CREAT)
    try:
        fcntl.flock(handle, fcntl.LOCK_EX)
        stopped(stocked, 5, "STORE.BUSY")
    finally:
        os.close(handle)

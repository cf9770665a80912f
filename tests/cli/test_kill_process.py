"""A process that is killed in the middle of an import: store, link file and calendar file stay one generation."""

from __future__ import annotations

import os
import random
import shutil
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from import_made import ROWS, SOURCE, Desk, Mapped

ROOT = Path(__file__).parents[2]
MORE = [ROWS[0].replace("1,A11", f"{n},B{n}") for n in range(20, 60)]
# The child waits for a line when everything is loaded, so that a kill falls into the import and not before it.
CHILD = """
import sys
import outcomes.command.import_files
from outcomes import cli

print("ready", flush=True)
sys.stdin.readline()
sys.exit(cli.main(sys.argv[1:]))
"""


def start(desk: Desk) -> subprocess.Popen[bytes]:
    words = ["import", str(desk.folder / "map.toml"), str(desk.folder / "more.csv"), "--store", str(desk.store)]
    child = subprocess.Popen(
        [sys.executable, "-c", CHILD, *words], cwd=ROOT, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )  # fmt: skip
    assert child.stdout is not None and child.stdin is not None
    assert child.stdout.readline() == b"ready\n"
    child.stdin.write(b"go\n")
    child.stdin.flush()
    return child


def end(child: subprocess.Popen[bytes], after: float | None) -> int:
    """Exit code; negative if it was killed."""
    if after is not None:
        time.sleep(after)
        child.send_signal(signal.SIGKILL)
    code = child.wait(timeout=60)
    for stream in (child.stdin, child.stdout):
        if stream is not None:
            stream.close()
    return code


def lay_out(stocked: Desk, folder: Path) -> Desk:
    shutil.rmtree(folder, ignore_errors=True)
    folder.mkdir()
    desk = Desk(folder, stocked.capsys)
    for path in (stocked.store, stocked.link, stocked.calendar):
        shutil.copy2(path, folder / path.name)
    mapped = Mapped(source=SOURCE | {"extent": '"addition"'})
    desk.write("map.toml", mapped.text())
    desk.write("more.csv", "\n".join([mapped.header(), *MORE, ""]))
    return desk


def kills(stocked: Desk, folder: Path, times: int, seed: int) -> set[str]:
    """Kill `times` imports at random moments of their duration; which generations were found afterwards."""
    desk = lay_out(stocked, folder)
    old = desk.state()
    began = time.monotonic()
    assert end(start(desk), None) == 0
    lasts = time.monotonic() - began
    rng = random.Random(seed)
    found = set()
    for _ in range(times):
        desk = lay_out(stocked, folder)
        end(start(desk), rng.uniform(0.02, lasts))
        assert desk.run("summary", "--store", str(desk.store))[0] == 0
        code, _, err = desk.run("check", str(desk.folder / "map.toml"), str(desk.folder / "more.csv"), "--store", str(desk.store))
        assert code == 0, err
        assert desk.leftovers() == []
        batch, runs = desk.ask("select batch_no, (select count(*) from record.support_run) from ledger.store")[0]
        assert (batch, runs) in ((1, len(ROWS)), (2, len(ROWS) + len(MORE)))
        if batch == 1:
            assert desk.state() == old
        else:
            assert all(f'"B{n}"' in desk.link.read_text() for n in range(20, 60))
        found.add("old" if batch == 1 else "new")
    return found


def test_two_kills(stocked: Desk, tmp_path: Path) -> None:
    assert kills(stocked, tmp_path / "killed", 2, seed=5) <= {"old", "new"}


@pytest.mark.slow
def test_many_kills(stocked: Desk, tmp_path: Path) -> None:
    assert kills(stocked, tmp_path / "killed", 60, seed=11) == {"old", "new"}

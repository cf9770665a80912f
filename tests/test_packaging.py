"""The wheel holds everything that the program reads, and works from a folder that is not the checkout."""

from __future__ import annotations

import importlib.util
import os
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]


def built_wheel(folder: Path) -> Path:
    """A wheel built by the declared backend, without any network."""
    code = f"import sys; from hatchling.build import build_wheel; print(build_wheel({str(folder)!r}))"
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stderr[-2000:]
    return folder / done.stdout.strip().splitlines()[-1]


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    if importlib.util.find_spec("hatchling") is None and not os.environ.get("CI"):
        pytest.skip("the build backend hatchling is not installed here; CI builds the wheel")
    return built_wheel(tmp_path_factory.mktemp("wheel"))


def test_the_wheel_holds_every_file_that_the_program_reads(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as archive:
        inside = {n for n in archive.namelist() if ".dist-info/" not in n}
    wanted = {
        f"{target}/{path.relative_to(ROOT / source).as_posix()}"
        for source, target in (("outcomes", "outcomes"), ("synthetic_cohort", "synthetic_cohort"),
                               ("sql", "outcomes/_shipped/sql"), ("reports", "outcomes/_shipped/reports"))
        for path in (ROOT / source).rglob("*")
        if path.is_file() and "__pycache__" not in path.parts and not path.name.startswith(".")
    }  # fmt: skip
    assert wanted - inside == set()
    assert {name.split("/")[0] for name in inside} == {"outcomes", "synthetic_cohort"}
    assert not [name for name in inside if name.endswith((".duckdb", ".link", ".calendar", ".html", ".pyc"))]


def test_the_program_runs_from_the_wheel_alone(wheel: Path, tmp_path: Path) -> None:
    """Unpacked into a fresh folder: the shipped SQL, scores, reports and mappings are the wheel's own."""
    target, here = tmp_path / "target", tmp_path / "here"
    here.mkdir()
    with zipfile.ZipFile(wheel) as archive:
        archive.extractall(target)
    say = (
        "import outcomes.resources as r, outcomes.cli as c, synthetic_cohort as s\n"
        "from outcomes.store.schema import record_columns\n"
        f"assert str(r.shipped('sql')).startswith({str(target)!r}), r.shipped('sql')\n"
        "assert record_columns() and r.score_files() and r.report_files('annual_audit')\n"
        f"assert s.__file__.startswith({str(target)!r})\n"
        "from synthetic_cohort.mapping import mapping_text\n"
        "raise SystemExit(c.main(['describe', 'limb_ischaemia']))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", say], cwd=here, env={**os.environ, "PYTHONPATH": str(target)}, capture_output=True, text=True, timeout=120, check=False
    )
    assert done.returncode == 0, done.stderr[-2000:]
    assert "limb ischaemia" in done.stdout

"""Where the shipped folders are, from a wheel or from a checkout; and the only code that lists them."""

from __future__ import annotations

from functools import cache
from pathlib import Path

from outcomes.errors import OutcomesError

_PACKAGE = Path(__file__).resolve().parent


@cache
def shipped(name: str) -> Path:
    """Folder `sql` or `reports`: inside the wheel, else beside the package in a checkout."""
    for candidate in (_PACKAGE / "_shipped" / name, _PACKAGE.parent / name):
        if candidate.is_dir():
            return candidate
    raise OutcomesError("INTERNAL.SHIPPED", f"the shipped folder {name} is missing", todo="install again")


def sql_files(topic: str) -> list[tuple[str, str]]:
    """(stem path inside the topic, text) of every .sql file below sql/<topic>, in name order."""
    root = shipped("sql") / topic
    found = sorted(root.rglob("*.sql"))
    return [(p.relative_to(root).with_suffix("").as_posix(), p.read_text(encoding="utf-8")) for p in found]


def score_files(site_folder: Path | None = None) -> list[tuple[str, str, str]]:
    """(key, text, whose) of every score table, ours first; a site's file of the same key replaces ours."""
    tables: dict[str, tuple[str, str, str]] = {}
    folders = [(_PACKAGE / "scores", "ours")] + ([(site_folder, "site")] if site_folder else [])
    for folder, whose in folders:
        for path in sorted(folder.glob("*.toml")):
            tables[path.stem] = (path.stem, path.read_text(encoding="utf-8"), whose)
    return [tables[key] for key in sorted(tables)]


def report_files(report: str) -> list[tuple[str, str]]:
    """(file name, text) of every file of one report folder, in name order."""
    root = shipped("reports") / report
    return [(p.name, p.read_text(encoding="utf-8")) for p in sorted(root.iterdir()) if p.is_file()]

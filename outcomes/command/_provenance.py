"""What a report says of its own making: versions, code digest, batches, options.

No path, user, host or clock.
"""

from __future__ import annotations

import hashlib
import importlib.metadata
import platform
from collections.abc import Sequence
from pathlib import Path

import outcomes
from outcomes import resources
from outcomes.cohort.frames import Cohort

_LIBRARIES = (
    "duckdb",
    "numpy",
    "pandas",
    "scipy",
    "lifelines",
    "scikit-learn",
    "matplotlib",
    "seaborn",
    "Jinja2",
)


def code_digest() -> str:
    """SHA-256 over the shipped code, SQL and section files, by relative name."""
    package = Path(outcomes.__file__).resolve().parent
    digest = hashlib.sha256()
    roots = [
        ("outcomes", package),
        ("sql", resources.shipped("sql")),
        ("reports", resources.shipped("reports")),
    ]
    for name, root in roots:
        for path in sorted(
            p for p in root.rglob("*") if p.suffix in (".py", ".sql", ".toml", ".md", ".j2", ".css")
        ):
            relative = path.relative_to(root).as_posix()
            if not relative.startswith("_shipped/"):
                digest.update(f"{name}/{relative}\n".encode())
                digest.update(path.read_bytes())
    return digest.hexdigest()


def provenance(
    cohort: Cohort, *, kind: str, options: Sequence[str], made_on: str = ""
) -> dict[str, str | list[str]]:
    """Label -> lines, in the order of print."""
    batches = [
        f"batch {row.batch_no}, source {row.source_key}: rows read {row.rows_read}, "
        f"accepted {row.rows_accepted}, set aside {row.rows_set_aside}, duplicates {row.rows_duplicate}"
        for row in cohort.batches.itertuples()
    ]
    checked = [
        f"source {row.source_key}: extract of {_day(row.extract_date)}, "
        f"vital status checked on {_day(row.vital_status_checked)}"
        for row in cohort.batches.drop_duplicates("source_key", keep="last").itertuples()
    ]
    versions = [f"{name} {importlib.metadata.version(name)}" for name in _LIBRARIES]
    body: dict[str, str | list[str]] = {
        "Report": kind,
        "Program": f"outcomes {outcomes.__version__}, code {code_digest()}",
        "Libraries": [f"Python {platform.python_version()}", *versions],
        "Data cut-off": checked,
        "Import batches": batches,
        "Data fingerprint": cohort.fingerprint,
        "Options": list(options) or ["none differs from the default"],
    }
    if made_on:
        body["Date given by the user"] = made_on
    return body


def _day(value: object) -> str:
    return str(value)[:10]

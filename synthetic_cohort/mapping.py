"""The mapping files that travel with the export styles, dated for one cohort."""

from __future__ import annotations

import re
from importlib.resources import files

from synthetic_cohort.cohort import Cohort


def mapping_text(cohort: Cohort, style: str) -> str:
    """The mapping of a style with the period, dates and time zone of this cohort in its [source] table."""
    text = (files("synthetic_cohort") / "mappings" / f"{style}.toml").read_text(encoding="utf-8")
    first, last = cohort.period
    for key, value in (
        ("period", f"[{first}, {last}]"),
        ("extract_date", f"{cohort.extract_date}"),
        ("vital_status_checked", f"{cohort.extract_date}"),
        ("time_zone", f'"{cohort.programme.zone}"'),
    ):
        text = re.sub(rf"(?m)^{key} = .*$", f"{key} = {value}", text, count=1)
    return re.sub(r"(?m)^valid_from_year = .*$", f"valid_from_year = {first.year}", text)

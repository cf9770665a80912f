"""The [source] table of a mapping file."""

from __future__ import annotations

import re
from datetime import date
from zoneinfo import ZoneInfo

from outcomes.intake.mapping import Coverage, Source
from outcomes.intake.mapping_problem import Table
from outcomes.intake.vocabulary import vocabulary

_KEY = re.compile(r"[a-z][a-z0-9_]{0,23}")


def read_source(table: Table) -> Source:
    """Every declaration is required: none has a default, because no value of the data shows it."""
    coverage = tuple(c for t in table.tables("complication") for c in [_read_coverage(t)])
    source = Source(
        key=table.pattern("key", _KEY),
        identifiers=table.pattern("identifiers", _KEY),
        period=_period(table),
        extract_date=table.day("extract_date"),
        extent=table.choice("extent", ("whole", "addition")),
        time_zone=_zone(table),
        plan_written=table.choice("plan_written", ("at start", "overwritten", "unknown")),
        vital_status_checked=table.day("vital_status_checked"),
        vital_status_date=table.choice("vital_status_date", ("day of death", "day of news")),
        no_death_means=table.choice("no_death_means", ("alive", "unknown")),
        attempts=table.choice("attempts", ("included", "not in this source")),
        calendar=table.choice("calendar", ("keep", "decline")),
        coverage=coverage,
    )
    _check(source, table)
    table.done()
    return source


def _check(source: Source, table: Table) -> None:
    if source.period[0] > source.period[1]:
        table.problem("period", "ends before it begins")
    if source.vital_status_checked > source.extract_date:
        table.problem("vital_status_checked", "lies after extract_date")
    seen: set[tuple[str, int]] = set()
    for entry in source.coverage:
        for kind in entry.kinds:
            if (kind, entry.valid_from_year) in seen:
                table.problem("complication", f"{kind} is declared twice for one year")
            seen.add((kind, entry.valid_from_year))


def _period(table: Table) -> tuple[date, date]:
    table.asked.add("period")
    value = table.raw.get("period")
    if not (isinstance(value, list) and len(value) == 2 and all(type(v) is date for v in value)):
        table.problem("period", "must be two dates, [2021-01-01, 2023-12-31]")
        return (date(2000, 1, 1), date(2000, 1, 1))
    return (value[0], value[1])


def _zone(table: Table) -> str:
    name = table.text("time_zone")
    if name != "in cell" and table.has("time_zone"):
        try:
            ZoneInfo(name)
        except (KeyError, ValueError, OSError):
            table.problem("time_zone", "is not a known zone such as Europe/Vienna, nor \"in cell\"")
    return name


def _read_coverage(table: Table) -> Coverage:
    kinds = table.texts("kinds")
    known = vocabulary().lists["complication_kind"]
    for kind in kinds:
        if kind not in known:
            table.problem("kinds", "names a complication kind that is not in the vocabulary")
    entry = Coverage(
        kinds=kinds,
        events_kept=table.choice("events_kept", ("all", "first")),
        looked_until_h=table.number("looked_until_hours_after_end"),
        definition=table.text("definition"),
        valid_from_year=table.integer("valid_from_year", low=1990, high=2200),
    )
    table.done()
    return entry

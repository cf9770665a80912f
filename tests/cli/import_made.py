"""Small exports, their mapping and a folder to import them in, for the end-to-end tests of the import."""

from __future__ import annotations

import stat
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import duckdb

from outcomes import cli
from outcomes.cohort.marts import open_marts

SOURCE = {
    "key": '"north"', "identifiers": '"north"', "period": "[2021-01-01, 2023-12-31]", "extract_date": "2024-03-31",
    "extent": '"whole"', "time_zone": '"Europe/Vienna"', "plan_written": '"at start"', "vital_status_checked": "2024-03-31",
    "vital_status_date": '"day of death"', "no_death_means": '"unknown"', "attempts": '"not in this source"', "calendar": '"keep"',
}  # fmt: skip
FILE = {"kind": '"csv"', "encoding": '"utf-8"', "separator": '","', "pattern": '"YYYY-MM-DD HH:mm"'}
KINDS = '{ Recovered = "recovery", LVAD = "durable_lvad", Graft = "transplantation", Died = "death", Withdrawn = "withdrawal", Open = "open" }'
YES = '{ yes = "true", no = "false" }'
# Header -> what the mapping says of it.
COLUMNS = {
    "Born": 'field = "person.birth_date", pattern = "YYYY-MM-DD", blank = "not recorded"',
    "Sex": 'field = "person.sex_recorded", codes = { M = "male", F = "female" }, blank = "not recorded"',
    "Weight": 'field = "support_run.weight_kg", unit = "kg", blank = "not recorded"',
    "Start": 'field = "support_run.start", blank = "defect"',
    "End": 'field = "support_end.end", blank = "still on support"',
    "How": f'field = "support_end.kind", codes = {KINDS}, blank = "not recorded"',
    "Home": f'field = "hospital_outcome.is_alive_at_discharge", codes = {YES}, blank = "not recorded"',
    "Lactate": 'field = "measurement.lactate", unit = "mmol/L", window = "pre_worst_6h", blank = "not recorded"',
    "Stroke": 'field = "complication.stroke", blank = "none"',
}
ROWS = [
    "1,A11,1960-05-01,M,80,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,4.5,",
    "2,A12,1950-05-01,F,60,2021-04-01 10:00,2021-04-02 10:00,Died,no,9.1,2021-04-01 20:00",
    "3,A13,1970-05-01,M,90,2022-05-01 10:00,2022-05-08 10:00,LVAD,yes,3.2,",
    "4,A14,1980-05-01,F,70,2022-06-01 10:00,2022-06-04 22:00,Graft,yes,,",
]
BAD_ROW = "5,A15,1975-05-01,M,75,2022-07-01 10:00,2022-06-30 10:00,Recovered,yes,2.2,"


@dataclass
class Mapped:
    """A mapping in the making: one run sheet; further sheets and coverage as text."""

    source: dict[str, str] = field(default_factory=lambda: dict(SOURCE))
    file: dict[str, str] = field(default_factory=lambda: dict(FILE))
    columns: dict[str, str] = field(default_factory=lambda: dict(COLUMNS))
    person: str = '["Record"]'
    leave_out: str = "[]"
    more: str = ""
    kinds: str = '["stroke"]'

    def text(self) -> str:
        return "\n".join([
            "format = 1", "[source]", *(f"{k} = {v}" for k, v in self.source.items()),
            "[[source.complication]]", f"kinds = {self.kinds}", 'events_kept = "all"', "looked_until_hours_after_end = 24",
            'definition = "own list"', "valid_from_year = 2021",
            "[[file]]", 'key = "runs"', *(f"{k} = {v}" for k, v in self.file.items()), self.sheet(), self.more,
        ])  # fmt: skip

    def sheet(self) -> str:
        listed = ",\n".join(f"  {{ header = {_quoted(h)}, {says} }}" for h, says in self.columns.items())
        return "\n".join([
            "[[file.sheet]]", 'key = "runs"', "position = 1", "header_line = 1", 'row_is = "run"', 'run = ["Run"]',
            f"person = {self.person}", f"leave_out = {self.leave_out}", f"column = [\n{listed}\n]",
        ])  # fmt: skip

    def header(self) -> str:
        return ",".join(["Run", *(["Record"] if self.person == '["Record"]' else []), *self.columns])


def _quoted(text: str) -> str:
    return '"' + text.replace('"', '\\"') + '"'


def detail_file(key: str, columns: dict[str, str], *, row_is: str = "detail", pattern: str = "YYYY-MM-DD HH:mm") -> str:
    """A further file with one sheet that names its runs by the column Run."""
    listed = ",\n".join(f"  {{ header = {_quoted(h)}, {says} }}" for h, says in columns.items())
    return f"""
[[file]]
key = "{key}"
kind = "csv"
encoding = "utf-8"
separator = ","
pattern = "{pattern}"
[[file.sheet]]
key = "{key}"
position = 1
header_line = 1
row_is = "{row_is}"
run = ["Run"]
column = [
{listed}
]
"""


FOLLOW_UP = {
    "Status": 'field = "follow_up.vital_status", codes = { alive = "alive", dead = "dead" }, blank = "not recorded"',
    "Seen": 'field = "follow_up.contact", blank = "not recorded"',
    "Died on": 'field = "follow_up.death", blank = "not recorded"',
}


def late_mapping(**source: str) -> str:
    """A later batch of follow-up without a start column."""
    declared = SOURCE | {"extent": '"addition"', "extract_date": "2025-03-31", "vital_status_checked": "2025-03-31"} | source
    head = "\n".join(["format = 1", "[source]", *(f"{k} = {v}" for k, v in declared.items())])
    return head + detail_file("late", FOLLOW_UP)


@dataclass
class Desk:
    """A folder with a store and its companions, and the command line run in this process."""

    folder: Path
    capsys: Any

    @property
    def store(self) -> Path:
        return self.folder / "unit.duckdb"

    @property
    def link(self) -> Path:
        return self.folder / "unit.duckdb.link"

    @property
    def calendar(self) -> Path:
        return self.folder / "unit.duckdb.calendar"

    def write(self, name: str, text: str | bytes) -> str:
        path = self.folder / name
        path.write_bytes(text if isinstance(text, bytes) else text.encode("utf-8"))
        return str(path)

    def run(self, *words: str) -> tuple[int, str, str]:
        """(exit code, standard output, standard error)."""
        code = cli.main([str(w) for w in words])
        printed = self.capsys.readouterr()
        return code, printed.out, printed.err

    def bring(self, mapped: Mapped | str, *exports: str | bytes | list[str], options: tuple[str, ...] = (), verb: str = "import") -> tuple[int, str, str]:
        """Write mapping and exports, import them. A list of rows gets the header of the mapping."""
        text = mapped if isinstance(mapped, str) else mapped.text()
        files = [self.write("map.toml", text)]
        for number, export in enumerate(exports):
            body = "\n".join([mapped.header(), *export, ""]) if isinstance(export, list) and isinstance(mapped, Mapped) else export
            files.append(self.write(f"export{number}.csv", body))
        return self.run(verb, *files, "--store", self.store, *options)

    def marts(self, query: str) -> list[tuple[Any, ...]]:
        """Rows of a query on the marts of the store."""
        con = open_marts(self.store)
        try:
            return con.execute(query).fetchall()
        finally:
            con.close()

    def ask(self, query: str) -> list[tuple[Any, ...]]:
        """Rows of a query on the records and the ledger of the store."""
        con = duckdb.connect(str(self.store), read_only=True)
        try:
            return con.execute(query).fetchall()
        finally:
            con.close()

    def state(self) -> dict[str, bytes]:
        """Bytes of everything beside the exports: what an import may change."""
        return {p.name: p.read_bytes() for p in (self.store, self.link, self.calendar) if p.exists()}

    def leftovers(self) -> list[str]:
        """Files and folders that no finished command leaves behind."""
        known = {self.store.name, self.link.name, self.calendar.name, f".{self.store.name}.lock"}
        return sorted(
            p.name for p in self.folder.iterdir()
            if (p.name.startswith(".") and p.name not in known) or p.name.endswith((".before", ".wal", ".new", ".tmp"))
        )  # fmt: skip

    def modes(self) -> dict[str, int]:
        return {p.name: stat.S_IMODE(p.stat().st_mode) for p in (self.store, self.link, self.calendar) if p.exists()}

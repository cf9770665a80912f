"""The staging connection: in memory, never on a disk. A chunk of cells goes in, typed de-identified rows come out."""

from __future__ import annotations

import datetime as dt
from collections.abc import Callable, Iterable

import duckdb
import pyarrow as pa

from outcomes.intake.cells import SCHEMA
from outcomes.intake.mapping import Mapping
from outcomes.intake.pieces import load_pieces, sheets_of
from outcomes.intake.vocabulary import load_vocabulary
from outcomes.resources import sql_files

Sink = Callable[[str, pa.Table], None]

_PERSISTENT = """
create table staging.run_start (run_no integer primary key, start_utc timestamp, start_local timestamp,
  sheet_no integer, line integer);
create table staging.row (sheet_no integer, line integer, run_no integer, signature varchar);
create table staging.finding (sheet_no integer, line integer, run_no integer, header varchar, field varchar,
  code varchar, effect varchar, shape varchar, plausible_as varchar);
create table staging.received (piece_no integer, received double);
create table staging.sheet (sheet_no integer, file_key varchar, sheet_key varchar, row_is varchar);
"""


def connect_in_memory(memory_limit: str = "1500MB") -> duckdb.DuckDBPyConnection:
    """A connection that cannot touch a disk or a network: dates and texts of an export live only here."""
    con = duckdb.connect(
        ":memory:",
        config={"autoinstall_known_extensions": "false", "autoload_known_extensions": "false",
                "allow_community_extensions": "false", "python_enable_replacements": "false"},
    )  # fmt: skip
    con.execute("set TimeZone = 'UTC'")
    con.execute("set threads = 1")
    con.execute(f"set memory_limit = '{memory_limit}'")
    con.execute("set max_temp_directory_size = '0GB'")
    con.execute("set temp_directory = ''")
    con.execute("set enable_external_access = false")
    return con


class Staging:
    """Holds one batch while it is read. `take` one chunk at a time; the run sheets with the start come first."""

    def __init__(self, mapping: Mapping, lists: dict[str, dict[str, str]]) -> None:
        self.mapping = mapping
        self.con = connect_in_memory()
        load_vocabulary(self.con)
        self.con.execute("create schema staging")
        self.con.execute(_PERSISTENT)
        self.columns = load_pieces(self.con, mapping, lists)
        for sheet_no, file_key, sheet in sheets_of(mapping):
            self.con.execute(
                "insert into staging.sheet values (?, ?, ?, ?)", [sheet_no, file_key, sheet.key, sheet.row_is]
            )
        self.con.execute(
            "create table staging.batch as select ?::date as checked, ?::date as extracted",
            [mapping.source.vital_status_checked, mapping.source.extract_date],
        )
        self.con.execute("alter table staging.piece add column row_is varchar")
        self.con.execute("update staging.piece p set row_is = s.row_is from staging.sheet s where s.sheet_no = p.sheet_no")
        self._steps = {stem[3:]: text for stem, text in sql_files("staging")}

    def take(self, sheet_no: int, cells: pa.Table, starts: Iterable[tuple[int, dt.datetime]], sink: Sink) -> None:
        """Stage one chunk. starts: (run number, start in UTC) of runs known from earlier imports."""
        self._load_chunk(cells)
        for name in ("text", "typed", "moment"):
            self._make(name)
        self._note_starts()
        self._known_starts(starts)
        self._make("value")
        self.con.execute(f"insert into staging.finding by name (select * exclude (piece_no) from ({self._steps['finding']}))")
        self.con.execute("insert into staging.received select piece_no, received from staging.value where received is not null")
        self._give_out(sheet_no, sink)

    def _load_chunk(self, cells: pa.Table) -> None:
        con = self.con
        con.register("arrow_in", cells.cast(SCHEMA))
        con.execute("create or replace table staging.cell as select * from arrow_in")
        con.unregister("arrow_in")
        con.execute(
            """insert into staging.row
            select sheet_no, line, any_value(run_no),
                   md5(string_agg(concat_ws(chr(31), piece_no, text, number, moment, problem), chr(30) order by piece_no))
            from staging.cell group by sheet_no, line"""
        )

    def _make(self, name: str) -> None:
        self.con.execute(f'create or replace table staging."{name}" as {self._steps[name]}')

    def _note_starts(self) -> None:
        """Starts of this chunk; a run that stands twice keeps the first, the twins are settled later."""
        self.con.execute(
            """insert or ignore into staging.run_start
            select m.run_no, date_trunc('minute', arg_min(m.utc, m.line) + interval 30 second), arg_min(m.local_moment, m.line),
                   any_value(m.sheet_no), min(m.line)
            from staging.moment m join staging.piece p using (piece_no)
            where p.target_column = 'start' and m.utc is not null and m.defect is null and m.run_no is not null
              and coalesce(m.clock, '') <> 'CELL.TIME-SKIPPED'
            group by m.run_no"""
        )

    def _known_starts(self, starts: Iterable[tuple[int, dt.datetime]]) -> None:
        rows = [{"run_no": n, "start_utc": s} for n, s in starts]
        if not rows:
            return
        zone = self.mapping.source.time_zone if self.mapping.source.time_zone != "in cell" else "UTC"
        self.con.register("arrow_in", pa.Table.from_pylist(rows))
        self.con.execute(
            """insert or ignore into staging.run_start
            select run_no, start_utc, (start_utc at time zone 'UTC') at time zone ?, null, null from arrow_in""",
            [zone],
        )
        self.con.unregister("arrow_in")

    def _give_out(self, sheet_no: int, sink: Sink) -> None:
        for table, query in self._queries(sheet_no):
            rows = self.con.sql(query).to_arrow_table()
            if rows.num_rows:
                sink(table, rows)

    def _queries(self, sheet_no: int) -> list[tuple[str, str]]:
        """(record table, query) for everything that this sheet can give."""
        targets: dict[str, set[str]] = {}
        for column, _ in self.columns[sheet_no]:
            for piece in column.pieces:
                columns = targets.setdefault(piece.field.table, set())
                if piece.field.column != "start":
                    columns.add(piece.field.column)
        sheet = next(s for n, _, s in sheets_of(self.mapping) if n == sheet_no)
        queries: list[tuple[str, str]] = []
        for table in sorted(targets):
            if table in _LONG:
                queries.append((table, _LONG[table]))
            elif table == "complication_event" and sheet.row_is == "run":
                queries.append((table, _WIDE_COMPLICATIONS))
            else:
                queries.append((table, _wide(table, sorted(targets[table]))))
        queries.append(("missing_value", _MISSING))
        return [(t, _with_dates(t, q, targets)) for t, q in queries]


def _wide(table: str, columns: list[str]) -> str:
    """One row a source row; columns come from our own vocabulary, so quoting them is safe."""
    picks = "".join(f""", first(given) filter (where target_column = '{c}') as "{c}" """ for c in columns)
    return f"""select run_no, sheet_no, line{picks}
    from (select *, coalesce(coded, {_NUMBER_TEXT}) as given from staging.value
          where target_table = '{table}' and run_no is not null and defect is null)
    group by run_no, sheet_no, line"""


_NUMBER_TEXT = "case when amount = floor(amount) and abs(amount) < 1e15 then amount::bigint::varchar else amount::varchar end"

_LONG = {
    "measurement": """select v.run_no, v.sheet_no, v.line, v.target_column as analyte, p.window_label,
        v.amount as value, p.unit as unit_as_received, v.received as value_as_received,
        nullif(p.site, '') as site, nullif(p.reading, '') as reading
      from staging.value v join staging.piece p using (piece_no)
      where v.target_table = 'measurement' and v.amount is not null and v.defect is null and v.run_no is not null""",
    "vasoactive_dose": """select v.run_no, v.sheet_no, v.line, v.target_column as drug, p.window_label,
        v.amount as dose, p.unit as unit_as_received
      from staging.value v join staging.piece p using (piece_no)
      where v.target_table = 'vasoactive_dose' and v.amount is not null and v.defect is null and v.run_no is not null""",
    "neuro_outcome": """select v.run_no, v.sheet_no, v.line, v.target_column as scale, v.amount::integer as value,
        'unknown' as assessed_at
      from staging.value v
      where v.target_table = 'neuro_outcome' and v.amount is not null and v.defect is null and v.run_no is not null""",
}

_WIDE_COMPLICATIONS = """select run_no, sheet_no, line, target_column as kind, amount as onset_h
  from staging.value
  where target_table = 'complication_event' and amount is not null and defect is null and run_no is not null"""

_MISSING = """select v.run_no, v.sheet_no, v.line,
    case when v.target_table = 'measurement' then v.field || '.' || p.window_label else v.field end as field,
    case when v.defect is not null then 'set_aside' else replace(v.missing_word, ' ', '_') end as missing_kind
  from staging.value v join staging.piece p using (piece_no)
  where v.run_no is not null and p.row_is = 'run' and v.target_column <> 'start'
    and (v.defect is not null or v.missing_word is not null)
    and coalesce(v.missing_word, '') <> 'still on support'"""


def _with_dates(table: str, query: str, targets: dict[str, set[str]]) -> str:
    """What must be derived while the dates are still there: year, horizons, floored contacts, open days."""
    if table == "support_run":
        horizons = ", ".join(
            f"(s.start_utc + interval {d} day)::date <= b.checked as observable_to_day_{d}" for d in (30, 90, 180, 365)
        )
        born = "exists (select 1 from staging.piece where kind = 'birth_year')"
        return f"""select t.*, year(s.start_local) as run_year, {born} as from_birth_year, {horizons}
          from ({query}) t join staging.run_start s using (run_no) cross join staging.batch b"""
    if table == "follow_up":
        columns = targets["follow_up"]
        status = "t.vital_status" if "vital_status" in columns else "null::varchar"
        contact = "t.contact_h::double" if "contact_h" in columns else "null::double"
        death = "t.death_h::double" if "death_h" in columns else "null::double"
        derived = ", ".join(sorted(columns & {"contact_h", "death_h", "vital_status"}))
        rest = f"t.* exclude ({derived})" if derived else "t.*"
        dead = f"({status} = 'dead' or {death} is not null)"
        return f"""select {rest}, case when {dead} then 'dead' else {status} end as vital_status,
            case when {dead} then coalesce({death}, {contact}) end as death_h,
            case when not coalesce({dead}, false) then {_FLOORED.format(hours=contact)} end as contact_h
          from ({query}) t"""
    if table == "support_end":
        return f"""select t.*, o.open_days, o.run_no is not null as is_open
          from ({query}) t left join (
            select v.run_no, v.line, v.sheet_no,
              greatest(0, least(365, date_diff('day', any_value(s.start_utc), any_value(b.extracted)::timestamp))) as open_days
            from staging.value v join staging.run_start s using (run_no) cross join staging.batch b
            where v.missing_word = 'still on support' group by v.run_no, v.line, v.sheet_no
          ) o using (run_no, sheet_no, line)"""
    return query


_FLOORED = """case when {hours} >= 8760 then 8760.0 when {hours} >= 4320 then 4320.0 when {hours} >= 2160 then 2160.0
  when {hours} >= 720 then 720.0 when {hours} >= 0 then 0.0 end"""

"""Running sql/checks: one file a rule, its header says what is set aside, which column it is about and what it needs."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import duckdb

from outcomes.errors import OutcomesError
from outcomes.findings import EFFECTS
from outcomes.resources import sql_files


@dataclass(frozen=True)
class Check:
    """code CHECK.<FILE STEM>; effect as in findings; field: the column it speaks of; needs: fields without which the
    rule is not applicable; of: record table whose rows are its denominator."""

    code: str
    topic: str
    effect: str
    field: str
    needs: frozenset[str]
    of: str
    rule: str
    query: str


@cache
def all_checks() -> tuple[Check, ...]:
    """Every check, in name order. Raises OutcomesError INTERNAL.CHECK for a header that is not complete."""
    return tuple(_read(stem, text) for stem, text in sql_files("checks"))


def _read(stem: str, text: str) -> Check:
    head: dict[str, str] = {}
    body: list[str] = []
    for line in text.splitlines():
        if line.startswith("-- ") and ":" in line and not body:
            key, _, value = line[3:].partition(":")
            head[key.strip()] = value.strip()
        else:
            body.append(line)
    topic, _, name = stem.partition("/")
    if not {"effect", "column", "needs", "of", "rule"} <= head.keys() or head["effect"] not in EFFECTS or not name:
        raise OutcomesError("INTERNAL.CHECK", f"the header of sql/checks/{stem}.sql is not complete")
    return Check(
        code="CHECK." + name.upper().replace("_", "-"),
        topic=topic,
        effect=head["effect"],
        field=head["column"],
        needs=frozenset(n.strip() for n in head["needs"].split(",") if n.strip()),
        of=head["of"],
        rule=head["rule"],
        query="\n".join(body),
    )


def run_checks(con: duckdb.DuckDBPyConnection, carried: frozenset[str]) -> list[dict[str, object]]:
    """Run every applicable check on the candidates; add its findings to work.finding.

    carried: fields that the source has. Returns one row a check: code, of, n_checked, n_violating, applicable. Only rows
    of this batch become findings; a run that is set aside already is not reported again.
    """
    summary: list[dict[str, object]] = []
    for check in all_checks():
        applicable = check.needs <= carried
        n_checked = n_found = 0
        if applicable:
            n_checked = _count(con, f"select count(*) from candidate.{check.of} where line is not null")
            n_found = _store(con, check)
            if check.effect == "run":
                refresh_set_aside(con)
        summary.append(
            {"code": check.code, "of": check.of, "n_checked": n_checked, "n_violating": n_found, "applicable": applicable}
        )
    return summary


def refresh_set_aside(con: duckdb.DuckDBPyConnection) -> None:
    """Runs that are refused whole. A row without a key is refused with its finding, but it names no run."""
    con.execute(
        "create or replace table work.set_aside as "
        "select distinct run_key from work.finding where effect = 'run' and run_key is not null"
    )


def _count(con: duckdb.DuckDBPyConnection, query: str) -> int:
    row = con.execute(query).fetchone()
    return int(row[0]) if row else 0


def _store(con: duckdb.DuckDBPyConnection, check: Check) -> int:
    con.execute(f"create or replace temp table violating as select * from ({check.query})")
    columns = {r[0] for r in con.execute("select column_name from duckdb_columns() where table_name = 'violating'").fetchall()}
    field = "v.field" if "field" in columns else "?"
    parameters = [] if "field" in columns else [check.field]
    con.execute(
        f"""insert into work.finding
        select ?, ?, v.sheet_no, v.line, v.run_key, '', {field}, ?, ''
        from violating v
        where v.line is not null and v.run_key not in (select run_key from work.set_aside)""",
        [check.code, check.effect, *parameters, check.rule],
    )
    return _count(con, "select count(*) from violating where line is not null")

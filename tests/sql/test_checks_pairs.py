"""Every check in sql/checks finds the rows that violate it and no other; every check has its pair of tables."""

from __future__ import annotations

from functools import cache

import duckdb
import pytest
from check_pairs import PAIRS, end, two_runs
from text_table import fill, rows_of, table_text

from outcomes.intake.vocabulary import load_vocabulary, vocabulary
from outcomes.resources import sql_files
from outcomes.store.checks import Check, all_checks, run_checks
from outcomes.store.schema import record_columns

CHECKS = {f"{c.topic}/{c.code.removeprefix('CHECK.').lower().replace('-', '_')}": c for c in all_checks()}


@cache
def empty_candidates() -> duckdb.DuckDBPyConnection:
    con = duckdb.connect(":memory:")
    load_vocabulary(con)
    con.execute("create schema candidate; create schema work; create table work.set_aside (run_key varchar)")
    con.execute(
        "create table work.finding (code varchar, effect varchar, sheet_no integer, line integer, run_key varchar, "
        "header varchar, field varchar, rule varchar, shape varchar)"
    )
    for table, columns in record_columns().items():
        body = ", ".join(f'"{name}" {kind}' for name, kind in columns)
        con.execute(f"create table candidate.{table} ({body}, sheet_no integer, line integer)")
    return con


def candidates(tables: dict[str, str]) -> duckdb.DuckDBPyConnection:
    con = empty_candidates()
    for table in ("work.set_aside", "work.finding", *(f"candidate.{name}" for name in record_columns())):
        con.execute(f"delete from {table}")
    for table, text in tables.items():
        rows = [{"sheet_no": "0", "line": str(n), **row} for n, row in enumerate(rows_of(text), start=1)]
        fill(con, f"candidate.{table}", table_text(rows))
    return con


def found(check: Check, tables: dict[str, str]) -> list[tuple[str, int, str]]:
    """(run, line, field or '') of every violating row."""
    con = candidates(tables)
    names = [c[0] for c in con.execute(f"describe {check.query}").fetchall()]
    field = "field" if "field" in names else "''"
    return con.execute(f"select run_key, line, {field} from ({check.query}) where line is not null order by all").fetchall()


def test_every_check_file_has_its_pair_of_tables() -> None:
    assert sorted(PAIRS) == [stem for stem, _ in sql_files("checks")] == sorted(CHECKS)


@pytest.mark.parametrize("name", sorted(PAIRS))
def test_check_finds_what_violates_it(name: str) -> None:
    pair = PAIRS[name]
    assert found(CHECKS[name], pair.wrong) == [("a", line, field) for line, field in sorted(pair.hits)]


@pytest.mark.parametrize("name", sorted(PAIRS))
def test_check_passes_what_only_just_does_not_violate_it(name: str) -> None:
    assert found(CHECKS[name], PAIRS[name].right) == []


@pytest.mark.parametrize("name", sorted(PAIRS))
def test_check_finds_nothing_where_there_is_nothing(name: str) -> None:
    assert found(CHECKS[name], {}) == []


@pytest.mark.parametrize("name", sorted(PAIRS))
def test_check_header_names_what_exists(name: str) -> None:
    check = CHECKS[name]
    tables = record_columns()
    assert check.of in tables
    assert check.needs <= vocabulary().fields.keys()
    assert check.field in vocabulary().fields or check.field.split(".")[0] in tables
    assert check.rule and check.rule[0].islower() and not check.rule.endswith(".")


def test_a_support_that_neither_ended_nor_is_open_has_no_kind_and_is_found() -> None:
    """A row with detail of the end but neither its time nor its kind must not reach the store."""
    tables = end("", "", more="decannulation_place", value="theatre")
    assert found(CHECKS["ending/kind_missing"], tables) == [("a", 1, "")]


def test_an_open_run_whose_person_has_been_discharged_is_found() -> None:
    tables = end("open", "") | {"hospital_outcome": "run_key | discharge_h\na | 50"}
    assert found(CHECKS["ending/open_yet_ended"], tables) == [("a", 1, "")]


def test_runs_of_one_person_are_compared_only_where_their_order_is_known() -> None:
    unknown = {name: text.replace(" 0 |", "  |").replace(" 200 |", "  |") for name, text in two_runs("200", "300").items()}
    assert found(CHECKS["person/overlapping_runs"], unknown) == []


def test_findings_of_rows_without_a_run_do_not_silence_the_checks() -> None:
    """A row of the run sheet without a key can be refused as a run; the key that it does not have stands for no run."""
    con = candidates(end("recovery", "0"))
    con.execute("insert into work.finding values ('CELL.DATE', 'run', 0, 9, null, '', '', '', '')")
    con.execute("insert into candidate.support_end (run_key, end_h, end_kind, sheet_no, line) values ('b', 0, 'recovery', 0, 2)")
    summary = {row["code"]: row for row in run_checks(con, frozenset(vocabulary().fields))}
    assert summary["CHECK.END-BEFORE-START"]["n_violating"] == 2
    codes = con.execute("select run_key from work.finding where code = 'CHECK.END-BEFORE-START' order by all").fetchall()
    assert codes == [("a",), ("b",)]


def test_a_check_without_its_fields_is_not_applicable_and_finds_nothing() -> None:
    con = candidates(PAIRS["ending/recovery_with_durable_pump"].wrong)
    summary = {row["code"]: row for row in run_checks(con, frozenset())}
    row = summary["CHECK.RECOVERY-WITH-DURABLE-PUMP"]
    assert (row["applicable"], row["n_checked"], row["n_violating"]) == (False, 0, 0)
    assert summary["CHECK.END-VERY-LATE"] == {
        "code": "CHECK.END-VERY-LATE", "of": "support_end", "n_checked": 1, "n_violating": 0, "applicable": True,
    }  # fmt: skip

"""The header of a table, and rows that are not data."""

from __future__ import annotations

import pytest
from reader_made import grids, notes, places, refused, rows, spec

from outcomes.intake.reading import headers
from outcomes.intake.reading.limits import HEADER_CHARS


def test_header_is_nfc_and_trimmed():
    assert grids("  Gro\u0308sse ,\u00a0b\n")[0].header == ("Gr\u00f6sse", "b")


def test_header_twins_after_folding():
    assert places("Run,kg, RUN \n") == [("HEADER-TWIN", 1, "column 3")]
    assert places("Gro\u0308\u00dfe,gr\u00f6sse\n") == [("HEADER-TWIN", 1, "column 2")]
    assert refused("Run 1,run 1\n").findings[0].shape == "aaa 9"


def test_lines_above_the_declared_header_are_skipped():
    data = 'Cobalt log\n"printed; 1\n\na,b\n1,2\n'
    grid = grids(data, header_line=4)[0]
    assert (grid.header, grid.lines) == (("a", "b"), [5])
    assert headers(data.encode(), spec(header_line=4)) == {"": ("a", "b")}


def test_title_above_the_header_is_hinted_at():
    found = refused("Cobalt log\n\nrun,kg\n1,2\n")
    assert found.code == "READ.HEADER-LINE" and "line 3" in found.what
    assert refused("Cobalt log,,\n,,\nrun,kg,cm\n").code == "READ.HEADER-LINE"
    assert refused("sep=;\na;b\n1;2\n", separator=";").code == "READ.HEADER-LINE"


def test_one_column_is_not_a_title():
    assert rows("run\n1\n2\n") == [["1"], ["2"]]
    assert places("run\n" + "1\n" * 10 + "1,2\n") == [("ROW-LONG", 12, "")]


@pytest.mark.parametrize("data", ["a,b\n", "a,b\n\n1,2\n", "a,b\n,\n1,2\n"])
def test_header_line_without_a_header(data):
    assert places(data, header_line=2) == [("HEADER-LINE", 2, "")]


def test_wrong_separator():
    found = refused("a;b;c\n1;2;3\n")
    assert found.code == "READ.SEPARATOR" and "2 times ;" in found.what
    assert "tab" in refused("a\tb\n").what
    assert headers(b'"kg, dry"\n1\n', spec()) == {"": ("kg, dry",)}
    with pytest.raises(Exception, match="SEPARATOR"):
        headers(b"a;b\n", spec())


def test_header_missing():
    assert places("12,2024-01-01 08:15,3.5,x\n") == [("HEADER-DATA", 1, "")]
    assert grids("2019,2020,run,kg\n")[0].header == ("2019", "2020", "run", "kg")


def test_header_length():
    assert grids("x" * HEADER_CHARS + "\n")[0].header == ("x" * HEADER_CHARS,)
    assert places("x" * (HEADER_CHARS + 1) + "\n") == [("HEADER-LONG", 1, "column 1")]
    with pytest.raises(Exception, match="HEADER-LONG"):
        headers(b"x" * (HEADER_CHARS + 1), spec())


def test_data_without_a_header():
    assert places("a,,c\n1,,3\n1,2,3\n1,2,3\n") == [("HEADER-EMPTY", 3, "column 2")]


def test_empty_columns_are_skipped_and_noted():
    grid = grids("a,,c,\n1,,3,\n")[0]
    assert (grid.header, grid.places, grid.cells) == (("a", "c"), (1, 3), [["1"], ["3"]])
    assert [(n.code, n.rule[-11:]) for n in grid.notes] == [("READ.EMPTY-COLUMNS", "column 2, 4")]


def test_repeated_header():
    assert places("Run,kg\n1,2\nrun , KG\n3,4\n") == [("HEADER-REPEATED", 3, "")]
    assert rows("Run,kg\nrun,2\n") == [["run", "2"]]


def test_units_below_the_header():
    assert places("run,kg,lactate,ef\n,kg,mmol/l,(%)\n1,2,3,4\n") == [("UNITS-ROW", 2, "")]
    assert places("run,start\n-,dd.mm.yyyy hh\n") == [("UNITS-ROW", 2, "")]
    for rest in ("run,sex,arm\n1,m,h\n", "sex,arm\nm,\n", "run,kg\n1,2\n,kg\n", "code,meaning\nm,male\n"):
        assert rows(rest)


@pytest.mark.parametrize(
    "line",
    [
        "Total,320,,",
        "Summe:,12,34,5.5",
        "grand total,,,",
        "Mean,1,2,3",
        "320 rows,,,",
        "End of report,,,",
        "Runs of 2021,,,",
        "Total,320",
        "Printed by night shift",
        "Sum,1,2,3,4",
    ],
)
def test_totals_and_footers(line):
    assert places(f"run,kg,cm,h\n1,2,3,4\n{line}\n") == [("TOTALS-ROW", 3, "")]


def test_totals_at_a_cut_end_keep_their_name():
    assert places("run,kg,cm\n1,2,3\nTotal,2") == [("TOTALS-ROW", 3, "")]


@pytest.mark.parametrize(
    "data",
    [
        "run,kg,cm\nTotal,artificial,heart\n",
        "run,kg,cm\nF-0001,,\n",
        "code,meaning\nn,0\n",
        "code,meaning\nmean,1\n",
        "code,meaning\nlate stroke,\n",
    ],
)
def test_not_totals(data):
    assert len(rows(data)) == 1


def test_two_columns_of_totals():
    assert places("run,kg\nTotal,12\n") == [("TOTALS-ROW", 2, "")]
    assert rows("code,meaning\ntotal,whole heart\n") == [["total", "whole heart"]]


def test_notes_stand_on_the_first_chunk_only():
    cut = grids("a\n1\n\n2\n3", chunk_rows=1)
    assert [len(g.notes) for g in cut] == [2, 0, 0]
    assert notes("a\n1\n\n2\n")[0].source == "f"

"""Parquet files: types are kept, damage is named."""

from __future__ import annotations

import datetime as dt
import io
from decimal import Decimal
from zoneinfo import ZoneInfo

import numpy as np
import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from reader_made import grids, notes, places, refused, rows, spec

from outcomes.intake.reading import ErrorCell, FileSpec, Number, SheetSpec, columnar, headers, read
from outcomes.intake.reading.arrow_cell import to_cells
from outcomes.intake.reading.limits import COLUMNS, FIELD_CHARS

ERROR = ErrorCell("error")
DAY = dt.date(2020, 2, 13)
MOMENT = dt.datetime(2020, 2, 13, 4, 55, 7)


def packed(columns: dict[str, pa.Array], **more: object) -> bytes:
    held = io.BytesIO()
    pq.write_table(pa.table(columns), held, **more)
    return held.getvalue()


def column(array: pa.Array) -> list[object]:
    beside = pa.array(range(len(array)))
    return grids(packed({"h": array, "n": beside}), kind="parquet")[0].cells[0]


def test_header_rows_and_places():
    grid = grids(
        packed({"run": pa.array(["007", "", None]), "kg": pa.array([81.5, 2.0, 1.0])}), kind="parquet"
    )[0]
    assert (grid.header, grid.lines, grid.places) == (("run", "kg"), [1, 2, 3], (1, 2))
    assert grid.cells == [["007", None, None], [Number(81.5, "81.5"), Number(2.0, "2"), Number(1.0, "1")]]


def test_header_only():
    data = packed({"run": pa.array([], pa.string())})
    assert [(g.header, g.lines) for g in grids(data, kind="parquet")] == [(("run",), [])]
    assert headers(data, spec("parquet")) == {"": ("run",)}


@pytest.mark.parametrize(
    ("array", "cells"),
    [
        (pa.array(["a", None], pa.large_string()), ["a", None]),
        (pa.array(["a", None, "b", "a"]).dictionary_encode(), ["a", None, "b", "a"]),
        (pa.array([5, 5]).dictionary_encode(), [Number(5.0, "5"), Number(5.0, "5")]),
        (pa.array([True, None]), [True, None]),
        (pa.array([1, 2**53 + 1], pa.int64()), [Number(1.0, "1"), Number(2.0**53, "9007199254740993")]),
        (pa.array([2**64 - 1], pa.uint64()), [Number(float(2**64), "18446744073709551615")]),
        (pa.array([0.1], pa.float32()), [Number(0.1, "0.1")]),
        (pa.array([np.float16(0.1)], pa.float16()), [Number(0.1, "0.1")]),
        (
            pa.array([0.1, float("nan"), float("inf"), 5.0]),
            [Number(0.1, "0.1"), ERROR, ERROR, Number(5.0, "5")],
        ),
        (
            pa.array([Decimal("1.20"), Decimal("0")], pa.decimal128(9, 2)),
            [Number(1.2, "1.2"), Number(0.0, "0")],
        ),
        (pa.array([Decimal("120")], pa.decimal128(9, 0)), [Number(120.0, "120")]),
        (pa.array([MOMENT], pa.timestamp("s")), [MOMENT]),
        (pa.array([MOMENT.replace(microsecond=600_000)], pa.timestamp("us")), [MOMENT.replace(second=8)]),
        (pa.array([dt.datetime(1899, 1, 1)], pa.timestamp("ns")), [dt.datetime(1899, 1, 1)]),
        (pa.array([2**62], pa.timestamp("ms")), [ERROR]),
        (pa.array([MOMENT, None], pa.timestamp("us", "Europe/Vienna")), ["2020-02-13T04:55:07Z", None]),
        (pa.array([2**62], pa.timestamp("ms", "UTC")), [ERROR]),
        (pa.array([DAY]), [DAY]),
        (pa.array([DAY], pa.date64()), [DAY]),
        (pa.array([2**30], pa.int32()).cast(pa.date32()), [ERROR]),
        (pa.array([dt.time(4, 55, 7)], pa.time32("ms")), [dt.time(4, 55, 7)]),
        (pa.array([dt.time(23, 59, 59, 999_999)], pa.time64("us")), [dt.time(23, 59, 59)]),
        (pa.array([-1_000_000], pa.int64()).cast(pa.time64("us")), [ERROR]),
    ],
)
def test_types(array, cells):
    assert column(array) == cells


def test_a_zone_is_never_dropped():
    local = MOMENT.replace(tzinfo=ZoneInfo("Europe/Vienna"))
    assert column(pa.array([local], pa.timestamp("us", "Europe/Vienna"))) == ["2020-02-13T03:55:07Z"]


def test_a_column_without_any_value():
    data = packed({"a": pa.array(["x"]), "b": pa.nulls(1)})
    assert rows(data, kind="parquet") == [["x", None]]


@pytest.mark.parametrize(
    "array",
    [
        pa.array([[1]]),
        pa.array([{"a": 1}]),
        pa.array([b"x"]),
        pa.array([dt.timedelta(1)]),
    ],
)
def test_types_that_are_refused(array):
    assert places(packed({"a": pa.array([1]), "b": array}), kind="parquet") == [
        ("PARQUET-TYPE", 0, "column 2")
    ]
    with pytest.raises(pa.ArrowException):
        to_cells(array)


def test_rules_of_tables_hold_here_too():
    twins = pa.table([pa.array(["x"]), pa.array(["y"])], names=["Run", "run "])
    held = io.BytesIO()
    pq.write_table(twins, held)
    assert places(held.getvalue(), kind="parquet") == [("HEADER-TWIN", 1, "column 2")]
    totals = packed({"run": pa.array(["1", "Total"]), "kg": pa.array([1, 2]), "cm": pa.array([1, None])})
    assert places(totals, kind="parquet") == [("TOTALS-ROW", 2, "")]


def test_bounds():
    many = {f"c{n}": pa.array([n]) for n in range(COLUMNS)}
    assert len(rows(packed(many), kind="parquet")[0]) == COLUMNS
    assert places(packed({**many, "more": pa.array([1])}), kind="parquet") == [("COLUMNS", 0, "")]
    data = packed({"a": pa.array(["x", "y"])})
    assert len(rows(data, kind="parquet", max_rows=2)) == 2
    assert places(data, kind="parquet", max_rows=1) == [("ROWS", 0, "")]
    assert rows(packed({"a": pa.array(["x" * FIELD_CHARS])}), kind="parquet") == [["x" * FIELD_CHARS]]
    long = packed({"a": pa.array(["x", "x" * (FIELD_CHARS + 1)])})
    assert places(long, kind="parquet") == [("FIELD-LONG", 2, "column 1")]


def test_unpacked_size(monkeypatch):
    monkeypatch.setattr(columnar, "UNPACKED_BYTES", 10)
    assert places(packed({"a": pa.array(["x" * 50])}), kind="parquet") == [("PACKED", 0, "")]


def test_one_table_and_its_header():
    data = packed({"a": pa.array(["x"])})
    assert places(data, kind="parquet", header_line=2) == [("SHEET", 0, "")]
    assert places(data, kind="parquet", sheets=(SheetSpec("", 2, 1),)) == [("SHEET", 0, "")]


def test_characters():
    data = packed({"a": pa.array(["x", "y\u202e"]), "b": pa.array(["\ufffd", "z"]).dictionary_encode()})
    assert places(data, kind="parquet") == [("BIDI", 2, "column 1")]
    assert [n.code for n in notes(packed({"a": pa.array(["\ufffd"])}), kind="parquet")] == ["READ.REPLACED"]
    broken = pa.Array.from_buffers(
        pa.string(), 1, [None, pa.py_buffer(b"\0\0\0\0\2\0\0\0"), pa.py_buffer(b"\xff\xfe")]
    )
    assert places(packed({"a": broken}), kind="parquet") == [("ENCODING", 1, "column 1")]


def test_chunks():
    data = packed({"a": pa.array(range(10_000))})
    cut = grids(data, kind="parquet", chunk_rows=6_000)
    assert [len(g.lines) for g in cut] == [6_000, 4_000]
    assert [c.text for g in cut for c in g.cells[0]] == [str(n) for n in range(10_000)]


def test_the_stream_stays_open():
    stream = io.BytesIO(packed({"a": pa.array(["x"])}))
    assert next(read(stream, FileSpec("f", "parquet"))).cells == [["x"]]
    assert not stream.closed and next(read(stream, FileSpec("f", "parquet"))).cells == [["x"]]


def test_encrypted():
    assert refused(b"PARE\x00 secret PARE", kind="parquet").code == "READ.ENCRYPTED"


def test_damage_is_named_wherever_it_is():
    data = packed({"run": pa.array([f"run {n}" for n in range(50)]), "kg": pa.array(range(50))})
    assert refused(data[:-20], kind="parquet").code == "READ.PARQUET"
    assert refused(data[:-8] + b"\xff\xff\xff\x7fPAR1", kind="parquet").code == "READ.PARQUET"
    page = data[:4] + b"\xff" * 40 + data[44:]
    assert refused(page, kind="parquet").code == "READ.PARQUET"


def test_a_column_that_cannot_be_turned_into_cells(monkeypatch):
    def broken(column):
        raise pa.ArrowInvalid("x")

    monkeypatch.setattr(columnar, "to_cells", broken)
    assert places(packed({"a": pa.array(["x"])}), kind="parquet") == [("PARQUET", 1, "column 1")]

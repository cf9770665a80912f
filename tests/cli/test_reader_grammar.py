"""Numbers, dates and times, damaged identifiers as texts."""

from __future__ import annotations

import datetime as dt

import duckdb
import pytest

from outcomes.intake.reading.grammar import (
    compile_pattern,
    is_mangled_identifier,
    is_spreadsheet_error,
    number_form,
    parse_number,
)


@pytest.mark.parametrize(
    ("text", "number"),
    [
        ("0", 0.0),
        ("-12", -12.0),
        ("007", 7.0),
        ("1.50", 1.5),
        ("-0.001", -0.001),
        ("123456789012345", 123456789012345.0),
        ("000123456789012345", 123456789012345.0),
        ("0.00012345678901234", 0.00012345678901234),
    ],
)
def test_numbers(text, number):
    assert parse_number(text) == number


@pytest.mark.parametrize(
    "text",
    [
        "",
        " ",
        "1 ",
        " 1",
        "+1",
        "1.",
        ".5",
        "1e3",
        "1E3",
        "nan",
        "NaN",
        "inf",
        "-inf",
        "Infinity",
        "1_000",
        "0x10",
        "--1",
        "１２",
        "٥",
        "1\u00a0",
        "1,5",
        "1.2.3",
        "−1",
        "1\n",
        "1234567890123456",
        "0.1234567890123456",
        "<5",
        "12 kg",
        "½",
    ],
)
def test_not_numbers(text):
    assert parse_number(text) is None


@pytest.mark.parametrize(
    ("text", "decimal", "thousands", "number"),
    [
        ("1,5", ",", "", 1.5),
        ("1.5", ",", "", None),
        ("1.204,5", ",", ".", 1204.5),
        ("1204,5", ",", ".", 1204.5),
        ("1.20,5", ",", ".", None),
        ("12.0004", ",", ".", None),
        ("1,204,500.25", ".", ",", 1204500.25),
        (",204", ".", ",", None),
        ("1\u202f204,5", ",", "\u202f", 1204.5),
        ("1'204.5", ".", "'", 1204.5),
        ("1,5", ".", ",", None),
        ("1234.567", ",", ".", None),
    ],
)
def test_declared_marks(text, decimal, thousands, number):
    assert parse_number(text, decimal, thousands) == number
    matched = duckdb.execute(
        "select regexp_full_match(?, ?)", [text, number_form(decimal, thousands)]
    ).fetchone()
    assert matched == (number is not None,)


@pytest.mark.parametrize(("decimal", "thousands"), [("", ""), (";", ""), (",", ","), (".", "x")])
def test_marks_that_are_not_read(decimal, thousands):
    with pytest.raises(ValueError, match="mark"):
        number_form(decimal, thousands)


def test_errors_of_spreadsheets():
    for text in ("#N/A", " #REF! ", "#NV", "#WERT!", "#DIV/0!", "#name?", "####", "Err:502"):
        assert is_spreadsheet_error(text)
    for text in ("", "N/A", "#1", "# 12", "#", "##", "REF", "Err:5"):
        assert not is_spreadsheet_error(text)


def test_identifiers_that_a_spreadsheet_changed():
    for text in (
        "1.23E+05",
        "1,2E+10",
        "8E+15",
        "12-Mar",
        "Sep-02",
        "123.0",
        "1234567890123450000",
        "12345678901234000",
    ):
        assert is_mangled_identifier(text)
    for text in ("", "F-0001", "1230000", "12-03", "E+05", "100000000000000", "123.5", "MARCH", "12-Mars"):
        assert not is_mangled_identifier(text)


@pytest.mark.parametrize(
    ("pattern", "text", "moment"),
    [
        ("YYYY-MM-DD", "2020-02-13", dt.datetime(2020, 2, 13)),
        ("YYYYMMDD", "20200213", dt.datetime(2020, 2, 13)),
        ("DD.MM.YYYY HH:mm", "13.02.2020 04:55", dt.datetime(2020, 2, 13, 4, 55)),
        ("D.M.YYYY H:mm", "3.2.2020 4:05", dt.datetime(2020, 2, 3, 4, 5)),
        ("D.M.YYYY", "03.02.2020", dt.datetime(2020, 2, 3)),
        ("MM/DD/YYYY hh:mm AM", "02/13/2020 12:05 am", dt.datetime(2020, 2, 13, 0, 5)),
        ("MM/DD/YYYY hh:mm AM", "02/13/2020 12:05 PM", dt.datetime(2020, 2, 13, 12, 5)),
        ("M/D/YYYY h:mm:ssAM", "2/3/2020 4:05:09PM", dt.datetime(2020, 2, 3, 16, 5, 9)),
        ("YYYY-MM-DDTHH", "2020-02-13T23", dt.datetime(2020, 2, 13, 23)),
        ("YYYY-MM-DDTHH:mm:ssZ", "2020-02-13T04:55:07Z", dt.datetime(2020, 2, 13, 4, 55, 7, tzinfo=dt.UTC)),
        ("YYYY-MM-DD HH:mm±HH:MM", "2020-02-13 04:55-03:30", dt.datetime(2020, 2, 13, 8, 25, tzinfo=dt.UTC)),
        ("YYYY-MM-DD HH:mmZ", "2020-02-13 04:55+0200", dt.datetime(2020, 2, 13, 2, 55, tzinfo=dt.UTC)),
    ],
)
def test_moments_in_python_and_in_sql(pattern, text, moment):
    made = compile_pattern(pattern)
    assert made.parse(text) == moment
    assert made.has_offset == (moment.tzinfo is not None)
    assert made.has_time == ("H" in pattern or "h" in pattern)
    assert duckdb.execute("select regexp_full_match(?, ?)", [text, made.regex]).fetchone() == (True,)
    found = [duckdb.execute("select try_strptime(?, ?)", [text, form]).fetchone()[0] for form in made.formats]
    parsed = next(value for value in found if value is not None)
    assert parsed.replace(tzinfo=moment.tzinfo if parsed.tzinfo is None else parsed.tzinfo) == moment


@pytest.mark.parametrize(
    ("pattern", "text"),
    [
        ("DD.MM.YYYY", "13/02/2020"),
        ("DD.MM.YYYY", "13.02.20"),
        ("DD.MM.YYYY", "02.13.2020"),
        ("DD.MM.YYYY", "31.02.2020"),
        ("DD.MM.YYYY", "1.2.2020"),
        ("DD.MM.YYYY", "01.02.2020 "),
        ("DD.MM.YYYY", "٠١.02.2020"),
        ("DD.MM.YYYY", "01x02x2020"),
        ("DD.MM.YYYY", "01.02.0000"),
        ("DD.MM.YYYY HH:mm", "13.02.2020 24:00"),
        ("DD.MM.YYYY HH:mm", "13.02.2020 04:60"),
        ("DD.MM.YYYY hh:mm AM", "13.02.2020 13:05 PM"),
        ("DD.MM.YYYY hh:mm AM", "13.02.2020 00:05 AM"),
        ("YYYY-MM-DD HH:mmZ", "2020-02-13 04:55"),
        ("YYYY-MM-DD HH:mmZ", "2020-02-13 04:55+15:00"),
        ("YYYY-MM-DD HH:mm±HH:MM", "2020-02-13 04:55Z"),
        ("YYYY-MM-DD", "now"),
        ("YYYY-MM-DD", "2020"),
    ],
)
def test_texts_of_another_form(pattern, text):
    assert compile_pattern(pattern).parse(text) is None


@pytest.mark.parametrize(
    ("pattern", "why"),
    [
        ("", "year, month and day"),
        ("HH:mm", "year, month and day"),
        ("MM/YYYY", "day missing"),
        ("DD.MM.YY", "four digits"),
        ("DD.MM.YYYY DD", "twice"),
        ("DD.MM.YYYY hh:mm", "half missing"),
        ("DD.MM.YYYY HH:mm AM", "hour12 missing"),
        ("DD.MM.YYYY HH hh AM", "one kind of hour"),
        ("DD.MM.YYYY mm", "need one kind of hour"),
        ("DD.MM.YYYY HH:ss", "minute missing"),
        ("DD.MM.YYYY HHZ", "minute missing"),
        ("DMYYYY", "needs a separator"),
        ("DD.MM.YYYY HH h mm", "half missing"),
        ("DD.MM.YYYY um HH:mm", "tokens and separators only"),
        ("%d.%m.YYYY", "tokens and separators only"),
    ],
)
def test_patterns_that_are_refused(pattern, why):
    with pytest.raises(ValueError, match=why):
        compile_pattern(pattern)

"""Grammars of numbers, dates and formats on generated text, in Python and in SQL."""

from __future__ import annotations

import datetime as dt
from decimal import Decimal

import duckdb
from hypothesis import given, settings
from hypothesis import strategies as st

from outcomes.intake.reading.grammar import (
    compile_pattern,
    is_mangled_identifier,
    is_spreadsheet_error,
    number_form,
    parse_number,
)
from outcomes.intake.reading.serial import dated_cell, format_kind, number_text

fast = settings(max_examples=120, deadline=None)

numberish = st.text(st.sampled_from("0123456789-+.,eE_ ١'\u00a0"), max_size=20) | st.text(max_size=6)


@fast
@given(numberish, st.sampled_from([(".", ""), (",", ""), (",", "."), (".", ","), (".", "'")]))
def test_numbers_are_exact_or_none(text, marks):
    decimal, thousands = marks
    found = parse_number(text, decimal, thousands)
    if found is not None:
        plain = text.replace(thousands, "") if thousands else text
        assert Decimal(repr(found)) == Decimal(plain.replace(decimal, "."))
        assert text.isascii()
    if "\x00" not in text:
        row = duckdb.execute("select regexp_full_match(?, ?)", [text, number_form(*marks)]).fetchone()
        assert row is not None and (found is None or row[0])
    assert isinstance(is_mangled_identifier(text), bool) and isinstance(is_spreadsheet_error(text), bool)


@fast
@given(st.text(st.sampled_from("YMDHhmsAZT±: .-/x%"), max_size=18), st.text(max_size=12))
def test_any_pattern_is_compiled_or_refused(pattern, text):
    try:
        made = compile_pattern(pattern)
    except ValueError as error:
        assert str(error).isascii()
        return
    assert made.parse(text) is None or text


@fast
@given(st.datetimes(min_value=dt.datetime(1000, 1, 1)).map(lambda m: m.replace(microsecond=0)))
def test_moments_survive_a_round_trip(moment):
    for pattern, form in (
        ("DD.MM.YYYY HH:mm:ss", "%d.%m.%Y %H:%M:%S"),
        ("MM/DD/YYYY hh:mm:ss AM", "%m/%d/%Y %I:%M:%S %p"),
        ("YYYYMMDD HHmmss", "%Y%m%d %H%M%S"),
    ):
        text = moment.strftime(form)
        made = compile_pattern(pattern)
        assert made.formats == (form,)
        assert made.parse(text) == moment
        row = duckdb.execute(
            f"select try_strptime(?, '{form}'), regexp_full_match(?, ?)", [text, text, made.regex]
        )
        assert row.fetchone() == (moment, True)


@fast
@given(st.floats(allow_nan=False, allow_infinity=False))
def test_numbers_of_cells_keep_their_value(value):
    assert float(number_text(value)) == value
    for kind in ("moment", "time", "elapsed"):
        for is_1904 in (False, True):
            dated_cell(value, kind, is_1904)


@fast
@given(st.text(st.sampled_from('ymdhs[]"\\;0#.@$-eE+ap/'), max_size=20))
def test_any_format_has_a_kind(code):
    assert format_kind(200, code) in ("number", "moment", "time", "elapsed")

"""How numbers are written. Expected texts follow from the rules of the format module, worked by hand."""

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from outcomes.tables import format as write

FORBIDDEN = re.compile(r"nan|inf|none|nat|-|−0(\.0*)?(?![\d.])", re.IGNORECASE)


@pytest.mark.parametrize(
    ("function", "arguments", "text"),
    [
        (write.number, (-0.04, 1), "0.0"),
        (write.number, (-2.25, 1), "−2.3"),
        (write.number, (2.5, 0), "3"),
        (write.number, (1234567.0, 0), "1,234,567"),
        (write.number, (1e-300, 2), "0.00"),
        (write.number, (1e22, 0), "10,000,000,000,000,000,000,000"),
        (write.count, (0,), "0"),
        (write.count, (-0.0,), "0"),
        (write.x_of_n, (1000, 2000), "1,000 of 2,000"),
        (write.percent, (0.285, 200), "29%"),
        (write.percent, (0.5, 19), "[low]"),
        (write.percent, (0.5, 0), "[z]"),
        (write.percent, (0.5, 20), "50%"),
        (write.percent, (0.5, 999), "50%"),
        (write.percent, (0.5, 1000), "50.0%"),
        (write.percent, (0.0, 200), "0%"),
        (write.percent, (1.0, 200), "100%"),
        (write.percent, (0.004, 200), "<1%"),
        (write.percent, (0.996, 200), ">99%"),
        (write.percent, (0.0004, 2000), "<0.1%"),
        (write.percent_with_counts, (0, 0), "[z]"),
        (write.percent_with_counts, (0, 12), "0/12"),
        (write.percent_with_counts, (12, 40), "30% (12/40)"),
        (write.percent_interval, (0.0, 0.262, 12), "0% to 26%"),
        (write.of_100, (0.5, 0), "[z]"),
        (write.of_100, (0.002, 900), "fewer than 1 of 100"),
        (write.of_100, (0.0, 30), "0 of 100"),
        (write.of_100, (1.0, 30), "100 of 100"),
        (write.of_100, (0.999, 900), "more than 99 of 100"),
        (write.points, (-0.004, 100), "0"),
        (write.points, (-0.25, 1500), "−25.0"),
        (write.p_value, (0.0005,), "<0.001"),
        (write.p_value, (0.001,), "0.001"),
        (write.p_value, (0.01,), "0.01"),
        (write.p_value, (0.0449,), "0.04"),
        (write.p_value, (0.0499,), "0.050"),
        (write.p_value, (0.055,), "0.06"),
        (write.p_value, (1.0,), ">0.99"),
        (write.p_value, (0.0,), "<0.001"),
        (write.ratio, (0.0,), "0.00"),
        (write.ratio, (0.4,), "0.40"),
        (write.ratio, (0.399,), "0.399"),
        (write.ratio, (1.0,), "1.00"),
        (write.ratio, (4321.0,), "4,321"),
        (write.ratio_interval, (0.5, 0.0, 0.75), "0.00 to 0.75"),
        (write.ratio_interval, (0.5, 0.0049, 0.75), "<0.01 to 0.75"),
        (write.duration, (9.97,), "10 h"),
        (write.duration, (0.0,), "0.0 h"),
        (write.duration, (72.0,), "3.0 days"),
        (write.duration, (239.0,), "10 days"),
        (write.duration_quartiles, (40, 9.5, 90), "40 (9.5 to 90) h"),
        (write.quartiles, (1.25, 1.0, 1.35, 1), "1.3 (1.0 to 1.4)"),
        (write.number_interval, (-3.04, -0.04, 1), "−3.0 to 0.0"),
        (write.interval_name, (0.9,), "90% CI"),
        (write.ascii_number, ("−3.0 to 1,000.5",), ("-3.0", "1000.5")),
    ],
)
def test_text(function, arguments, text):
    assert function(*arguments) == text


def test_rule_of_four_on_coles_example():
    """Cole, Arch Dis Child 2015;100:608: two to three digits are enough for 22.68 (7.51 to 73.67)."""
    assert f"{write.ratio(22.68)} ({write.ratio_interval(22.68, 7.51, 73.67)})" == "22.7 (7.5 to 73.7)"


@pytest.mark.parametrize(
    ("function", "arguments"),
    [
        (write.number, (float("nan"), 1)),
        (write.number, (float("inf"), 1)),
        (write.number, (True, 1)),
        (write.count, (-1,)),
        (write.count, (1.5,)),
        (write.x_of_n, (3, 2)),
        (write.percent, (1.01, 50)),
        (write.percent, (-0.01, 50)),
        (write.percent_interval, (0.5, 0.4, 50)),
        (write.points_interval, (0.5, 0.4, 50)),
        (write.p_value, (1.2,)),
        (write.p_value, (-0.1,)),
        (write.ratio, (-1.0,)),
        (write.ratio_interval, (1.0, 2.0, 1.0)),
        (write.duration, (-1.0,)),
        (write.duration_quartiles, (5.0, 6.0, 7.0)),
        (write.quartiles, (5.0, 6.0, 7.0, 0)),
        (write.number_interval, (2.0, 1.0, 0)),
    ],
)
def test_refused(function, arguments):
    with pytest.raises(
        ValueError, match=r"finite|count|part|share|interval|P value|ratio|duration|quartiles"
    ):
        function(*arguments)


finite = st.floats(min_value=-1e9, max_value=1e9, allow_nan=False)
share = st.floats(min_value=0, max_value=1)
size = st.integers(min_value=0, max_value=100_000)


@given(finite, st.integers(0, 4))
def test_number_never_shows_what_is_no_number(value, places):
    text = write.number(value, places)
    assert not FORBIDDEN.search(text)
    assert abs(float(write.ascii_number(text)[0]) - value) <= 0.5000001 * 10.0**-places


@given(share, share, size)
def test_shares_are_clean_and_in_range(a, b, n):
    for text in (write.percent(a, n), write.percent_interval(min(a, b), max(a, b), n), write.of_100(a, n)):
        assert not FORBIDDEN.search(text)
    assert not FORBIDDEN.search(write.points(a - b, n))


@given(st.floats(min_value=0, max_value=1e6))
def test_ratio_keeps_two_or_three_digits(value):
    text = write.ratio(value)
    assert not FORBIDDEN.search(text)
    shown = float(write.ascii_number(text)[0])
    assert abs(shown - value) <= max(0.5, 0.0132 * value)


@given(st.floats(min_value=0, max_value=1))
def test_p_values_keep_their_side_of_the_usual_line(p):
    text = write.p_value(p)
    assert text != "0.000"
    number = write.ascii_number(text)[0]
    if not number.startswith(("<", ">")) and abs(p - 0.05) >= 0.0005:
        assert (float(number) < 0.05) == (p < 0.05)


def test_marks_are_four_and_distinct():
    assert list(write.MARKS) == ["[x]", "[c]", "[z]", "[low]"]
    assert len(set(write.MARKS.values())) == 4

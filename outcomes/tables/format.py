"""How numbers are written. The only module that rounds a number for print.

Every function returns the text for HTML: a true minus sign (U+2212) and the word "to" between the ends of an
interval. `ascii_number` turns such a text into what a CSV file holds. Rounding is half up on the shortest
decimal form of the number, so that 0.285 is 29 % whichever way the machine stores it. A number that is not
finite is a fault of the caller and raises ValueError: what is missing has a mark, not a number.

Ratios follow the rule of four (Cole, Arch Dis Child 2015;100:608).
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from decimal import ROUND_HALF_UP, Decimal
from math import isfinite
from types import MappingProxyType

MINUS = "\N{MINUS SIGN}"
FEW = 20  # below this denominator a share is written as x of N, never as a percentage
MANY = 1000  # from this denominator on a percentage has one decimal
HOURS_UNTIL = 72.0  # durations below this are written in hours

MARKS: Mapping[str, str] = MappingProxyType(
    {
        "[x]": "not recorded",
        "[c]": "withheld for confidentiality",
        "[z]": "not applicable",
        "[low]": "too few to estimate",
    }
)


def _decimal(value: float) -> Decimal:
    if isinstance(value, bool) or not isfinite(value):
        raise ValueError("only a finite number can be written")
    return Decimal(repr(float(value)))


def _text(value: Decimal, places: int) -> str:
    """Fixed decimals, thousands by comma from 1,000, a true minus sign and never a minus zero."""
    rounded = value.quantize(Decimal(1).scaleb(-places), rounding=ROUND_HALF_UP)
    return f"{MINUS if rounded < 0 else ''}{abs(rounded):,f}"


def number(value: float, places: int) -> str:
    """A measured value with this many decimals.

    >>> number(1234.5, 1), number(-0.04, 1)
    ('1,234.5', '0.0')
    """
    return _text(_decimal(value), places)


def count(value: float) -> str:
    """A count of runs, people or events.

    >>> count(1234)
    '1,234'
    """
    exact = _decimal(value)
    if exact < 0 or exact != exact.to_integral_value():
        raise ValueError("a count is a whole number that is not negative")
    return _text(exact, 0)


def x_of_n(x: float, n: float) -> str:
    if x > n:
        raise ValueError("a part is larger than its whole")
    return f"{count(x)} of {count(n)}"


def percent_places(n: float) -> int:
    """Decimals of a percentage with denominator n."""
    return 1 if n >= MANY else 0


def percent(share: float, n: float) -> str:
    """A share between 0 and 1 as a percentage of denominator n; below 20 the mark for too few.

    A share that is neither none nor all is not printed as 0 % or 100 %.

    >>> percent(0.623, 61), percent(0.5, 12), percent(0.001, 200), percent(0.9999, 2000)
    ('62%', '[low]', '<1%', '>99.9%')
    """
    mark = _small(n)
    return mark or _percentage(share, percent_places(n))


def _small(n: float) -> str:
    """The mark for a denominator that carries no percentage, '' for one that does."""
    if n == 0:
        return "[z]"
    return "[low]" if n < FEW else ""


def _percentage(share: float, places: int) -> str:
    exact = _decimal(share)
    if not 0 <= exact <= 1:
        raise ValueError("a share lies between 0 and 1")
    smallest = Decimal(1).scaleb(-places)
    hundred = (exact * 100).quantize(smallest, rounding=ROUND_HALF_UP)
    if hundred == 0 and exact > 0:
        return f"<{smallest}%"
    if hundred == 100 and exact < 1:
        return f">{100 - smallest}%"
    return f"{_text(hundred, places)}%"


def percent_with_counts(x: float, n: float) -> str:
    """
    >>> percent_with_counts(38, 61), percent_with_counts(7, 12), percent_with_counts(0, 0)
    ('62% (38/61)', '7/12', '[z]')
    """
    if n == 0:
        return "[z]"
    fraction = f"{count(x)}/{count(n)}"
    return fraction if n < FEW else f"{percent(x / n, n)} ({fraction})"


def percent_interval(lower: float, upper: float, n: float) -> str:
    """The ends of an interval for a share. It is written for every n: small groups need it most."""
    _check_ends(lower, upper)
    places = percent_places(n)
    return f"{_percentage(lower, places)} to {_percentage(upper, places)}"


def of_100(share: float, n: float) -> str:
    """A risk in words, denominator 100; below 20 the mark for too few.

    >>> of_100(0.378, 61), of_100(0.002, 900), of_100(0.5, 19)
    ('about 38 of 100', 'fewer than 1 of 100', '[low]')
    """
    mark = _small(n)
    if mark:
        return mark
    written = _percentage(share, 0)
    if written.startswith("<"):
        return "fewer than 1 of 100"
    if written.startswith(">"):
        return "more than 99 of 100"
    return f"{'' if share in (0, 1) else 'about '}{written[:-1]} of 100"


def points(difference: float, n: float) -> str:
    """A difference of two shares, in percentage points; n is the smaller denominator.

    >>> points(-0.034, 150), points(0.0, 150), points(0.1234, 4000)
    ('−3', '0', '12.3')
    """
    return _text(_decimal(difference) * 100, percent_places(n))


def points_interval(lower: float, upper: float, n: float) -> str:
    _check_ends(lower, upper)
    return f"{points(lower, n)} to {points(upper, n)}"


def p_value(p: float) -> str:
    """An exact P value: two decimals, three near 0.05 or below 0.01, and a bound below 0.001.

    >>> [p_value(p) for p in (0.34, 0.0476, 0.0042, 0.0002, 0.998)]
    ['0.34', '0.048', '0.004', '<0.001', '>0.99']
    """
    exact = _decimal(p)
    if not 0 <= exact <= 1:
        raise ValueError("a P value lies between 0 and 1")
    if exact < Decimal("0.001"):
        return "<0.001"
    if exact > Decimal("0.99"):
        return ">0.99"
    near = Decimal("0.045") <= exact < Decimal("0.055")
    return _text(exact, 3 if exact < Decimal("0.01") or near else 2)


def ratio_places(value: float) -> int:
    """Decimals by the rule of four: two significant digits if the first is 4 or more, else three."""
    exact = abs(_decimal(value))
    if exact == 0:
        return 2
    leading = exact.scaleb(-exact.adjusted())
    return max(0, (1 if leading >= 4 else 2) - exact.adjusted())


def ratio(value: float) -> str:
    """A ratio or rate by the rule of four.

    >>> [ratio(v) for v in (0.0345, 0.78, 1.834, 22.68, 46.2, 312.4)]
    ['0.0345', '0.78', '1.83', '22.7', '46', '312']
    """
    if value < 0:
        raise ValueError("a ratio or rate is not negative")
    return number(value, ratio_places(value))


def ratio_interval(value: float, lower: float, upper: float) -> str:
    """The ends of an interval, with the decimals of the estimate; an end that would show as 0 is bounded.

    >>> ratio_interval(22.68, 7.51, 73.67), ratio_interval(1.2, 0.001, 3.4), ratio_interval(0, 0, 3.1)
    ('7.5 to 73.7', '<0.01 to 3.40', '0.00 to 3.10')
    """
    _check_ends(lower, upper)
    places = ratio_places(value)
    return f"{_bounded(lower, places)} to {_bounded(upper, places)}"


def _bounded(value: float, places: int) -> str:
    smallest = Decimal(1).scaleb(-places)
    exact = _decimal(value)
    return f"<{smallest}" if 0 < exact < smallest / 2 else _text(exact, places)


def time_point(value: float) -> str:
    """A point in time, as short as it is exact to two decimals.

    >>> time_point(30), time_point(0.5), time_point(0.25)
    ('30', '0.5', '0.25')
    """
    return number(value, 2).rstrip("0").rstrip(".")


def duration(hours: float) -> str:
    """Hours below 72, days from there on; one decimal below 10.

    >>> [duration(h) for h in (4.53, 26.4, 71.9, 80, 612)]
    ['4.5 h', '26 h', '72 h', '3.3 days', '26 days']
    """
    if hours < 0:
        raise ValueError("a duration is not negative")
    value, unit = _in_unit(hours, hours < HOURS_UNTIL)
    return f"{value} {unit}"


def duration_quartiles(median: float, lower: float, upper: float) -> str:
    """Median and quartiles in the unit of the median.

    >>> duration_quartiles(96, 40, 300)
    '4.0 (1.7 to 13) days'
    """
    if not 0 <= lower <= median <= upper:
        raise ValueError("quartiles are in order and not negative")
    in_hours = median < HOURS_UNTIL
    (m, unit), (low, _), (high, _) = (_in_unit(v, in_hours) for v in (median, lower, upper))
    return f"{m} ({low} to {high}) {unit}"


def _in_unit(hours: float, in_hours: bool) -> tuple[str, str]:
    exact = _decimal(hours) if in_hours else _decimal(hours) / 24
    tenth = exact.quantize(Decimal("0.1"), rounding=ROUND_HALF_UP)
    return _text(exact, 1 if tenth < 10 else 0), "h" if in_hours else "days"


def quartiles(median: float, lower: float, upper: float, places: int) -> str:
    """
    >>> quartiles(54, 41.6, 63, 0)
    '54 (42 to 63)'
    """
    if not lower <= median <= upper:
        raise ValueError("quartiles are in order")
    return f"{number(median, places)} ({number(lower, places)} to {number(upper, places)})"


def number_interval(lower: float, upper: float, places: int) -> str:
    """
    >>> number_interval(-1.25, 3, 1)
    '−1.3 to 3.0'
    """
    _check_ends(lower, upper)
    return f"{number(lower, places)} to {number(upper, places)}"


def interval_name(level: float) -> str:
    """
    >>> interval_name(0.95), interval_name(0.998)
    ('95% CI', '99.8% CI')
    """
    return f"{(_decimal(level) * 100).normalize():f}% CI"


def _check_ends(lower: float, upper: float) -> None:
    if lower > upper:
        raise ValueError("the ends of an interval are in order")


_NUMBERS = re.compile(rf"[<>]?{MINUS}?\d[\d,]*(?:\.\d+)?")


def ascii_number(text: str) -> tuple[str, ...]:
    """The numbers in a written text, as a CSV file holds them: no thousands comma, ASCII minus.

    >>> ascii_number('62% (49% to 74%)'), ascii_number('−1,234.5'), ascii_number('<1%'), ascii_number('[z]')
    (('62', '49', '74'), ('-1234.5',), ('<1',), ())
    """
    return tuple(found.replace(",", "").replace(MINUS, "-") for found in _NUMBERS.findall(text))

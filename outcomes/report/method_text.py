"""Methods as run and the reference list: made from the methods that the report's analyses really used."""

from __future__ import annotations

from dataclasses import dataclass

from outcomes.analysis.result import Method
from outcomes.report.model import Report
from outcomes.tables.format import number


@dataclass(frozen=True)
class MethodUsed:
    """One method: its sentence, the numbers of its references, the keys of the sections that used it."""

    sentence: str
    references: tuple[int, ...]
    sections: tuple[str, ...]


def sentence(method: Method) -> str:
    """How a number was made, in one sentence.

    >>> sentence(Method("share of runs", interval="Wilson", time_unit="days"))
    'Share of runs; interval: Wilson, level 95%; time in days.'
    """
    pieces = [method.estimator[:1].upper() + method.estimator[1:]]
    if method.variance:
        pieces.append(f"variance: {method.variance}")
    if method.interval:
        pieces.append(f"interval: {method.interval}, level {_level(method.level)}")
    if method.ties:
        pieces.append(f"ties: {method.ties}")
    if method.time_unit:
        pieces.append(f"time in {method.time_unit}")
    return "; ".join(pieces) + "."


def _level(level: float) -> str:
    text = number(level * 100, 1)
    return f"{text.removesuffix('.0')}%"


def references(report: Report) -> tuple[str, ...]:
    """Every citation once, in order of first use."""
    found = (text for section in report.sections for method in section.methods for text in method.citations)
    return tuple(dict.fromkeys(found))


def methods_used(report: Report) -> tuple[MethodUsed, ...]:
    """Every method once, in order of first use, with the sections that rest on it."""
    sections: dict[Method, list[str]] = {}
    for section in report.sections:
        for method in section.methods:
            sections.setdefault(method, []).append(section.key)
    numbers = {text: place for place, text in enumerate(references(report), start=1)}
    return tuple(
        MethodUsed(sentence(method), tuple(numbers[text] for text in method.citations), tuple(keys))
        for method, keys in sections.items()
    )

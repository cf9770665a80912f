"""What a score table is once read: frozen records, no behaviour but the choice of options."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from outcomes.scores.fields import Field

EVIDENCE = ("verified", "second-hand", "from memory", "convention")
UNCHECKED = ("second-hand", "from memory")
EVENTS = ("survival", "death", "favourable_neurology", "none")

# A value this close to a bound (relative) is the bound: undoes the rounding of a unit change, nothing more.
TOLERANCE = 1e-6


@dataclass(frozen=True)
class Interval:
    """A side that is None is open to infinity; `*_inside` says whether the bound itself belongs."""

    low: float | None = None
    low_inside: bool = True
    high: float | None = None
    high_inside: bool = True

    def words(self) -> str:
        """The interval as it is printed.

        >>> Interval(39.0, True, 53.0, False).words()
        'at least 39, below 53'
        """
        parts = []
        if self.low is not None:
            parts.append(f"{'at least' if self.low_inside else 'above'} {self.low:g}")
        if self.high is not None:
            parts.append(f"{'at most' if self.high_inside else 'below'} {self.high:g}")
        return ", ".join(parts) or "any"

    def holds(self, value: float) -> bool:
        """Whether an exact number lies inside (no tolerance; for integer totals)."""
        above = self.low is None or value > self.low or (self.low_inside and value == self.low)
        return above and (self.high is None or value < self.high or (self.high_inside and value == self.high))


@dataclass(frozen=True)
class Condition:
    """One input inside an interval (canonical unit; `printed` has the table's own), or one of some words."""

    input: str
    interval: Interval | None = None
    equals: tuple[Any, ...] = ()
    printed: str = ""


@dataclass(frozen=True)
class Row:
    """Points given when all conditions hold. Rows are read in order: the first that holds decides."""

    when: tuple[Condition, ...]
    points: float
    evidence: str
    only_with: tuple[str, ...] = ()


@dataclass(frozen=True)
class NotApplicable:
    """What an item is worth when its input cannot exist: fixed points, or None = anywhere in its range."""

    when: tuple[Condition, ...]
    points: float | None
    evidence: str
    only_with: tuple[str, ...] = ()


@dataclass(frozen=True)
class Input:
    """Which quantity, taken when, and which of several values (worst = max, min, last …).

    zero_when_true: a yes/no input that, where true, says that an empty value means none was given (0).
    """

    key: str
    field: Field
    window: str
    worst: str
    note: str = ""
    zero_when_true: str = ""
    only_with: tuple[str, ...] = ()


@dataclass(frozen=True)
class Item:
    """One line of the score. kind rows: first row that holds, else `otherwise`. per_unit: points × value."""

    key: str
    label: str
    group: str
    kind: str
    rows: tuple[Row, ...]
    otherwise: float | None
    per_unit: float | None
    unit: str
    evidence: str
    not_applicable: tuple[NotApplicable, ...] = ()
    claims_monotone: bool = False
    note: str = ""
    only_with: tuple[str, ...] = ()

    @property
    def inputs(self) -> tuple[str, ...]:
        """Keys of the inputs it reads, in order of first use."""
        return tuple(dict.fromkeys(c.input for row in self.rows for c in row.when))


@dataclass(frozen=True)
class Rule:
    """One population rule: holds if any of its conditions holds. `unknown_is_met`: silence counts as met."""

    key: str
    text: str
    any_of: tuple[Condition, ...]
    evidence: str
    unknown_is_met: bool = False
    only_with: tuple[str, ...] = ()


@dataclass(frozen=True)
class ScoreClass:
    """A class of totals and its printed probability (None: not printed or not read)."""

    key: str
    interval: Interval
    probability: float | None
    evidence: str
    printed_low: float | None = None
    printed_high: float | None = None
    only_with: tuple[str, ...] = ()


@dataclass(frozen=True)
class Convention:
    """A choice the source leaves open. `options`: key → what it means. Open if there is more than one."""

    key: str
    question: str
    default: str
    options: Mapping[str, str]
    why: str


@dataclass(frozen=True)
class Vector:
    """A worked example: inputs (canonical unless `units` says otherwise), points by item or group."""

    key: str
    inputs: Mapping[str, Any]
    points: Mapping[str, float]
    total: float
    class_key: str | None
    probability: float | None
    options: Mapping[str, str]
    units: Mapping[str, str]


@dataclass(frozen=True)
class Score:
    """A whole table. `sheet` holds what is only printed: citation, derivation, performance, cautions."""

    key: str
    name: str
    long_name: str
    status: str
    purpose: str
    direction: str
    event: str
    outcome: str
    horizon: str
    constant: float
    constant_evidence: str
    published_range: tuple[float, float] | None
    range_evidence: str
    inputs: tuple[Input, ...]
    items: tuple[Item, ...]
    population: tuple[Rule, ...]
    classes: tuple[ScoreClass, ...]
    conventions: tuple[Convention, ...]
    vectors: tuple[Vector, ...]
    sheet: Mapping[str, Any]
    whose: str = "ours"
    text_hash: str = ""

    @property
    def is_implemented(self) -> bool:
        return self.status == "implemented"

    @property
    def is_whole_numbered(self) -> bool:
        """Totals are whole numbers unless an item multiplies its value."""
        return all(item.kind != "per_unit" for item in self.items)


def applies(only_with: tuple[str, ...], chosen: Mapping[str, str]) -> bool:
    """Whether a part of a table is in force: no condition, or one of its `convention=option` was chosen."""
    return not only_with or any(f"{key}={value}" in only_with for key, value in chosen.items())


def under(score: Score, chosen: Mapping[str, str]) -> Score:
    """The score as it stands under the chosen options: variants that do not apply are dropped."""
    items = tuple(
        replace(
            item,
            rows=tuple(row for row in item.rows if applies(row.only_with, chosen)),
            not_applicable=tuple(gate for gate in item.not_applicable if applies(gate.only_with, chosen)),
        )
        for item in score.items
        if applies(item.only_with, chosen)
    )
    return replace(
        score,
        items=items,
        inputs=tuple(x for x in score.inputs if applies(x.only_with, chosen)),
        population=tuple(x for x in score.population if applies(x.only_with, chosen)),
        classes=tuple(x for x in score.classes if applies(x.only_with, chosen)),
    )

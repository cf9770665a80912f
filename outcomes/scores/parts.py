"""Reading the parts of a score table: inputs, conditions, items, population, classes, vectors."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from outcomes.errors import UsageError
from outcomes.scores.fields import FIELDS, KINDS, WINDOWS, WORST, Field
from outcomes.scores.model import (
    EVIDENCE,
    Condition,
    Convention,
    Input,
    Interval,
    Item,
    NotApplicable,
    Row,
    Rule,
    ScoreClass,
    Vector,
)
from outcomes.scores.reading import Node
from outcomes.scores.units import factor


def read_input(node: Node) -> Input:
    """A field of the data dictionary, or one that the table itself describes by kind, unit and limits."""
    name = node.text("field")
    described = node.has("kind")
    own = Field(
        name,
        node.word("kind", KINDS, "number"),
        node.text("unit", ""),
        "",
        node.optional_number("low"),
        node.optional_number("high"),
        node.words("choices"),
    )
    known = FIELDS.get(name)
    if known is None and not described:
        node.fault("FIELD", f"{name} is not in the data dictionary: give its kind, unit, low and high")
    if known is not None and described and (own.kind, own.unit) != (known.kind, known.unit):
        node.fault("FIELD", f"{name} is a {known.kind} in {known.unit or 'no unit'}; the table disagrees")
    if known is None and own.is_numeric and (own.low is None or own.high is None):
        node.fault("FIELD", f"{name} needs hard limits low and high")
    out = Input(
        key=node.text("key", name),
        field=known or own,
        window=node.word("window", WINDOWS),
        worst=node.word("worst", WORST),
        note=node.text("note", ""),
        zero_when_true=node.text("zero_when_true", ""),
        only_with=node.words("only_with"),
    )
    node.finish()
    return out


def read_interval(node: Node, field: Field | None, unit: str) -> Interval:
    """at_least / above / at_most / below, turned into the canonical unit of the field."""
    low, low_inside = node.optional_number("at_least"), True
    if node.has("above"):
        if low is not None:
            node.fault("BOUND", "give at_least or above, not both")
        low, low_inside = node.optional_number("above"), False
    high, high_inside = node.optional_number("at_most"), True
    if node.has("below"):
        if high is not None:
            node.fault("BOUND", "give at_most or below, not both")
        high, high_inside = node.optional_number("below"), False
    node.asked |= {"above", "below"}
    if (
        low is not None
        and high is not None
        and (low > high or (low == high and not low_inside & high_inside))
    ):
        node.fault("BOUND", "the lower bound lies above the upper one")
    interval = Interval(low, low_inside, high, high_inside)
    return _to_canonical(node, interval, field, unit)


def _to_canonical(node: Node, interval: Interval, field: Field | None, unit: str) -> Interval:
    if field is None or not unit:
        return interval
    try:
        times, by_weight = factor(field, unit)
    except UsageError as problem:
        node.fault("UNIT", problem.what)
        return interval
    if by_weight:
        node.fault("UNIT", "a bound may not need a weight")
    low = None if interval.low is None else interval.low * times
    high = None if interval.high is None else interval.high * times
    return replace(interval, low=low, high=high)


def read_condition(
    node: Node, inputs: Mapping[str, Input], default_input: str = "", unit: str = ""
) -> Condition:
    """`input` with bounds, or with `is` / `is_any`; a bound may be given in another unit."""
    key = node.text("input", default_input) if default_input else node.text("input")
    source = inputs.get(key)
    if source is None:
        node.fault("INPUT", f"{key or 'the input'} is not among the [[input]] tables")
    field = source.field if source else None
    own_unit = node.text("unit", unit)
    equals = node.values("is_any") or (() if not node.has("is") else (node.any_value("is"),))
    node.asked |= {"is"}
    interval = read_interval(node, field, own_unit)
    bounded = interval != Interval()
    if field is not None and field.is_numeric and (equals or not bounded):
        node.fault("CONDITION", f"{key} is a number: give bounds")
    if field is not None and not field.is_numeric:
        _check_words(node, field, equals, bounded)
    shown = (
        f" {own_unit}" if own_unit else (f" {field.unit}" if field and field.unit not in ("", "1") else "")
    )
    printed = _printed(node) + shown if bounded else " or ".join(_word(v) for v in equals)
    return Condition(key, interval if bounded else None, equals, printed)


def _printed(node: Node) -> str:
    names = {"at_least": "at least", "above": "above", "at_most": "at most", "below": "below"}
    return ", ".join(
        f"{names[k]} {node.data[k]:g}" for k in names if isinstance(node.data.get(k), int | float)
    )


def _word(value: Any) -> str:
    return {True: "yes", False: "no"}[value] if isinstance(value, bool) else str(value)


def _check_words(node: Node, field: Field, equals: tuple[Any, ...], bounded: bool) -> None:
    allowed: tuple[Any, ...] = (True, False) if field.kind == "yes_no" else field.choices
    if bounded or not equals:
        node.fault("CONDITION", f"{field.name} is no number: give is or is_any")
    for value in equals:
        if value not in allowed or (field.kind == "yes_no") != isinstance(value, bool):
            node.fault("CONDITION", f"{field.name} cannot be {_word(value)}")


def _read_conditions(node: Node, key: str, inputs: Mapping[str, Input]) -> tuple[Condition, ...]:
    out = []
    for child in node.children(key):
        out.append(read_condition(child, inputs))
        child.finish()
    if not out:
        node.fault("MISSING", f"{key} needs at least one condition")
    return tuple(out)


def read_item(node: Node, inputs: Mapping[str, Input]) -> Item:
    """bands, values, yes/no, cases or points_per_unit: exactly one of these forms."""
    key = node.text("key")
    evidence = node.word("evidence", EVIDENCE)
    unit = node.text("unit", "")
    single = node.text("input", "")
    forms = [form for form in ("bands", "values", "yes", "cases", "points_per_unit") if node.has(form)]
    if len(forms) != 1:
        node.fault("FORM", "an item has exactly one of bands, values, yes, cases, points_per_unit")
    rows = _read_rows(node, forms[0] if forms else "", single, unit, evidence, inputs)
    item = Item(
        key=key,
        label=node.text("label"),
        group=node.text("group", key),
        kind="per_unit" if forms == ["points_per_unit"] else "rows",
        rows=rows,
        otherwise=node.optional_number("otherwise"),
        per_unit=node.optional_number("points_per_unit"),
        unit=unit,
        evidence=evidence,
        not_applicable=tuple(
            _read_gate(child, inputs, evidence) for child in node.children("not_applicable")
        ),
        claims_monotone=node.flag("claims_monotone", False),
        note=node.text("note", ""),
        only_with=node.words("only_with"),
    )
    if (item.otherwise is None) == (forms == ["cases"]):
        node.fault("FORM", "cases need `otherwise`; the other forms may not have it")
    node.finish()
    return item


def _read_rows(
    node: Node, form: str, single: str, unit: str, evidence: str, inputs: Mapping[str, Input]
) -> tuple[Row, ...]:
    if form == "cases":
        return tuple(_read_case(child, inputs, evidence) for child in node.children("cases"))
    if single not in inputs:
        node.fault("INPUT", f"{single or 'the input'} is not among the [[input]] tables")
    if form == "yes":
        yes, no = node.number("yes"), node.number("no", 0.0)
        return (
            Row((Condition(single, None, (True,), "yes"),), yes, evidence),
            Row((Condition(single, None, (False,), "no"),), no, evidence),
        )
    if form == "points_per_unit":
        return (Row((Condition(single, Interval(), (), "per unit"),), 0.0, evidence),)
    out = []
    for child in node.children(form) if form else []:
        when = (read_condition(child, inputs, single, unit),)
        out.append(_row(child, when, evidence))
    return tuple(out)


def _read_case(node: Node, inputs: Mapping[str, Input], evidence: str) -> Row:
    return _row(node, _read_conditions(node, "when", inputs), evidence)


def _row(node: Node, when: tuple[Condition, ...], evidence: str) -> Row:
    own = node.word("evidence", EVIDENCE, evidence)
    row = Row(when, node.number("points"), own, node.words("only_with"))
    node.finish()
    return row


def _read_gate(node: Node, inputs: Mapping[str, Input], evidence: str) -> NotApplicable:
    when = _read_conditions(node, "when", inputs)
    raw = node.any_value("points")
    if raw != "range" and (isinstance(raw, str | bool) or raw is None):
        node.fault("TYPE", 'points of not_applicable must be a number or "range"')
    points = float(raw) if isinstance(raw, int | float) else None
    own = node.word("evidence", EVIDENCE, evidence)
    gate = NotApplicable(when, points, own, node.words("only_with"))
    node.finish()
    return gate


def read_rule(node: Node, inputs: Mapping[str, Input]) -> Rule:
    rule = Rule(
        key=node.text("key"),
        text=node.text("text"),
        any_of=_read_conditions(node, "any", inputs),
        evidence=node.word("evidence", EVIDENCE),
        unknown_is_met=node.flag("unknown_is_met", False),
        only_with=node.words("only_with"),
    )
    node.finish()
    return rule


def read_class(node: Node) -> ScoreClass:
    probability = node.optional_number("probability")
    if probability is not None and not 0.0 <= probability <= 1.0:
        node.fault("PROBABILITY", "a probability lies between 0 and 1")
    out = ScoreClass(
        key=node.text("key"),
        interval=read_interval(node, None, ""),
        probability=probability,
        evidence=node.word("evidence", EVIDENCE),
        printed_low=node.optional_number("printed_low"),
        printed_high=node.optional_number("printed_high"),
        only_with=node.words("only_with"),
    )
    node.finish()
    return out


def read_convention(node: Node) -> Convention:
    options = {str(k): str(v) for k, v in node.mapping("options").items()}
    out = Convention(
        node.text("key"), node.text("question"), node.text("default"), options, node.text("why", "")
    )
    if out.default not in options:
        node.fault("CONVENTION", f"the default of {out.key} is not among its options")
    node.finish()
    return out


def read_vector(node: Node) -> Vector:
    out = Vector(
        key=node.text("id"),
        inputs=node.mapping("inputs"),
        points={str(k): float(v) for k, v in node.mapping("points").items()},
        total=node.number("total"),
        class_key=node.text("class", "") or None,
        probability=node.optional_number("probability"),
        options={str(k): str(v) for k, v in node.mapping("options").items()},
        units={str(k): str(v) for k, v in node.mapping("units").items()},
    )
    node.finish()
    return out

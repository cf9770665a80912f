"""Whether a score table makes sense as a whole: no gap, no overlap, range, classes, names, options."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from itertools import pairwise, product
from typing import Any

from outcomes.scores.model import Interval, Item, Row, Score, ScoreClass, applies, under
from outcomes.scores.reading import Problems

MOST_INPUTS = 30
MOST_STEPS = 12


def check_score(score: Score, problems: Problems) -> None:
    """Add every inconsistency of `score` to `problems`."""
    _check_names(score, problems)
    _check_options_exist(score, problems)
    if not score.is_implemented:
        if not score.sheet["missing"]:
            problems.add("RESERVED", "a reserved score says what is missing", "missing")
        return
    if not score.items:
        problems.add("MISSING", "an implemented score needs items", "item")
    if problems.found:
        return
    for item in score.items:
        _check_item(score, item, problems)
    _check_variants(score, problems)
    _check_input_use(score, problems)
    _check_range(score, problems)
    _check_classes(score, problems)
    _check_vectors(score, problems)


def _named(parts: Iterable[Any]) -> list[tuple[str, tuple[str, ...]]]:
    return [(part.key, part.only_with) for part in parts]


def _check_names(score: Score, problems: Problems) -> None:
    if not score.key.isidentifier() or score.key != score.key.lower():
        problems.add("KEY", "a key is a lower-case word", "key")
    if len(score.inputs) > MOST_INPUTS:
        problems.add("INPUT", f"at most {MOST_INPUTS} inputs", "input")
    parts: tuple[tuple[str, list[tuple[str, tuple[str, ...]]]], ...] = (
        ("input", _named(score.inputs)),
        ("item", _named(score.items)),
        ("class", _named(score.classes)),
        ("population", _named(score.population)),
        ("convention", [(x.key, ()) for x in score.conventions]),
        ("vector", [(x.key, ()) for x in score.vectors]),
    )
    for kind, keys in parts:
        for entry in sorted({entry for entry in keys if keys.count(entry) > 1}):
            problems.add("TWICE", f"{entry[0]} is given twice", kind)


def _all_only_with(score: Score) -> Iterator[tuple[str, ...]]:
    for item in score.items:
        yield item.only_with
        yield from (row.only_with for row in item.rows)
        yield from (gate.only_with for gate in item.not_applicable)
    for part in (score.inputs, score.population, score.classes):
        yield from (entry.only_with for entry in part)


def _check_options_exist(score: Score, problems: Problems) -> None:
    known = {f"{c.key}={option}" for c in score.conventions for option in c.options}
    used = {name for only_with in _all_only_with(score) for name in only_with}
    for name in sorted(used - known):
        problems.add("CONVENTION", f"only_with {name} names no option of a convention", "only_with")
    for convention in score.conventions:
        if len(convention.options) > 1 and not any(n.startswith(f"{convention.key}=") for n in used):
            problems.add("CONVENTION", f"the options of {convention.key} change nothing", "convention")


def _combinations(score: Score, only_with: Iterable[tuple[str, ...]]) -> Iterator[dict[str, str]]:
    """Every combination of the options that these parts depend on."""
    named = {name.split("=")[0] for names in only_with for name in names}
    involved = [c for c in score.conventions if c.key in named]
    for choice in product(*(list(c.options) for c in involved)):
        yield {c.key: option for c, option in zip(involved, choice, strict=True)}


def _check_variants(score: Score, problems: Problems) -> None:
    """Under every choice: no key twice, and every input that is read is there."""
    parts = [x.only_with for x in score.inputs]
    parts += [x.only_with for x in score.items] + [x.only_with for x in score.population]
    for chosen in _combinations(score, parts):
        active = under(score, {**defaults(score), **chosen})
        there = {x.key for x in active.inputs}
        read = {key for item in active.items for key in item.inputs}
        read |= {c.input for item in active.items for gate in item.not_applicable for c in gate.when}
        read |= {c.input for rule in active.population for c in rule.any_of}
        read |= {x.zero_when_true for x in active.inputs} - {""}
        choice = ", ".join(f"{key}={value}" for key, value in chosen.items())
        for key in sorted(read - there):
            problems.add("INPUT", f"{key} is read but not an input under {choice or 'the defaults'}", "input")
        for kind, keys in (
            ("item", [x.key for x in active.items]),
            ("input", [x.key for x in active.inputs]),
            ("population", [x.key for x in active.population]),
        ):
            for key in sorted({key for key in keys if keys.count(key) > 1}):
                problems.add("TWICE", f"{key} applies twice under {choice or 'the defaults'}", kind)


def _check_item(score: Score, item: Item, problems: Problems) -> None:
    where = f"item {item.key}"
    if item.kind == "per_unit":
        return
    if len({row.points for row in item.rows}) > MOST_STEPS:
        problems.add("POINTS", f"at most {MOST_STEPS} different points in one item", where)
    parts = [item.only_with, *(r.only_with for r in item.rows), *(g.only_with for g in item.not_applicable)]
    for chosen in _combinations(score, parts):
        if not applies(item.only_with, chosen):
            continue
        rows = [row for row in item.rows if applies(row.only_with, chosen)]
        if len([g for g in item.not_applicable if applies(g.only_with, chosen)]) > 1:
            problems.add("TWICE", "several not_applicable rules apply at once", where)
        if item.otherwise is None:
            _check_cover(score, item, rows, where, problems)


def _check_cover(score: Score, item: Item, rows: list[Row], where: str, problems: Problems) -> None:
    source = next(x for x in score.inputs if x.key == item.inputs[0])
    conditions = [row.when[0] for row in rows]
    if source.field.is_numeric:
        check_tiling([c.interval or Interval() for c in conditions], where, problems)
        return
    words = [value for c in conditions for value in c.equals]
    allowed = [True, False] if source.field.kind == "yes_no" else list(source.field.choices)
    for value in allowed:
        if words.count(value) == 0:
            problems.add("GAP", f"{value} has no points", where)
        if words.count(value) > 1:
            problems.add("OVERLAP", f"{value} has points twice", where)


def check_tiling(intervals: list[Interval], where: str, problems: Problems) -> None:
    """Together the intervals cover every number once: first and last open, neighbours meet."""
    ordered = sorted(intervals, key=lambda i: (i.low is not None, i.low or 0.0, not i.low_inside))
    if not ordered or ordered[0].low is not None or ordered[-1].high is not None:
        problems.add("GAP", "the first band must have no lower and the last no upper bound", where)
        return
    for left, right in pairwise(ordered):
        if left.high is None or right.low is None or left.high > right.low:
            problems.add("OVERLAP", "two bands overlap", where)
        elif left.high < right.low or (not left.high_inside and not right.low_inside):
            problems.add("GAP", f"nothing covers the values at {right.low:g}", where)
        elif left.high_inside and right.low_inside:
            problems.add("OVERLAP", f"{right.low:g} lies in two bands", where)


def _check_input_use(score: Score, problems: Problems) -> None:
    used = {key for item in score.items for key in item.inputs}
    used |= {c.input for item in score.items for g in item.not_applicable for c in g.when}
    used |= {c.input for rule in score.population for c in rule.any_of}
    used |= {entry.zero_when_true for entry in score.inputs}
    kinds = {entry.key: entry.field.kind for entry in score.inputs}
    for name in {entry.zero_when_true for entry in score.inputs} - {""}:
        if kinds.get(name) != "yes_no":
            problems.add("INPUT", f"zero_when_true names {name}, which is no yes/no input", "input")
    for entry in score.inputs:
        if entry.key not in used:
            problems.add("INPUT", f"the input {entry.key} is used by nothing", "input")


def item_limits(item: Item, all_options: bool = False) -> tuple[float, float]:
    """Lowest and highest points of the rows of an item (all_options keeps every variant's rows)."""
    points = [row.points for row in item.rows]
    points += [] if item.otherwise is None else [item.otherwise]
    if all_options:
        points += [g.points for g in item.not_applicable if g.points is not None]
    return min(points), max(points)


def defaults(score: Score) -> dict[str, str]:
    """The default option of every convention."""
    return {c.key: c.default for c in score.conventions}


def _check_range(score: Score, problems: Problems) -> None:
    if not score.is_whole_numbered:
        return
    if score.published_range is None:
        problems.add("MISSING", "range (lowest and highest total) is required", "range")
        return
    chosen = defaults(score)
    low = high = score.constant
    for item in (x for x in score.items if applies(x.only_with, chosen)):
        points = [row.points for row in item.rows if applies(row.only_with, chosen)]
        points += [] if item.otherwise is None else [item.otherwise]
        low, high = low + min(points), high + max(points)
    if (low, high) != score.published_range:
        problems.add(
            "RANGE",
            f"the items give {low:g} to {high:g}, the range says {score.published_range[0]:g} to "
            f"{score.published_range[1]:g}",
            "range",
        )
    if any(points != round(points) for item in score.items for points in item_limits(item, True)):
        problems.add("POINTS", "points must be whole numbers", "item")


def widest_range(score: Score) -> tuple[int, int]:
    """Lowest and highest total that any option can give (whole-numbered scores)."""
    low = high = score.constant
    for key in dict.fromkeys(item.key for item in score.items):
        limits = [item_limits(item, True) for item in score.items if item.key == key]
        low += min(0.0, *(lo for lo, _ in limits))
        high += max(0.0, *(hi for _, hi in limits))
    return int(low), int(high)


def _check_classes(score: Score, problems: Problems) -> None:
    if not score.classes:
        return
    if not score.is_whole_numbered:
        problems.add("CLASS", "classes need whole-numbered totals", "class")
        return
    if score.purpose == "prognosis" and score.event == "none":
        problems.add("OUTCOME", "classes with a probability need an outcome", "outcome")
    assert score.published_range is not None
    low, high = (int(v) for v in score.published_range)
    for chosen in _combinations(score, [c.only_with for c in score.classes]):
        active = [c for c in score.classes if applies(c.only_with, chosen)]
        _check_class_cover(active, range(low, high + 1), problems)


def _check_class_cover(active: list[ScoreClass], totals: range, problems: Problems) -> None:
    for total in totals:
        count = sum(c.interval.holds(float(total)) for c in active)
        if count != 1:
            what = "lies in no class" if count == 0 else "lies in two classes"
            problems.add("CLASS", f"the total {total} {what}", "class")
            return


def _check_vectors(score: Score, problems: Problems) -> None:
    if not score.vectors:
        problems.add("VECTOR", "at least one worked vector is required", "vector")
    known = {entry.key for entry in score.inputs}
    named = {name for item in score.items for name in (item.key, item.group)}
    for vector in score.vectors:
        for key in sorted(set(vector.inputs) - known):
            problems.add("VECTOR", f"{key} is no input of this score", f"vector {vector.key}")
        for key in sorted(set(vector.points) - named):
            problems.add("VECTOR", f"{key} is no item or group of this score", f"vector {vector.key}")

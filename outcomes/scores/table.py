"""From the text of a TOML file to a checked score. Every fault has a code SCORE-FILE.…"""

from __future__ import annotations

import hashlib
import tomllib
from typing import Any

from outcomes.scores.consistency import check_score
from outcomes.scores.model import EVENTS, EVIDENCE, Input, Score
from outcomes.scores.parts import (
    read_class,
    read_convention,
    read_input,
    read_item,
    read_rule,
    read_vector,
)
from outcomes.scores.reading import Node, Problems

FORM = 1
STATUSES = ("implemented", "reserved")
PURPOSES = ("prognosis", "descriptor")
DIRECTIONS = ("higher is better", "higher is worse", "none")


def parse_score(text: str, whose: str = "ours", expected_key: str = "") -> Score:
    """The score in this TOML text, checked as a whole.

    Raises UsageError SCORE-FILE.… at the first fault, naming how many more there are.
    """
    problems = Problems()
    score = read_score(text, problems, whose, expected_key)
    problems.stop_if_any(expected_key or (score.key if score else "?"))
    assert score is not None  # no problem was found, so the text was read
    return score


def read_score(text: str, problems: Problems, whose: str = "ours", expected_key: str = "") -> Score | None:
    """Like `parse_score`, but collects every fault in `problems`; None if the text is no TOML at all."""
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        problems.add("TOML", f"not valid TOML: {error}", "file")
        return None
    top = Node(data, "", problems)
    if top.number("form", 0.0) != FORM:
        top.fault("FORM", f"form must be {FORM}")
    score = _read_all(top, text, whose)
    top.finish()
    if expected_key and score.key != expected_key:
        top.fault("KEY", f"the key {score.key} differs from the name of the file")
    if not problems.found:
        check_score(score, problems)
    return score


def _read_all(top: Node, text: str, whose: str) -> Score:
    inputs: dict[str, Input] = {}
    listed = tuple(read_input(node) for node in top.children("input"))
    for entry in listed:
        inputs.setdefault(entry.key, entry)
    outcome = top.child("outcome")
    limits = [v for v in top.values("range") if isinstance(v, int | float) and not isinstance(v, bool)]
    if top.has("range") and len(limits) != 2:
        top.fault("TYPE", "range must be two numbers")
    score = Score(
        key=top.text("key"),
        name=top.text("name"),
        long_name=top.text("long_name"),
        status=top.word("status", STATUSES),
        purpose=top.word("purpose", PURPOSES),
        direction=top.word("direction", DIRECTIONS),
        event=outcome.word("event", EVENTS, "none"),
        outcome=outcome.text("text", ""),
        horizon=outcome.text("horizon", ""),
        constant=top.number("constant", 0.0),
        constant_evidence=top.word("constant_evidence", EVIDENCE, "verified"),
        published_range=(float(limits[0]), float(limits[1])) if len(limits) == 2 else None,
        range_evidence=top.word("range_evidence", EVIDENCE, "verified"),
        inputs=listed,
        items=tuple(read_item(node, inputs) for node in top.children("item")),
        population=tuple(read_rule(node, inputs) for node in top.children("population")),
        classes=tuple(read_class(node) for node in top.children("class")),
        conventions=tuple(read_convention(node) for node in top.children("convention")),
        vectors=tuple(read_vector(node) for node in top.children("vector")),
        sheet=_read_sheet(top),
        whose=whose,
        text_hash=hashlib.sha256(text.encode()).hexdigest(),
    )
    outcome.finish()
    return score


def _read_sheet(top: Node) -> dict[str, Any]:
    """What is printed and never computed with: citation, derivation, performance, cautions, gaps."""
    citation = top.child("citation")
    derivation = top.child("derivation")
    sheet = {
        "citation": {
            "text": citation.text("text"),
            "doi": citation.text("doi", ""),
            "evidence": citation.word("evidence", EVIDENCE),
        },
        "derivation": _read_derivation(derivation),
        "performance": [_read_performance(node) for node in top.children("performance")],
        "population_text": top.text("population_text", ""),
        "distrust": top.words("distrust"),
        "definitions": top.words("definitions"),
        "known": top.words("known"),
        "missing": top.words("missing"),
        "where_printed": top.text("where_printed", ""),
    }
    citation.finish()
    derivation.finish()
    return sheet


def _read_derivation(node: Node) -> dict[str, Any]:
    return {
        "text": node.text("text", ""),
        "years": node.text("years", ""),
        "n": node.optional_number("n"),
        "n_events": node.optional_number("n_events"),
        "event": node.text("event", ""),
        "evidence": node.word("evidence", EVIDENCE, "verified"),
    }


def _read_performance(node: Node) -> dict[str, Any]:
    row = {
        "cohort": node.text("cohort"),
        "n": node.optional_number("n"),
        "n_events": node.optional_number("n_events"),
        "auroc": node.optional_number("auroc"),
        "auroc_low": node.optional_number("auroc_low"),
        "auroc_high": node.optional_number("auroc_high"),
        "remark": node.text("remark", ""),
        "evidence": node.word("evidence", EVIDENCE),
    }
    node.finish()
    return row

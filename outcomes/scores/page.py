"""All score sheets as the text of one manual page, with an evidence tag beside every line.

The page that ships is made anew by: python -m outcomes.scores.page > reports/manual/050_scores.md
"""

from __future__ import annotations

import sys
from collections.abc import Iterable, Mapping
from typing import Any

from outcomes.scores.catalogue import list_scores
from outcomes.scores.sheet import CAUTION, ScoreSheet, describe_score

Line = Mapping[str, Any]


def sheet_lines(sheet: ScoreSheet) -> list[str]:
    """One sheet as plain lines, for a terminal and for the manual page alike."""
    lines = [f"{sheet.name}: {sheet.long_name}", f"{sheet.citation['text']}; doi {sheet.citation['doi']} ({sheet.citation['evidence']})"]
    lines.append(f"table: {sheet.table}; weakest evidence in it: {sheet.weakest_evidence or 'none'}")
    if sheet.missing:
        lines.append("not implemented: point table not verified; missing: " + "; ".join(sheet.missing))
        lines += [f"known: {text}" for text in sheet.known]
        return [*lines, *_inputs(sheet.inputs), sheet.caution]
    lines.append(f"predicts: {sheet.outcome}, {sheet.horizon}; {sheet.direction}" if sheet.outcome else f"describes; {sheet.direction}")
    if sheet.published_range:
        lines.append(f"range {_number(sheet.published_range[0])} to {_number(sheet.published_range[1])}, constant {_number(sheet.constant)}")
    lines.append(_derivation(sheet.derivation))
    lines += [f"for whom: {p['rule']} [{p['test']}] ({p['evidence']})" for p in sheet.population]
    lines += _inputs(sheet.inputs)
    lines += [_point(p) for p in sheet.points]
    lines += [_class(c) for c in sheet.classes]
    lines += [f"convention {c['convention']}: {c['question']} {'* ' if c['is_default'] else ''}{c['option']}: {c['meaning']}" for c in sheet.conventions]
    lines += [f"definition: {text}" for text in sheet.definitions]
    lines += [_performance(p) for p in sheet.performance]
    lines += [f"distrust: {text}" for text in sheet.distrust]
    lines.append(f"expected survivors: {'may be given' if sheet.expectation.is_usable else 'not given'}, {sheet.expectation.reason}")
    return [*lines, sheet.caution]


def manual_page() -> str:
    """The manual page of all scores, a section file with front matter; a test holds it against the file that ships."""
    parts = ['+++\ntitle = "Published scores, line by line"\nkind = "page"\n+++', CAUTION, "Evidence of each line: verified (read in the source), "
             "second-hand (another text's rendering), from memory (not read anywhere permitted), convention (ours, where the source is silent)."]  # fmt: skip
    for key in list_scores()["key"]:
        sheet = describe_score(str(key))
        parts += [f"## {sheet.name}", "```\n" + "\n".join(line for line in sheet_lines(sheet) if line != CAUTION) + "\n```"]
    return "\n\n".join(parts) + "\n"


def _number(value: Any) -> str:
    return f"{value:g}"


def _derivation(d: Line) -> str:
    sizes = [f"{_number(d['n'])} people" if d.get("n") else "", f"{_number(d['n_events'])} {d['event']}" if d.get("n_events") else ""]
    said = ", ".join(s for s in sizes if s)
    return f"made from: {d['text']}; {d['years']}{', ' + said if said else ''} ({d['evidence']})"


def _inputs(inputs: Iterable[Line]) -> list[str]:
    lines = []
    for x in inputs:
        unit = f", {x['unit']}" if x["unit"] else ""
        when = ", ".join(str(x[k]) for k in ("window", "worst") if x[k])
        lines.append(f"input {x['input']}{unit}{': ' + when if when else ''}")
    return lines


def _point(p: Line) -> str:
    points = p["points"] if isinstance(p["points"], str) else _number(p["points"])
    only = f" [only with {p['only_with']}]" if p["only_with"] else ""
    return f"points {points}: {p['item']}, {p['when']}{only} ({p['evidence']})"


def _class(c: Line) -> str:
    chance = "not printed" if c["probability"] is None else f"{100 * c['probability']:g}%"
    only = f" [only with {c['only_with']}]" if c["only_with"] else ""
    return f"class {c['class']}, total {c['total']}: {chance}, {c['of']}, {c['horizon']}{only} ({c['evidence']})"


def _performance(p: Line) -> str:
    area = "" if p["auroc"] is None else f", AUROC {_number(p['auroc'])}"
    if area and p["auroc_low"] is not None:
        area += f" ({_number(p['auroc_low'])} to {_number(p['auroc_high'])})"
    size = "" if p["n"] is None else f", {_number(p['n'])} people"
    return f"elsewhere: {p['cohort']}{size}{area}{'; ' + p['remark'] if p['remark'] else ''} ({p['evidence']})"


if __name__ == "__main__":
    sys.stdout.write(manual_page())

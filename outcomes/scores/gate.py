"""May a score enter an observed/expected? Only a whole, printed and checked table may."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date

from outcomes.errors import UsageError
from outcomes.scores.catalogue import Catalogue, chosen_options, find_score
from outcomes.scores.model import UNCHECKED, Score, under


@dataclass(frozen=True)
class DeclaredCheck:
    """A programme's statement that someone compared a table with the paper.

    score: key; checked_on: ISO date; role: who, by role and not by name; text_hash: hash of the table that
    was checked (`Score.text_hash`), so that a later change of the table ends the statement; '' = not bound.
    """

    score: str
    checked_on: str
    role: str
    text_hash: str = ""

    def __post_init__(self) -> None:
        try:
            date.fromisoformat(self.checked_on)
        except ValueError:
            raise UsageError(
                "SCORE.CHECK", "the date of a declared check must be an ISO date (YYYY-MM-DD)"
            ) from None
        if not self.role.strip():
            raise UsageError("SCORE.CHECK", "a declared check names the role of the person who checked")


@dataclass(frozen=True)
class Usable:
    """The answer with its reason. unchecked: the lines that are second-hand or from memory."""

    is_usable: bool
    code: str
    reason: str
    unchecked: tuple[str, ...] = ()


def usable_for_expectation(
    score: str | Score,
    declared_checks: Sequence[DeclaredCheck] = (),
    *,
    options: dict[str, str] | None = None,
    tables: Catalogue | None = None,
) -> Usable:
    """Whether expected events may be summed from this table.

    No for reserved scores, descriptors, tables without (or with only some) printed probabilities, and, until
    the programme declares a check against the paper, tables with anything second-hand or from memory.

    >>> usable_for_expectation("tips65").is_usable, usable_for_expectation("save").code
    (True, 'unchecked')
    """
    whole = find_score(score, tables)
    if not whole.is_implemented:
        return Usable(False, "reserved", "not implemented: point table not verified")
    if whole.purpose == "descriptor":
        return Usable(False, "descriptor", "a descriptor: no probability belongs to it")
    active = under(whole, chosen_options(whole, options))
    printed = [c.probability is not None for c in active.classes]
    if not any(printed):
        return Usable(False, "no_probability", "no probability was printed or read")
    if not all(printed):
        return Usable(False, "partial_probability", "probabilities were read for some totals only")
    unchecked = tuple(_unchecked(active))
    if not unchecked:
        return Usable(True, "verified", "every line was read in the source or is a labelled convention")
    return _judge_checks(whole, [c for c in declared_checks if c.score == whole.key], unchecked)


def _judge_checks(score: Score, checks: list[DeclaredCheck], unchecked: tuple[str, ...]) -> Usable:
    if not checks:
        return Usable(
            False,
            "unchecked",
            f"{len(unchecked)} lines are second-hand or from memory; no check against the paper is declared",
            unchecked,
        )
    valid = [c for c in checks if c.text_hash in ("", score.text_hash)]
    if not valid:
        return Usable(False, "check_outdated", "the table has changed since it was checked", unchecked)
    last = max(valid, key=lambda c: (c.checked_on, c.role))
    return Usable(
        True, "checked", f"checked against the paper on {last.checked_on} by {last.role}", unchecked
    )


def _unchecked(score: Score) -> list[str]:
    """Every line of the active table that is second-hand or from memory."""
    lines = []
    for item in score.items:
        tags = {row.evidence for row in item.rows} | {gate.evidence for gate in item.not_applicable}
        lines += [f"item {item.key}: {tag}" for tag in sorted(tags) if tag in UNCHECKED]
    lines += [f"class {c.key}: {c.evidence}" for c in score.classes if c.evidence in UNCHECKED]
    if score.constant and score.constant_evidence in UNCHECKED:
        lines.append(f"constant: {score.constant_evidence}")
    return lines

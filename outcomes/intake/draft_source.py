"""The questions that no value of a file can answer: what the source is, and what it means by its complications."""

from __future__ import annotations

from collections.abc import Sequence

from outcomes.intake.draft_text import entry

# (comment, key). A date is written without quotes; every other answer keeps them.
_QUESTIONS: tuple[tuple[str, str], ...] = (
    ("Whose record numbers are these? Sources that share the numbers of one hospital write the same short word here.", "identifiers"),
    ("Which period do the runs cover? Two dates without quotes: [2021-01-01, 2023-12-31]", "period"),
    ("On which day was the extract made? A date without quotes: 2024-03-31", "extract_date"),
    ('"whole": every run of the period; "addition": only new or late rows', "extent"),
    ('In which zone do the clocks run? Such as "Europe/Vienna", or "in cell" if every time carries its offset.', "time_zone"),
    ('Was the plan written "at start" of support, or "overwritten" later, or is that "unknown"?', "plan_written"),
    ("Up to which day was it checked who is alive? A date without quotes, not after extract_date.", "vital_status_checked"),
    ('What is the date beside a death: the "day of death", or the "day of news" on which you heard of it?', "vital_status_date"),
    ('No death recorded means: "alive" (a death register was asked), or "unknown" (only contacts are known).', "no_death_means"),
    ('Cannulations that never reached flow are "included", or "not in this source".', "attempts"),
    ('"keep" a file of the starts of support beside the store (later additions and views by quarter need it), or "decline".', "calendar"),
)  # fmt: skip
_COMPLICATIONS: tuple[tuple[str, str], ...] = (
    ('"all" events of a run are written down, or only the "first" of each kind', "events_kept"),
    ("For how many hours after the end of support does the source still look for them? A number without quotes; 0: not at all.", "looked_until_hours_after_end"),
    ("Whose definition is used? A few words, such as a consensus paper, or \"our own list\".", "definition"),
    ("From which calendar year on does this hold? A number without quotes: 2021", "valid_from_year"),
)  # fmt: skip


def source_lines() -> list[str]:
    """One mark a declaration, each with its question above it."""
    return _asked(_QUESTIONS)


def complication_lines(kinds: Sequence[str]) -> list[str]:
    """One block for all kinds found; none if the source has no complications."""
    if not kinds:
        return []
    unknown = [
        "# Every kind that the codes below lead to stands in this list; the question mark is for those still open."
    ]
    return [
        "",
        "# What the source means by its complications. If the answers differ by kind, or a definition changed in some year,",
        "# copy the block and share out the kinds.",
        "[[source.complication]]",
        *(unknown if "?" in kinds else []),
        *entry("kinds", list(kinds)),
        *_asked(_COMPLICATIONS),
    ]


def _asked(questions: Sequence[tuple[str, str]]) -> list[str]:
    return [line for words, key in questions for line in (f"# {words}", f'{key} = "?"')]

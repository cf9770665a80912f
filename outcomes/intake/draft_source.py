"""The questions that no value of a file can answer: what the source is, and what it means by its complications."""

from __future__ import annotations

from collections.abc import Sequence

SOURCE_QUESTIONS = (
    "# number space of the identifiers: sources of one hospital that share record numbers write the same word here",
    'identifiers = "?"',
    "# the period whose runs this source covers, two dates: [2021-01-01, 2023-12-31]",
    'period = "?"',
    "# the day on which the extract was made: 2024-03-31",
    'extract_date = "?"',
    "# whole: everything of the period; addition: only new or late rows",
    'extent = "?"',
    '# zone of the clock times, such as "Europe/Vienna", or "in cell" if every time carries its offset',
    'time_zone = "?"',
    "# was the plan written when support began (at start), overwritten later (overwritten), or is that unknown (unknown)?",
    'plan_written = "?"',
    "# the day up to which it was checked who is alive: 2024-03-31",
    'vital_status_checked = "?"',
    '# what the date beside a death is: "day of death", or "day of news" (the day on which you heard of it)',
    'vital_status_date = "?"',
    '# no death up to the check date means: "alive" (a register was asked), or "unknown" (contacts only)',
    'no_death_means = "?"',
    '# attempts that never reached flow: "included", or "not in this source"',
    'attempts = "?"',
    "# keep a file of the starts of support beside the store (needed for later additions and quarterly views): keep | decline",
    'calendar = "?"',
)


def complication_questions(kinds: Sequence[str]) -> list[str]:
    """One block for all kinds found; none if the source has no complications."""
    if not kinds:
        return []
    listed = ", ".join(f'"{kind}"' for kind in kinds)
    return [
        "",
        "# What the complication columns mean. Split the block if the answers differ, or if a definition changed in some year.",
        "[[source.complication]]",
        f"kinds = [{listed}]",
        "# all: every event; first: only the first of each run",
        'events_kept = "?"',
        "# hours after the end of support for which the source still looks for events; 0 if it stops at the end",
        'looked_until_hours_after_end = "?"',
        "# whose definition it is, in a few words",
        'definition = "?"',
        "# first calendar year in which this holds: 2021",
        'valid_from_year = "?"',
    ]

"""What an empty cell means, asked once for a named set of columns."""

from __future__ import annotations

from collections.abc import Sequence

from outcomes.intake.draft_proposal import Proposal
from outcomes.intake.draft_sheet import targets_of

# (question, beginnings of the fields). The first group that fits a column takes it.
_GROUPS: tuple[tuple[str, tuple[str, ...]], ...] = (
    ("complications: did it not happen (none), or did nobody write it down (not recorded)?", ("complication.",)),
    ("ventilation before support: not ventilated (not applicable), or not written down (not recorded)?",
     ("measurement.peak_inspiratory_pressure", "pre_support_state.intubat")),
    ("arrest before support: there was none (not applicable), or not written down (not recorded)?", ("arrest_episode.", "pre_support_state.arrest_location")),
    ("doses: the drug was not given (none), or not written down (not recorded)?", ("vasoactive_dose.",)),
    ("laboratory and measured values: usually not recorded", ("measurement.",)),
    ("history and state before support: usually not recorded; none, if only a yes is ever written",
     ("history.", "pre_support_state.", "person.", "support_run.", "indication.", "cannulation.")),
    ("end of support: the pump still runs (still on support), or a mistake (defect)?", ("support_end.end", "support_end.kind", "support_end.duration")),
    ("what was done at the end: it does not arise for that way of ending (not applicable), or was not written down (not recorded)?", ("support_end.",)),
    ("discharge from hospital: not written down (not recorded)?", ("hospital_outcome.",)),
    ("after discharge: nobody to follow, such as after death (not applicable), or not written down (not recorded)?", ("follow_up.", "neuro_outcome.")),
    ("details: usually not recorded; defect for what a row cannot do without", ("complication_event.", "weaning_step.", "support_setting.", "circuit_", "cannula.", "lv_")),
    ("columns whose field is still open", ("",)),
)  # fmt: skip
_FULL = (
    "columns without a single empty cell: what would one mean in a later file? (defect: it would be reported)"
)


def blank_groups(columns: Sequence[Proposal]) -> list[tuple[str, list[str]]]:
    """(question, headers) of every group, in a fixed order; columns without an empty cell come last, together."""
    held: dict[str, list[str]] = {}
    full = [made.header for made in columns if made.profile.n_blank == 0]
    for made in columns:
        if made.profile.n_blank:
            first = targets_of(made)[0]
            question = next(q for q, beginnings in _GROUPS if first.startswith(beginnings))
            held.setdefault(question, []).append(made.header)
    groups = [(q, held[q]) for q, _ in _GROUPS if q in held]
    return [*groups, (_FULL, full)] if full else groups

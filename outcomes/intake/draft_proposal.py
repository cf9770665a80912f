"""What a draft says of one column, and a code list of the source."""

from __future__ import annotations

from dataclasses import dataclass, field

from outcomes.intake.draft_codes import OPEN
from outcomes.intake.draft_profile import Profile


@dataclass
class Proposal:
    """What the draft says of one column. values: key -> value, in order, not yet quoted; comments: key -> lines above it.

    role: 'column', 'leave_out' or 'join' (its text belongs to another column). why: reason of a leave_out. likely: our
    codes that hidden codes of the source seem to mean.
    """

    header: str
    profile: Profile
    role: str = "column"
    why: str = ""
    target: str = OPEN
    values: dict[str, object] = field(default_factory=dict)
    comments: dict[str, list[str]] = field(default_factory=dict)
    likely: tuple[str, ...] = ()

    def say(self, key: str, words: str) -> None:
        if words:
            self.comments.setdefault(key, []).append(words)


@dataclass(frozen=True)
class CodeList:
    """A code list of the source: code -> meaning, and which meanings may be shown if their code is frequent or known."""

    key: str
    meanings: dict[str, str]
    may_show: bool

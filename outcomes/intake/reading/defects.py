"""Collects what is wrong with a file, in bounded memory, and refuses it with everything that was found."""

from __future__ import annotations

from outcomes.errors import DataRefused
from outcomes.findings import Finding, in_order
from outcomes.intake.reading.codes import NOTES, REFUSALS
from outcomes.intake.reading.limits import FINDINGS

_SHOWN = 5


class Fatal(Exception):
    """Reading cannot go on; the defect itself is already listed. Never leaves this package."""


class Defects:
    """What was found in one file. `sheet` says which table is being read; places are line and column
    number."""

    def __init__(self, source: str) -> None:
        self.source = source
        self.sheet = ""
        self.findings: list[Finding] = []
        self.notes: list[Finding] = []
        self.n_more = 0

    @property
    def any(self) -> bool:
        return bool(self.findings)

    @property
    def n(self) -> int:
        return len(self.findings) + self.n_more

    def add(self, code: str, line: int = 0, column: int = 0, *, detail: str = "", shape: str = "") -> None:
        """List a defect. detail must be made of numbers and our own words."""
        rule = REFUSALS[code][0] + (f": {detail}" if detail else "")
        if len(self.findings) < FINDINGS:
            self.findings.append(self._finding(code, "file", line, column, rule, shape))
        else:
            self.n_more += 1

    def fatal(self, code: str, line: int = 0, column: int = 0, *, detail: str = "", shape: str = "") -> Fatal:
        """List a defect after which nothing can be read; the caller raises what it gets."""
        self.add(code, line, column, detail=detail, shape=shape)
        return Fatal(code)

    @staticmethod
    def fatal_again() -> Fatal:
        """After defects that are listed already, and after which nothing can be read."""
        return Fatal()

    def note(self, code: str, line: int = 0, column: int = 0, *, detail: str = "") -> None:
        """List something that was accepted."""
        rule = NOTES[code] + (f": {detail}" if detail else "")
        if len(self.notes) < FINDINGS:
            self.notes.append(self._finding(code, "note", line, column, rule, ""))

    def _finding(self, code: str, effect: str, line: int, column: int, rule: str, shape: str) -> Finding:
        place = f"column {column}" if column else ""
        return Finding(code, effect, 0, self.source, self.sheet, line, place, rule, shape)

    def refusal(self) -> DataRefused:
        """The error for everything listed. Its code is that of the first defect in the order of the file."""
        ordered = in_order(self.findings)
        first = ordered[0]
        n = self.n
        what = first.rule if n == 1 else f"{first.rule} ({n} defects of structure in all)"
        where = "; ".join(_place(f) for f in ordered[:_SHOWN]) + ("; …" if n > _SHOWN else "")
        return DataRefused(first.code, what, where=where, todo=REFUSALS[first.code][1], findings=ordered)

    def raise_if_any(self) -> None:
        if self.any:
            raise self.refusal()


def _place(finding: Finding) -> str:
    place = f"{finding.source}{'/' + finding.sheet if finding.sheet else ''}"
    place += f" line {finding.line}" if finding.line else ""
    return place + (f", {finding.column}" if finding.column else "")

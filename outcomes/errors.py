"""Every error this program raises on purpose, and the exit code it leaves with.

    OutcomesError                    has code, what, where, todo
    ├── UsageError           exit 2  the command line or a file that configures us is wrong
    ├── DataRefused          exit 3  an export or mapping cannot be used; carries findings
    ├── StoreProblem         exit 4  the store is foreign, damaged, incomplete, newer
    ├── StoreBusy            exit 5  another process is writing
    ├── DisclosureRefused    exit 6  what was asked for may not leave the hospital
    └── AnalysisRefused      exit 7  the analysis cannot be done on this input
        ├── InputRefused             an estimator was given input that no method accepts
        └── NotEstimable             an answer: there is no estimate, for a stated reason

A message never contains a value of the data. Our own bugs are not in this tree: they keep their traceback.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any


class OutcomesError(Exception):
    """A foreseen error in three lines: what happened, where, what to do.

    code: dotted, stable, upper case. No argument may hold a value of the data.
    """

    exit_code = 1

    def __init__(self, code: str, what: str, *, where: str = "", todo: str = "") -> None:
        super().__init__(code, what)
        self.code = code
        self.what = what
        self.where = where
        self.todo = todo

    def lines(self) -> list[str]:
        """The message as it is printed, one to three lines."""
        out = [f"{self.code}: {self.what}"]
        if self.where:
            out.append(f"  where: {self.where}")
        if self.todo:
            out.append(f"  what to do: {self.todo}")
        return out

    def __str__(self) -> str:
        return "\n".join(self.lines())


class UsageError(OutcomesError):
    exit_code = 2


class DataRefused(OutcomesError):
    """findings: the defects that led to the refusal (outcomes.findings.Finding)."""

    exit_code = 3

    def __init__(
        self, code: str, what: str, *, where: str = "", todo: str = "", findings: Sequence[Any] = ()
    ) -> None:
        super().__init__(code, what, where=where, todo=todo)
        self.findings = tuple(findings)


class StoreProblem(OutcomesError):
    exit_code = 4


class StoreBusy(OutcomesError):
    exit_code = 5


class DisclosureRefused(OutcomesError):
    exit_code = 6


class AnalysisRefused(OutcomesError):
    exit_code = 7


class InputRefused(AnalysisRefused):
    """Input that no method accepts: negative time, an undeclared event code, NaN in a required column."""

    def __init__(self, code: str, what: str) -> None:
        super().__init__(f"INPUT.{code.upper()}", what)


class NotEstimable(AnalysisRefused):
    """An answer in place of a number. `reason_code` is from the closed list in `terms.NOT_ESTIMABLE`."""

    def __init__(self, reason_code: str, reason: str) -> None:
        super().__init__(f"NOT-ESTIMABLE.{reason_code.upper().replace('_', '-')}", reason)
        self.reason_code = reason_code
        self.reason = reason

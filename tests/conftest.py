"""Says at the end of the tests how many reference cases agreed, and names those that were not run."""

from __future__ import annotations

import pytest

CASE = "test_reference_cases.py::test_case_agrees["


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    named: dict[str, list[str]] = {}
    for outcome in ("passed", "failed", "skipped"):
        for report in terminalreporter.stats.get(outcome, []):
            node = getattr(report, "nodeid", "")
            if CASE in node and (outcome == "skipped" or report.when == "call"):
                named.setdefault(outcome, []).append(node.split("[", 1)[1].rstrip("]"))
    if not named:
        return
    agreed, failed, skipped = (sorted(named.get(o, [])) for o in ("passed", "failed", "skipped"))
    terminalreporter.write_line(
        f"Reference cases: {len(agreed)} agree, {len(failed)} do not, {len(skipped)} were not run."
    )
    if skipped:
        terminalreporter.write_line("Not run, for want of their data: " + ", ".join(skipped))

"""Outcomes of veno-arterial ECMO support runs: intake, store, analysis, reports. Import is light; names load late."""

from __future__ import annotations

import importlib
from typing import Any

__version__ = "0.1.0"

_LAZY = {"scores", "analysis", "cohort", "criteria", "study", "report", "intake", "store"}


def __getattr__(name: str) -> Any:
    if name in _LAZY:
        return importlib.import_module(f"outcomes.{name}")
    raise AttributeError(name)

"""Analyses by the name that a section file uses.

Found by listing the modules of this package, not registered.
"""

from __future__ import annotations

import importlib
import pkgutil
from collections.abc import Callable

from outcomes import study
from outcomes.errors import OutcomesError
from outcomes.study.answer import Answer


def analyses() -> dict[str, Callable[..., Answer]]:
    """Name -> function of the audit data and the section's parameters.

    From ANALYSES of every module that has it.
    """
    found: dict[str, Callable[..., Answer]] = {}
    for module in pkgutil.iter_modules(study.__path__):
        if module.name == "catalogue":
            continue
        given = getattr(importlib.import_module(f"outcomes.study.{module.name}"), "ANALYSES", {})
        twice = sorted(found.keys() & given.keys())
        if twice:
            raise OutcomesError("INTERNAL.ANALYSES", f"two modules define the analysis {twice[0]}")
        found.update(given)
    return found

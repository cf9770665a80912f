"""Columns that hold a value for some rows and None for the others."""

from __future__ import annotations

from typing import Any

import numpy as np
import pandas as pd

from synthetic_cohort.hazards import Array, Flags


def given(mask: Flags | pd.Series, values: Any) -> Array:
    """An object array with `values` (an array or one value) where mask holds and None elsewhere.

    >>> given(np.array([True, False]), "home").tolist()
    ['home', None]
    """
    chosen = np.asarray(mask, dtype=bool)
    out = np.full(len(chosen), None, dtype=object)
    out[chosen] = np.broadcast_to(np.asarray(values), chosen.shape)[chosen]
    return out

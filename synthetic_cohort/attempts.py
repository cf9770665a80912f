"""Cannulations that never reached flow: no hour 0, so they are no runs."""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.clock import local, stream
from synthetic_cohort.names import Programme, person_names
from synthetic_cohort.settings import Settings

_REASONS = ("no_access", "no_flow", "died_before_flow", "injury", "other")


def attempt_frame(
    n_runs: int, cutoff: pd.Timestamp, start_year: int, programme: Programme, seed: int, settings: Settings
) -> pd.DataFrame:
    """One row an attempt: attempt_no, at_local, at_utc, reason, first_name, last_name, record_number.

    Record numbers have six digits: none of these people is in the run frame.
    """
    rng = stream(seed, "attempts")
    n = int(rng.poisson(n_runs * settings.attempts_share))
    first_day = pd.Timestamp(start_year, 1, 2)
    minutes = int((cutoff - first_day) / pd.Timedelta(minutes=1))
    at = first_day + pd.to_timedelta(pd.Series(np.sort(rng.integers(0, minutes, n)), dtype="int64"), unit="m")
    first, last = person_names(rng, n)
    return pd.DataFrame(
        {
            "attempt_no": np.arange(1, n + 1),
            "at_utc": at,
            "at_local": local(at, programme.zone),
            "reason": rng.choice(_REASONS, n, p=[0.35, 0.2, 0.25, 0.15, 0.05]),
            "first_name": first,
            "last_name": last,
            "record_number": [f"{v}" for v in 100_000 + np.arange(n) * 7],
        }
    )

"""Moments: random streams by topic, starts of support, local times, and the hour that exists twice."""

from __future__ import annotations

import zlib

import numpy as np
import pandas as pd

from synthetic_cohort.hazards import Array


def stream(seed: int, topic: str) -> np.random.Generator:
    """A random stream of its own for each topic, so that switching one off leaves the others unchanged."""
    return np.random.default_rng([seed, zlib.crc32(topic.encode())])


def to_minute(hours: Array) -> Array:
    """Hours rounded to whole minutes."""
    return np.round(np.asarray(hours, dtype=float) * 60.0) / 60.0


def add_hours(start: pd.Series, hours: Array | pd.Series) -> pd.Series:
    """Moments so many hours after `start`, to the minute; NaT where the hours are missing."""
    minutes = np.round(np.asarray(hours, dtype=float) * 60.0)
    gap = np.full(len(minutes), np.timedelta64("NaT"), dtype="timedelta64[m]")
    known = np.isfinite(minutes)
    gap[known] = minutes[known].astype("int64").astype("timedelta64[m]")
    return start + pd.Series(gap.astype("timedelta64[ns]"), index=start.index)


def local(utc: pd.Series, zone: str) -> pd.Series:
    """Wall-clock time of moments given in UTC without a zone mark."""
    return utc.dt.tz_localize("UTC").dt.tz_convert(zone).dt.tz_localize(None)


class TwiceHours:
    """The hours, in UTC, whose wall-clock time exists twice because the clocks go back in the middle.

    A person writing an export can not tell the two apart, so the generator lets nothing happen in them.
    """

    def __init__(self, zone: str, first_year: int, last_year: int) -> None:
        hours = pd.Series(pd.date_range(f"{first_year}-01-01", f"{last_year + 1}-01-01", freq="h"))
        wall = local(hours, zone)
        back = hours[wall.diff() < pd.Timedelta(hours=1)]
        self._from = (back - pd.Timedelta(hours=1)).to_numpy()
        self._to = (back + pd.Timedelta(hours=1)).to_numpy()

    def after(self, utc: pd.Series) -> pd.Series:
        """The same moments, those inside such hours moved to their end; order is kept."""
        values = utc.to_numpy().astype("datetime64[ns]")
        for low, high in zip(self._from, self._to, strict=True):
            values = np.where((values >= low) & (values < high), high, values)
        return pd.Series(values, index=utc.index)

    def hours_after(self, start: pd.Series, hours: Array | pd.Series) -> Array:
        """Hours after `start`, moved out of the hours that exist twice."""
        moved = self.after(add_hours(start, hours))
        return np.asarray(to_minute(((moved - start) / pd.Timedelta(hours=1)).to_numpy(dtype=float)))

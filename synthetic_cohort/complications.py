"""Complications on support as recurrent events: hazards by time on support, one gamma frailty a person.

The hazard of each kind is constant within bands of hours. Its shape follows what is told of its timing, its
size is set so that a run of usual length has the expected number of episodes named in `KINDS` (published
percentages where there are any). After an episode the same kind cannot begin again for `gap_h`. Nothing
depends on how support will end, apart from what happens at decannulation itself.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
import pandas as pd

from synthetic_cohort.clock import TwiceHours, stream, to_minute
from synthetic_cohort.hazards import Array, Flags, Index, group_hazards, incidence_at
from synthetic_cohort.settings import Settings

EDGES_H = np.array([0.0, 6.0, 12.0, 24.0, 48.0, 72.0, 96.0, 168.0, 336.0, 672.0, 20000.0])
MAX_EPISODES = 12


@dataclass(frozen=True)
class Kind:
    """One kind. per_run: expected episodes in a run at usual length and average modifiers. shape: relative
    hazard per hour in each band of EDGES_H. at_start, at_end: probability of one at cannulation (femoral
    return) and at planned decannulation. ecpr, surgical_early: multipliers. once: never twice in a run."""

    key: str
    per_run: float
    shape: tuple[float, ...]
    gap_h: float = 24.0
    once: bool = False
    femoral: bool = False
    leg_cannula: float = 1.0
    ecpr: float = 1.0
    surgical_early: float = 1.0
    at_start: float = 0.0
    at_end: float = 0.0


_FLAT = (1.0,) * 10
_EARLY = (3.0, 2.0, 1.5, 1.0, 0.7, 0.6, 0.5, 0.4, 0.35, 0.3)
_LATER = (0.0, 0.0, 0.0, 0.0, 1.0, 1.1, 1.3, 1.6, 1.9, 2.0)
_WEAR = (0.3, 0.5, 0.7, 1.0, 1.4, 1.7, 2.2, 3.0, 4.0, 4.0)

KINDS = (
    Kind("bleeding_cannulation_site", 0.15, _EARLY, at_end=0.02, surgical_early=1.5),
    Kind("bleeding_gastrointestinal", 0.05, _FLAT),
    Kind("bleeding_surgical_site", 0.06, _EARLY, surgical_early=5.0),
    Kind("stroke", 0.055, _FLAT, once=True),
    Kind("limb_ischaemia", 0.20, _EARLY, femoral=True, leg_cannula=0.35, once=True),
    Kind("vascular_injury", 0.0, _FLAT, gap_h=0.0, femoral=True, at_start=0.065, at_end=0.03, once=True),
    Kind(
        "differential_hypoxaemia",
        0.06,
        (0.0, 0.0, 0.0, 0.0, 1.0, 1.0, 1.0, 0.8, 0.6, 0.5),
        gap_h=6.0,
        femoral=True,
    ),
    Kind("lv_distension", 0.08, (6.0, 5.0, 3.0, 0.6, 0.4, 0.3, 0.2, 0.1, 0.1, 0.1), ecpr=3.0, once=True),
    Kind("intracardiac_thrombus", 0.04, (0.0, 0.0, *(1.0,) * 8), once=True),
    Kind("haemolysis", 0.06, (0.5, 0.6, 0.8, 1.0, 1.0, 1.0, 1.2, 1.4, 1.5, 1.5)),
    Kind("circuit_thrombosis", 0.10, _WEAR, gap_h=6.0),
    Kind("infection_bloodstream", 0.10, _LATER, gap_h=336.0),
    Kind("infection_respiratory", 0.14, _LATER, gap_h=336.0),
    Kind("renal_replacement", 0.62, (4.0, 4.0, 3.5, 2.5, 0.9, 0.7, 0.6, 0.5, 0.4, 0.4), once=True),
    Kind("arrest_on_support", 0.05, _EARLY, gap_h=1.0),
    Kind("air_entrainment", 0.006, _FLAT, gap_h=1.0),
)
KIND_KEYS = tuple(k.key for k in KINDS)


@lru_cache(maxsize=1)
def band_hazards() -> Array:
    """Hazard per hour at average modifiers, shape (kind, band)."""
    plain = Settings().plain()
    days = EDGES_H[1:-1] / 24.0
    fine = np.unique(np.concatenate([np.linspace(0.05, 60.0, 1200), days]))
    _, on = incidence_at(group_hazards(plain)[:1], fine)
    hours, share = np.concatenate([[0.0], fine * 24.0]), np.concatenate([[1.0], on[0]])
    spent = np.concatenate([[0.0], np.cumsum(np.diff(hours) * (share[1:] + share[:-1]) / 2.0)])
    in_band = np.diff(np.interp(EDGES_H, hours, spent))
    return np.array([k.per_run * np.array(k.shape) / np.dot(k.shape, in_band) for k in KINDS])


@dataclass(frozen=True)
class Supported:
    """What complications depend on, as arrays: femoral return, leg cannula, start during compressions, heart
    surgery, frailty; observation from and to (h), and whether cannulae came out for recovery at its end."""

    femoral: Flags
    leg_cannula: Flags
    ecpr: Flags
    surgical: Flags
    frailty: Array
    from_h: Array
    to_h: Array
    decannulated: Flags

    @classmethod
    def of(cls, run: pd.DataFrame, from_h: Array, to_h: Array, decannulated: Flags) -> Supported:
        return cls(
            (run["arterial_return"] == "femoral").to_numpy(),
            run["leg_cannula"].to_numpy(dtype=bool),
            run["is_ecpr"].to_numpy(dtype=bool),
            (run["indication_group"] == "post_cardiotomy").to_numpy(),
            run["frailty"].to_numpy(),
            from_h,
            to_h,
            decannulated,
        )


def modifiers(kind: Kind, runs: Supported, settings: Settings) -> tuple[Array, Array]:
    """Multiplier of the hazard of each run, before and after hour 48; frailty is not in it."""
    late = np.where(runs.femoral | (not kind.femoral), settings.complication_multiplier, 0.0)
    late = late * np.where(runs.leg_cannula, kind.leg_cannula, 1.0) * np.where(runs.ecpr, kind.ecpr, 1.0)
    return late * np.where(runs.surgical, kind.surgical_early, 1.0), late


def draw_onsets(
    rng: np.random.Generator, kind: Kind, runs: Supported, settings: Settings
) -> tuple[Index, Array]:
    """Row of the run and onset of each episode of one kind under observation; in no order."""
    hazard = band_hazards()[KIND_KEYS.index(kind.key)]
    early, late = modifiers(kind, runs, settings)
    rows, onset = _recurrent(rng, kind, hazard, early * runs.frailty, late * runs.frailty, runs.to_h)
    more_rows, more_onset = _at_handling(rng, kind, runs, settings)
    rows, onset = np.concatenate([rows, more_rows]), np.concatenate([onset, more_onset])
    keep = (onset > runs.from_h[rows]) & (onset < runs.to_h[rows])
    rows, onset = rows[keep], onset[keep]
    if kind.at_end > 0:
        # What happens at handling may come too soon: the same episode, or a second of a kind that comes once.
        order = np.lexsort((onset, rows))
        rows, onset = rows[order], onset[order]
        gap = np.inf if kind.once else kind.gap_h
        again = (rows[1:] == rows[:-1]) & (np.diff(onset) < gap)
        apart = np.concatenate([np.ones(min(1, len(rows)), dtype=bool), ~again])
        rows, onset = rows[apart], onset[apart]
    return rows, onset


def draw_events(rng: np.random.Generator, runs: Supported, settings: Settings) -> pd.DataFrame:
    """Events of all kinds: row, kind, onset_h, in order of run and time."""
    parts = []
    for kind in KINDS:
        rows, onset = draw_onsets(rng, kind, runs, settings)
        parts.append(pd.DataFrame({"row": rows, "kind": kind.key, "onset_h": onset}))
    events = pd.concat(parts, ignore_index=True)
    return events.sort_values(["row", "onset_h", "kind"], kind="stable").reset_index(drop=True)


def _recurrent(
    rng: np.random.Generator, kind: Kind, hazard: Array, early: Array, late: Array, to_h: Array
) -> tuple[Index, Array]:
    """Rows and onsets; a unit-exponential clock runs from the end of the last episode's gap on."""
    widths = np.diff(EDGES_H)
    total = np.concatenate([[0.0], np.cumsum(hazard * widths)])
    at_48 = float(np.interp(48.0, EDGES_H, total))

    def spent(hours: Array, rows: Array) -> Array:
        h = np.interp(hours, EDGES_H, total)
        return np.asarray(early[rows] * np.minimum(h, at_48) + late[rows] * np.maximum(h - at_48, 0.0))

    found_rows, found = [np.zeros(0, dtype=int)], [np.zeros(0)]
    left = np.flatnonzero((early > 0) & (total[-1] > 0))
    since = np.zeros(len(left))
    for _ in range(1 if kind.once else MAX_EPISODES):
        if not len(left):
            break
        goal = spent(since, left) + rng.exponential(size=len(left))
        before = goal <= early[left] * at_48
        h = np.where(before, goal / early[left], at_48 + (goal - early[left] * at_48) / late[left])
        onset = np.where(h < total[-1], _invert(h, total), np.inf)
        happened = onset < to_h[left]
        left, since = left[happened], onset[happened] + kind.gap_h
        found_rows.append(left)
        found.append(onset[happened])
    return np.concatenate(found_rows), np.concatenate(found)


def _invert(h: Array, total: Array) -> Array:
    """Hour at which the cumulative hazard reaches h; hazards stand still only in the first bands."""
    last_flat = int(np.flatnonzero(np.diff(total) > 0)[0])
    return np.asarray(np.interp(h, total[last_flat:], EDGES_H[last_flat:]))


def _at_handling(
    rng: np.random.Generator, kind: Kind, runs: Supported, settings: Settings
) -> tuple[Index, Array]:
    """Episodes at cannulation and at decannulation for recovery, apart from the hazards."""
    n = len(runs.frailty)
    suits = runs.femoral | (not kind.femoral)
    factor = settings.complication_multiplier
    first = np.flatnonzero(suits & (rng.random(n) < kind.at_start * factor))
    onset = rng.uniform(0.05, 2.0, len(first))
    last = np.flatnonzero(suits & runs.decannulated & (rng.random(n) < kind.at_end * factor))
    late = runs.to_h[last] - rng.uniform(1.0, 20.0, len(last)) / 60.0
    return np.concatenate([first, last]), np.concatenate([onset, late])


def complication_frame(
    run: pd.DataFrame, ending: pd.DataFrame, twice: TwiceHours, seed: int, settings: Settings
) -> pd.DataFrame:
    """One row an episode that began under observation on support: run_no, kind, onset_h, resolved_h,
    consequence.

    Onsets are on whole minutes, later than hour 0 and than arrival, and earlier than the end of support.
    """
    rng = stream(seed, "complications")
    to_h, from_h = ending["observed_h"].to_numpy(), ending["entry_h"].to_numpy()
    runs = Supported.of(run, from_h, to_h, (ending["end_kind"] == "recovery").to_numpy())
    events = draw_events(rng, runs, settings)
    row = events.pop("row").to_numpy()
    start = pd.Series(run["start_utc"].to_numpy()[row])
    events.insert(0, "run_no", run["run_no"].to_numpy()[row])
    minute = np.maximum(np.ceil(events["onset_h"].to_numpy() * 60.0), 1.0) / 60.0
    onset = twice.hours_after(start, minute)
    inside = (onset < to_h[row] - 0.5 / 60) & (onset > from_h[row])
    events["onset_h"] = onset
    # Episodes of one kind lie at least gap_h apart; an episode is over before that.
    gap = events["kind"].map({k.key: (k.gap_h if k.gap_h > 0 else 24.0) for k in KINDS}).to_numpy()
    length = np.minimum(
        np.exp(rng.normal(np.log(30.0), 0.7, len(events))), gap * rng.uniform(0.3, 0.95, len(events))
    )
    over = twice.hours_after(start, to_minute(onset + length + 1 / 60))
    events["resolved_h"] = np.where(over < to_h[row], over, np.nan)
    names = np.array(["seen", "treated", "procedure", "lasting_harm"])
    events["consequence"] = names[(rng.random(len(events))[:, None] > [0.30, 0.65, 0.93]).sum(axis=1)]
    return events[inside].reset_index(drop=True)

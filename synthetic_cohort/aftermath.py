"""Frames of what came after: endings, hospital stay and follow-up, neurological outcome, transfers.

Everything is cut at the moment of the extract, as a real source would know it.
"""

from __future__ import annotations

import numpy as np
import pandas as pd

from synthetic_cohort.clock import TwiceHours, add_hours, stream
from synthetic_cohort.given import given
from synthetic_cohort.hazards import Array
from synthetic_cohort.names import Programme
from synthetic_cohort.settings import Settings

CONTACT_DAYS = (0.0, 30.0, 90.0, 180.0, 365.0, 730.0, 1095.0, 1461.0)
_REASONS = (
    "futility_neurological",
    "futility_cardiac_no_exit",
    "futility_multiorgan",
    "complication",
    "patient_or_family_wish",
)
_CAUSES = ("cardiac", "multiorgan_failure", "neurological", "bleeding", "infection", "other")


def ending_frame(run: pd.DataFrame, cutoff: pd.Timestamp, seed: int) -> pd.DataFrame:
    """One row a run. end_kind 'open' and no end_h if support ran at the extract; true_* hold what came.

    observed_h: hours at the end of observation of support; support is watched from entry_h to there.
    """
    rng = stream(seed, "ending")
    n = len(run)
    is_open = (add_hours(run["start_utc"], run["end_h"]) > cutoff).to_numpy()
    cut_h = ((cutoff - run["start_utc"]) / pd.Timedelta(hours=1)).to_numpy()
    kind = run["true_end_kind"].to_numpy()
    out = pd.DataFrame(
        {
            "run_no": run["run_no"],
            "true_end_kind": kind,
            "true_end_h": run["end_h"],
            "entry_h": run["entry_h"],
        }
    )
    out["end_kind"] = np.where(is_open, "open", kind)
    out["end_h"] = np.where(is_open, np.nan, run["end_h"])
    out["observed_h"] = np.where(is_open, cut_h, run["end_h"])
    planned = (kind != "death") & (rng.random(n) < 0.92)
    out["end_planned"] = given(~is_open, planned)
    _add_ways_out(out, rng)
    return out


def _add_ways_out(out: pd.DataFrame, rng: np.random.Generator) -> None:
    """How the cannulae came out, what device stayed, why support was stopped, what death was of; in place."""
    n = len(out)
    is_open = out["end_kind"].eq("open").to_numpy()
    weaned = (out["end_kind"] == "recovery").to_numpy()
    place = np.array(["theatre", "icu_bedside", "cathlab"])[
        (rng.random(n)[:, None] > [0.6, 0.85]).sum(axis=1)
    ]
    repair = np.array(["open_repair", "closure_device", "pressure"])[
        (rng.random(n)[:, None] > [0.62, 0.9]).sum(axis=1)
    ]
    out["decannulation_place"] = given(weaned, place)
    out["arterial_repair"] = given(weaned, repair)
    device = np.select(
        [out["end_kind"] == "durable_lvad", out["end_kind"] == "temporary_pump"],
        ["durable_lvad", "temporary_left_pump"],
        "none",
    )
    out["device_implanted"] = given(~is_open, device)
    out["withdrawal_reason"] = given(
        out["end_kind"] == "withdrawal", rng.choice(_REASONS, n, p=[0.35, 0.25, 0.3, 0.05, 0.05])
    )
    out["death_cause_group"] = given(
        out["end_kind"] == "death", rng.choice(_CAUSES, n, p=[0.4, 0.3, 0.12, 0.1, 0.05, 0.03])
    )


def follow_up_frame(
    run: pd.DataFrame,
    ending: pd.DataFrame,
    cutoff: pd.Timestamp,
    twice: TwiceHours,
    seed: int,
    settings: Settings,
) -> pd.DataFrame:
    """One row a run: hospital stay (discharge_h, is_alive_at_discharge, discharge_to, is_still_inpatient),
    what a death register knows (register_death_h), what contacts know (contact_h, vital_status, death_h,
    contact_kind), and the truth (true_left_h, true_left_alive, true_death_h)."""
    rng = stream(seed, "follow up")
    n = len(run)
    cut_h = ((cutoff - run["start_utc"]) / pd.Timedelta(hours=1)).to_numpy()
    left, alive, death = run["left_h"].to_numpy(), run["left_alive"].to_numpy(), run["death_h"].to_numpy()
    moved = (ending["end_kind"] == "transfer_out").to_numpy()
    inside = left > cut_h
    known = ~inside & ~moved
    out = pd.DataFrame(
        {"run_no": run["run_no"], "true_left_h": left, "true_left_alive": alive, "true_death_h": death}
    )
    out["discharge_h"] = np.where(known, left, np.nan)
    out["is_alive_at_discharge"] = given(known, alive)
    out["is_still_inpatient"] = inside & ~moved
    words = np.array(["home", "rehabilitation", "other_acute_hospital"])
    where_to = words[(rng.random(n)[:, None] > [0.45, 0.8]).sum(axis=1)]
    out["discharge_to"] = np.select(
        [~known & inside & ~moved, ~known, alive], ["still_inpatient", "", where_to], "died"
    )
    out["discharge_to"] = out["discharge_to"].replace("", None)
    out["register_death_h"] = np.where(death <= cut_h, death, np.nan)
    _add_contacts(out, rng, run, cut_h, moved, twice, settings)
    return out


def _add_contacts(
    out: pd.DataFrame,
    rng: np.random.Generator,
    run: pd.DataFrame,
    cut_h: Array,
    moved: Array,
    twice: TwiceHours,
    settings: Settings,
) -> None:
    n = len(out)
    left, death = out["true_left_h"].to_numpy(), out["true_death_h"].to_numpy()
    days = np.array(CONTACT_DAYS) * 24.0
    lost = np.minimum(rng.geometric(max(settings.lost_per_contact, 1e-9), n), len(days)) - 1
    horizon = np.minimum(np.where(lost < len(days) - 1, left + days[lost], np.inf), cut_h)
    is_dead = (death <= np.maximum(horizon, np.minimum(left, cut_h))) & ~moved
    held = (left[:, None] + days[None]) <= horizon[:, None]
    last = left + days[np.maximum(held.sum(axis=1) - 1, 0)]
    last = np.where(left > cut_h, cut_h, last)
    last = twice.hours_after(run["start_utc"], np.floor(last * 60.0) / 60.0)
    silent = moved & (rng.random(n) < 0.7)
    contact = np.where(moved, run["end_h"], last)
    out["vital_status"] = given(~silent, np.where(is_dead, "dead", "alive"))
    out["contact_h"] = np.where(silent, np.nan, np.where(is_dead, death, contact))
    out["death_h"] = np.where(is_dead, death, np.nan)
    kinds = rng.choice(np.array(["clinic", "phone", "letter"]), n, p=[0.6, 0.3, 0.1])
    out["contact_kind"] = given(~silent & ~is_dead, kinds)


def neuro_frame(run: pd.DataFrame, follow_up: pd.DataFrame, seed: int, settings: Settings) -> pd.DataFrame:
    """One row a run that left hospital alive: cerebral performance category and modified Rankin grade.

    is_recorded is off for a fifth of them, more often for the good ones.
    """
    rng = stream(seed, "neuro")
    rows = follow_up["is_alive_at_discharge"].to_numpy() == True  # noqa: E712  (an object column with None)
    n = int(rows.sum())
    after_arrest = run["had_arrest"].to_numpy()[rows]
    edges = np.where(after_arrest[:, None], [0.62, 0.84, 0.97], [0.80, 0.94, 0.995])
    cpc = 1 + (rng.random(n)[:, None] > edges).sum(axis=1)
    mrs = np.clip(cpc + rng.integers(-1, 2, n), 0, 5)
    gap = np.where(cpc <= 2, 0.22, 0.12) if settings.has_missing else np.zeros(n)
    return pd.DataFrame(
        {
            "run_no": run["run_no"].to_numpy()[rows],
            "cpc": cpc,
            "mrs": mrs,
            "is_recorded": rng.random(n) >= gap,
        }
    )


def transfer_frame(run: pd.DataFrame, ending: pd.DataFrame, programme: Programme, seed: int) -> pd.DataFrame:
    """One row a transfer on support: run_no, direction 'in' or 'out', at_h, hospital."""
    rng = stream(seed, "transfers")
    came = (
        run.loc[run["transferred_in"], ["run_no", "entry_h"]]
        .rename(columns={"entry_h": "at_h"})
        .assign(direction="in")
    )
    went = ending.loc[ending["end_kind"] == "transfer_out", ["run_no", "end_h"]].rename(
        columns={"end_h": "at_h"}
    )
    both = (
        pd.concat([came, went.assign(direction="out")])
        .sort_values(["run_no", "direction"])
        .reset_index(drop=True)
    )
    both["hospital"] = rng.choice(np.array(programme.referring), len(both))
    return both[["run_no", "direction", "at_h", "hospital"]]

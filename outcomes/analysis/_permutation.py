"""Permutation P value of the log-rank test where events are too few for χ². Groups are shuffled within
strata."""

from __future__ import annotations

import numpy as np

from outcomes.analysis._input import Codes, Floats
from outcomes.analysis.risk_set import Sample

REPLICATES, BLOCK = 10_000, 250


def permuted_p(rows: Sample, which: Codes, layer: Codes, rho: float, contrast: Floats | None, observed: float,
               seed: int) -> float:  # fmt: skip
    """Share of shuffles, the observed one counted among them, with a statistic at least as large.

    Each block of 250 shuffles has its own stream, so the answer does not depend on how blocks are spread.
    """
    times = rows.weight.astype(np.int64)
    which, layer = np.repeat(which, times), np.repeat(layer, times)
    time, entry = np.repeat(rows.time, times), np.repeat(rows.entry, times)
    moments = _Moments(time, np.repeat(rows.code, times), entry, layer, rho)
    places = [np.flatnonzero(layer == v) for v in np.unique(layer)]
    hits = 1
    for block in range(REPLICATES // BLOCK):
        stream = np.random.Generator(np.random.PCG64(np.random.SeedSequence(seed, spawn_key=(block,))))
        shuffled = np.tile(which, (BLOCK, 1))
        for place in places:
            shuffled[:, place] = stream.permuted(shuffled[:, place], axis=1)
        hits += int((moments.statistics(shuffled, contrast) >= observed - 1e-9).sum())
    return hits / (REPLICATES + 1)


class _Moments:
    """What no shuffle changes: who was at risk and who had the event at each event time of each stratum."""

    def __init__(self, time: Floats, died: Codes, entry: Floats, layer: Codes, rho: float) -> None:
        at_risk, events, weight = [], [], []
        for v in np.unique(layer):
            inside = layer == v
            survival = 1.0
            for u in np.unique(time[inside & (died > 0)]):
                here = inside & (entry < u) & (time >= u)
                hit = here & (time == u) & (died > 0)
                at_risk.append(here)
                events.append(hit)
                weight.append(survival**rho)
                survival *= 1 - hit.sum() / here.sum()
        self.at_risk, self.events = np.array(at_risk, dtype=float), np.array(events, dtype=float)
        self.n, self.d, self.w = self.at_risk.sum(axis=1), self.events.sum(axis=1), np.array(weight)
        spread = (self.n - self.d) / np.maximum(self.n - 1, 1.0)
        self.factor = self.w**2 * self.d * spread

    def statistics(self, which: Codes, contrast: Floats | None) -> Floats:
        """χ² of every row of labels; 0 where the groups never meet."""
        g = int(which.max()) + 1
        member = [(which == k).astype(float) for k in range(g)]
        share = np.stack([m @ self.at_risk.T for m in member], axis=-1) / self.n[:, None]
        own = np.stack([m @ self.events.T for m in member], axis=-1)
        u = np.einsum("j,bjk->bk", self.w, own - self.d[:, None] * share)
        v = -np.einsum("j,bjk,bjl->bkl", self.factor, share, share)
        v[:, range(g), range(g)] += np.einsum("j,bjk->bk", self.factor, share)
        if contrast is None:
            inverse = np.linalg.pinv(v[:, :-1, :-1], hermitian=True)
            return np.asarray(np.einsum("bk,bkl,bl->b", u[:, :-1], inverse, u[:, :-1]))
        spread = np.einsum("k,bkl,l->b", contrast, v, contrast)
        some = spread > 1e-14 * float(np.sum(contrast**2))
        return np.where(some, (u @ contrast) ** 2 / np.where(some, spread, 1.0), 0.0)

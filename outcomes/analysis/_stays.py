"""Stays of runs in states, checked, and the product integral over them with its influences."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import pandas as pd

from outcomes.analysis._input import Codes, Floats, labels, need_rows, numbered, times, word
from outcomes.errors import InputRefused, NotEstimable

NAMES = ("run_key", "person_key", "from_h", "to_h", "state", "next_state")


@dataclass(frozen=True)
class Stays:
    """One row a stay, shape (n,): its run, (start, stop], state held (0 … s−1) and the
    state moved to at stop (−1: none, observation stopped or the stay goes on)."""

    run: Codes
    person: Codes | None
    start: Floats
    stop: Floats
    held: Codes
    moved: Codes
    n_runs: int

    def at_risk(self, state: int, at: Floats) -> Floats:
        inside = self.held == state
        start = np.where(self.start[inside] <= 0, -np.inf, self.start[inside])
        begun = np.searchsorted(np.sort(start), at, side="left")
        ended = np.searchsorted(np.sort(self.stop[inside]), at, side="left")
        return np.asarray(begun - ended, dtype=float)


def read(intervals: pd.DataFrame, states: Sequence[str], names: Mapping[str, str] | None) -> Stays:
    """Stays of a frame with the columns of NAMES, or those that `names` puts in their place."""
    column = {name: (names or {}).get(name, name) for name in NAMES}
    lacking = [c for key, c in column.items() if key != "person_key" and c not in intervals.columns]
    if lacking:
        raise InputRefused("columns", "intervals lacks a column: " + ", ".join(sorted(lacking)))
    need_rows(len(intervals))
    declared = [word(s) for s in states]
    if len(set(declared)) != len(declared) or "" in declared:
        raise InputRefused("states", "states must be distinct and not empty")
    frame = intervals.reset_index(drop=True)
    run = numbered(frame[column["run_key"]], len(frame), "run_key")
    start, stop = times(frame[column["from_h"]], "from_h"), times(frame[column["to_h"]], "to_h")
    held = _codes(frame[column["state"]], declared, "state")
    moved = _codes(frame[column["next_state"]], declared, "next_state")
    if (held < 0).any() or (stop <= start).any():
        raise InputRefused("interval", "a stay has no state, or no length")
    person = frame[column["person_key"]] if column["person_key"] in frame.columns else None
    who = None if person is None else numbered(person, len(frame), "person_key")
    order = np.lexsort((start, run))
    moved = _linked(run[order], start[order], stop[order], held[order], moved[order])
    who = None if who is None else _person_of_run(run, who)
    return Stays(run[order], who, start[order], stop[order], held[order], moved, int(run.max()) + 1)


def _codes(values: pd.Series, declared: list[str], name: str) -> Codes:
    """Place of each state in the declared list; −1 for a missing one (or an empty text or 0)."""
    filled = values.astype(object).where(values.notna(), "")
    words = ["" if v == "0" else v for v in labels(filled, len(values), name)]
    unknown = set(words) - set(declared) - {""}
    if unknown:
        raise InputRefused("states", f"{len(unknown)} states occur that are not declared")
    place = {"": -1, **{name: i for i, name in enumerate(declared)}}
    return np.array([place[v] for v in words], dtype=np.int64)


def _linked(run: Codes, start: Floats, stop: Floats, held: Codes, moved: Codes) -> Codes:
    """Moves, after the check that each stay of a run begins where and when the one before ended."""
    same = run[1:] == run[:-1]
    out = np.where(moved == held, -1, moved)
    broken = same & (start[1:] != stop[:-1])
    goes_on = (out[:-1] < 0) & (held[1:] == held[:-1])
    wrong = same & ~goes_on & (out[:-1] != held[1:])
    if broken.any() or wrong.any():
        raise InputRefused("interval", "stays of a run have a gap, an overlap or a move that does not fit")
    return out


def _person_of_run(run: Codes, who: Codes) -> Codes:
    first = np.zeros(int(run.max()) + 1, dtype=np.int64)
    first[run] = who
    if (first[run] != who).any():
        raise InputRefused("cluster", "a run belongs to two persons")
    return first


class Occupation:
    """p(t) = p(0) Π (I + dA(u)) over the times of moves. time: 0 and every time of a move, shape (m,); p:
    shape (m, s)."""

    def __init__(self, stays: Stays, n_states: int) -> None:
        self.stays, self.s = stays, n_states
        moves = stays.moved >= 0
        self.time = np.concatenate([[0.0], np.unique(stays.stop[moves])])
        self.y = np.stack([stays.at_risk(h, self.time) for h in range(n_states)], axis=1)
        self.moves = np.zeros((len(self.time), n_states, n_states))
        place = np.searchsorted(self.time, stays.stop[moves])
        np.add.at(self.moves, (place, stays.held[moves], stays.moved[moves]), 1.0)
        begun = stays.start <= 0
        if not begun.any():
            raise NotEstimable("empty_risk_set", "nobody was seen from time zero")
        self.first = np.eye(n_states)[stays.held[begun]]
        self.p = np.zeros((len(self.time), n_states))
        self.p[0] = self.first.mean(axis=0)
        for j in range(1, len(self.time)):
            self.p[j] = self.p[j - 1] @ (np.eye(n_states) + self.hazard(j))

    def hazard(self, j: int) -> Floats:
        """dA: moves over those at risk in the state left; rows add to zero, that of an empty state is 0."""
        a = self.moves[j] / np.where(self.y[j] > 0, self.y[j], 1.0)[:, None]
        return np.asarray(a - np.diag(a.sum(axis=1)))

    def influences(self) -> Iterator[Floats]:
        """Influence of every run on p after each time of `time`, shape (runs, s): ψ ← ψ M + p(u−) Δ,
        where Δ has in the row of the state left (own move − at risk · dA)/Y."""
        st = self.stays
        psi = np.zeros((st.n_runs, self.s))
        psi[st.run[st.start <= 0]] = (self.first - self.p[0]) / len(self.first)
        yield psi
        for j in range(1, len(self.time)):
            u, da = self.time[j], self.hazard(j)
            psi = psi + psi @ da
            left = (self.moves[j].sum(axis=1) > 0)[st.held]
            rows = np.flatnonzero(left & (st.start < u) & (st.stop >= u))
            held = st.held[rows]
            own = np.zeros((len(rows), self.s))
            mover = (st.stop[rows] == u) & (st.moved[rows] >= 0)
            own[mover, st.moved[rows[mover]]] = 1.0
            own[mover, held[mover]] -= 1.0
            scale = self.p[j - 1, held] / self.y[j, held]
            np.add.at(psi, st.run[rows], (own - da[held]) * scale[:, None])
            yield psi

    def greenwood(self) -> Floats:
        """Standard errors from V ← Mᵀ V M + Σ_h p_h(u−)² K_h, K_h the multinomial covariance of the moves."""
        v, out = np.zeros((self.s, self.s)), np.zeros_like(self.p)
        for j in range(1, len(self.time)):
            m = np.eye(self.s) + self.hazard(j)
            v = m.T @ v @ m
            for h in np.flatnonzero(self.moves[j].sum(axis=1) > 0):
                n, y = self.moves[j, h], self.y[j, h]
                k = (np.diag(n) * y - np.outer(n, n)) / y**3
                total = k.sum(axis=1)
                k[h, :], k[:, h], k[h, h] = -total, -total, total.sum()
                v = v + self.p[j - 1, h] ** 2 * k
            out[j] = np.sqrt(np.maximum(np.diag(v), 0.0))
        return out

    def known_until(self) -> Floats:
        """Last time at which somebody in each state was watched; infinity if nobody is seen to stay there."""
        out = np.full(self.s, np.inf)
        for h in range(self.s):
            inside = self.stays.held == h
            if inside.any():
                out[h] = self.stays.stop[inside].max()
        return out

"""Results made by hand for the tests of figures and reports: small, with every number known."""

from __future__ import annotations

from outcomes.analysis.result import Caution, Method, Result, tidy

KAPLAN_MEIER = Method(
    "Kaplan-Meier estimate of survival",
    variance="Greenwood",
    interval="log-log",
    ties="deaths before censorings at the same time",
    time_unit="days",
    citations=("Kaplan EL, Meier P. J Am Stat Assoc 1958;53:457-81. doi:10.1080/01621459.1958.10501452",),
)
AALEN_JOHANSEN = Method(
    "Aalen-Johansen estimate of cumulative incidence",
    variance="Aalen",
    interval="log-log",
    time_unit="days",
    citations=("Aalen OO, Johansen S. Scand J Stat 1978;5:141-50.",),
)
SHARE = Method("share of runs", interval="Wilson", citations=("Wilson EB. J Am Stat Assoc 1927;22:209-12.",))

ENDINGS = {
    "recovery": "Weaned",
    "lvad": "Durable LVAD",
    "transplantation": "Transplantation",
    "death": "Death or withdrawal",
    "other": "Other exit",
}
TICKS = (0.0, 5.0, 10.0, 20.0, 30.0)
_CURVE = ["group", "time", "estimate", "lower", "upper", "at_risk", "events", "censored"]


def survival_curve(sizes: dict[str, int]) -> tuple[Result, Result]:
    """A curve a group (one death a day, every fifth run censored instead) and the counts under it."""
    rows: list[dict[str, object]] = []
    counts: list[dict[str, object]] = []
    for group, n in sizes.items():
        rows.append(_point(group, 0.0, 1.0, n, 0, 0))
        alive, died, censored, estimate = n, 0, 0, 1.0
        ends = []
        for day in range(1, n):
            is_censored = day % 5 == 0
            estimate *= 1.0 if is_censored else (alive - 1) / alive
            rows.append(_point(group, day * 0.75, estimate, alive, int(not is_censored), int(is_censored)))
            ends.append((day * 0.75, is_censored))
            alive -= 1
        for tick in TICKS:
            died = sum(1 for t, c in ends if t < tick and not c)
            censored = sum(1 for t, c in ends if t < tick and c)
            counts.append(
                {
                    "group": group,
                    "time": tick,
                    "at_risk": n - died - censored,
                    "events": died,
                    "censored": censored,
                }
            )
    risk = tidy(counts, ["group", "time", "at_risk", "events", "censored"])
    return Result(tidy(rows, _CURVE), KAPLAN_MEIER, {"runs": sum(sizes.values())}), Result(risk, KAPLAN_MEIER)


def _point(
    group: str, time: float, estimate: float, at_risk: int, events: int, censored: int
) -> dict[str, object]:
    half = 0.0 if time == 0 else min(estimate, 1 - estimate, 0.12)
    ends = {"lower": estimate - half, "upper": estimate + half}
    counts = {"at_risk": at_risk, "events": events, "censored": censored}
    return {"group": group, "time": time, "estimate": estimate, **ends, **counts}


def ending_curve(n: int = 60) -> Result:
    """Endings in a fixed order, one every half day, all causes at the same times."""
    order = (
        "recovery",
        "death",
        "recovery",
        "lvad",
        "death",
        "recovery",
        "transplantation",
        "death",
        "other",
    )
    rows: list[dict[str, object]] = []
    seen = dict.fromkeys(ENDINGS, 0)
    for step in range(n):
        if step:
            seen[order[step % len(order)]] += 1
        for cause, x in seen.items():
            share = x / n
            half = min(share, 1 - share, 0.1)
            ends = {"lower": share - half, "upper": share + half, "at_risk": n - sum(seen.values())}
            rows.append({"cause": cause, "time": step / 2, "estimate": share, **ends, "events": x})
    columns = ["cause", "time", "estimate", "lower", "upper", "at_risk", "events"]
    return Result(
        tidy(rows, columns), AALEN_JOHANSEN, {"runs": n}, (Caution("OPEN", "Two runs were still supported."),)
    )


def fifths() -> tuple[Result, Result]:
    """Observed and predicted by fifths, and a prediction a run."""
    rows: list[dict[str, object]] = [
        {
            "predicted": 0.1 + i / 5,
            "estimate": (0.1 + i / 5) ** 1.2,
            "lower": i / 6,
            "upper": min(1.0, 0.35 + i / 5),
        }
        for i in range(5)
    ]
    rows.append({"predicted": 0.95, "estimate": 0.9})
    rug = tidy([{"predicted": i / 40} for i in range(41)], ["predicted"])
    return Result(tidy(rows, ["predicted", "estimate", "lower", "upper"]), SHARE), Result(rug, SHARE)


def blocks() -> Result:
    """Survival of twenty blocks of runs with a centre line and limits; the seventh lies below them."""
    rows = [
        {
            "time": float(i),
            "estimate": 0.1 if i == 7 else 0.5 + (i % 5) / 20,
            "centre": 0.55,
            "lower": 0.2,
            "upper": 0.9,
        }
        for i in range(1, 21)
    ]
    return Result(tidy(rows, ["time", "estimate", "centre", "lower", "upper"]), SHARE)


def centres_and_limits() -> tuple[Result, Result]:
    units = [{"group": f"c{i}", "at_risk": 10 * i, "estimate": 0.4 + i / 50} for i in range(1, 8)]
    limits: list[dict[str, object]] = [
        {
            "group": level,
            "at_risk": n,
            "lower": max(0, 0.5 - width / n**0.5),
            "upper": min(1, 0.5 + width / n**0.5),
        }
        for level, width in (("usual", 1.0), ("wide", 1.5))
        for n in (5, 10, 20, 40, 80)
    ]
    return (
        Result(tidy(units, ["group", "at_risk", "estimate"]), SHARE),
        Result(tidy(limits, ["group", "at_risk", "lower", "upper"]), SHARE),
    )


def dot_rows(scale: float = 1.0) -> Result:
    rows = [
        {"group": "bleeding", "estimate": 21 * scale, "lower": 15 * scale, "upper": 28 * scale},
        {"group": "limb", "estimate": 9.5 * scale, "lower": 5 * scale, "upper": 15 * scale},
        {"group": "stroke", "reason": "too_few"},
    ]
    return Result(tidy(rows, ["group", "estimate", "lower", "upper", "reason"]), SHARE)

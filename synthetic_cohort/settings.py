"""What the generator assumes: exit hazards, groups, severity, shares. All of it can be switched for a test.

The daily exit hazards were fitted to published marginals of adult V-A support: median 96 h, quartiles 47 and
164 h, mean 131 h (Smith 2017, Crit Care 21:45). The group multipliers aim at published survival to discharge
by indication (Alba 2020, J Heart Lung Transplant 39:S186). Timing of durable pumps and transplants is a
project choice, and so are the hazards of temporary pump, crossover and transfer out, for which no source was
found.
"""

from __future__ import annotations

from dataclasses import dataclass

BAND_DAYS = (0.0, 1.0, 2.0, 4.0, 7.0, 14.0, 21.0)
"""Lower edges of the bands of support days; the last band is open."""

ENDINGS = (
    "recovery",
    "durable_lvad",
    "transplantation",
    "death",
    "withdrawal",
    "temporary_pump",
    "crossover_vv",
    "transfer_out",
)
DEADLY = ("death", "withdrawal")

DEATH_OR_WITHDRAWAL = (0.120, 0.100, 0.072, 0.060, 0.045, 0.038, 0.035)
WITHDRAWAL_SHARE = (0.15, 0.30, 0.45, 0.50, 0.55, 0.60, 0.60)
RECOVERY = (0.015, 0.050, 0.135, 0.160, 0.090, 0.045, 0.030)
DURABLE_LVAD = (0.0, 0.001, 0.004, 0.012, 0.022, 0.022, 0.015)
TRANSPLANTATION = (0.0, 0.002, 0.006, 0.012, 0.022, 0.022, 0.015)
TEMPORARY_PUMP = (0.0, 0.001, 0.002, 0.002, 0.002, 0.001, 0.001)
CROSSOVER_VV = (0.0, 0.001, 0.002, 0.002, 0.002, 0.001, 0.001)

LVAD_TRANSPLANT_AGE_LIMIT = 75
"""Completed years above which neither a durable pump nor a transplant is given."""


@dataclass(frozen=True)
class Group:
    """An indication as the generator sees it.

    share: of all persons. death, early_death (days 0 to 2), recovery, replacement: multipliers of the
    hazards. discharge: probability of leaving hospital alive after recovery. age: mean and standard
    deviation, years. arrest: probability of an arrest before support at average severity; extracorporeal: of
    pump start during compressions, given an arrest; out: share of those that began out of hospital.
    """

    key: str
    share: float
    death: float
    early_death: float
    recovery: float
    replacement: float
    discharge: float
    age: tuple[float, float] = (57.0, 14.0)
    male: float = 0.70
    arrest: float = 0.4
    extracorporeal: float = 0.5
    out: float = 0.2
    femoral: float = 0.75


GROUPS = (
    Group(
        "decompensated_chronic_heart_failure",
        0.40,
        0.75,
        0.75,
        0.7,
        2.1,
        0.72,
        arrest=0.32,
        extracorporeal=0.35,
        out=0.05,
    ),
    Group(
        "acute_myocardial_infarction",
        0.33,
        1.05,
        1.05,
        1.0,
        0.5,
        0.70,
        (61.0, 11.0),
        arrest=0.62,
        extracorporeal=0.48,
        out=0.25,
    ),
    Group(
        "post_cardiotomy",
        0.10,
        0.9,
        0.9,
        1.1,
        0.2,
        0.70,
        (61.0, 11.0),
        arrest=0.25,
        extracorporeal=0.4,
        out=0.0,
        femoral=0.45,
    ),
    Group(
        "refractory_ventricular_arrhythmia",
        0.05,
        1.0,
        1.0,
        1.0,
        1.0,
        0.69,
        arrest=0.85,
        extracorporeal=0.65,
        out=0.35,
    ),
    Group(
        "valve_disease_acute",
        0.03,
        1.0,
        1.0,
        1.0,
        0.5,
        0.69,
        (61.0, 12.0),
        arrest=0.25,
        extracorporeal=0.4,
        out=0.0,
    ),
    Group(
        "pulmonary_embolism",
        0.03,
        1.0,
        1.0,
        1.0,
        0.1,
        0.69,
        (52.0, 14.0),
        arrest=0.65,
        extracorporeal=0.6,
        out=0.15,
    ),
    Group(
        "myocarditis",
        0.03,
        0.55,
        0.55,
        0.85,
        1.0,
        0.84,
        (41.0, 13.0),
        male=0.50,
        arrest=0.25,
        extracorporeal=0.4,
        out=0.1,
    ),
    Group(
        "primary_graft_dysfunction_heart",
        0.02,
        0.5,
        0.5,
        1.2,
        0.1,
        0.83,
        (52.0, 12.0),
        arrest=0.1,
        extracorporeal=0.1,
        out=0.0,
        femoral=0.5,
    ),
    Group("other", 0.01, 1.0, 1.0, 1.0, 0.5, 0.69, arrest=0.5, extracorporeal=0.5, out=0.2),
)

IN_HOSPITAL_ECPR = Group("in_hospital_ecpr", 0.0, 1.0, 1.8, 1.0, 0.4, 0.75, femoral=0.95)
OUT_OF_HOSPITAL_ECPR = Group("out_of_hospital_ecpr", 0.0, 1.3, 3.2, 0.9, 0.2, 0.78, male=0.79, femoral=0.95)

HAZARD_GROUPS = (*GROUPS, IN_HOSPITAL_ECPR, OUT_OF_HOSPITAL_ECPR)
"""Groups by which exits differ: a pump start during compressions overrides the indication."""


@dataclass(frozen=True)
class Settings:
    """Everything that can be switched.

    z_*: effects of the latent severity Z (standard normal) on the log of a hazard or the logit of an arrest.
    has_groups: off gives every run the plain hazards above. keeps_group_exits: a constant per group undoes
    what severity does to the group's own death proportion and time on support, so that the group targets
    still hold. recannulation: probability of a second run after recovery (5% of runs). open_share: None
    leaves the share that chance gives; a number makes as many starts as needed crowd into the last fortnight
    before the extract.
    """

    has_groups: bool = True
    z_death: float = 0.45
    z_recovery: float = -0.3
    z_arrest: float = 0.8
    z_inputs: float = 1.0
    keeps_group_exits: bool = True
    has_other_exits: bool = True
    transfer_out_per_day: float = 0.005
    transfer_in: float = 0.034
    recannulation: float = 0.105
    open_share: float | None = None
    over_89: float = 0.01
    frailty_variance: float = 0.5
    complication_multiplier: float = 1.0
    discharge_after_replacement: float = 0.71
    discharge_after_other: float = 0.50
    discharge_after_withdrawal: float = 0.005
    death_per_year_after_discharge: float = 0.09
    has_missing: bool = True
    lost_per_contact: float = 0.06
    attempts_share: float = 0.02

    def plain(self) -> Settings:
        """The same without severity effects, groups, other exits, transfers and second runs."""
        return Settings(
            has_groups=False,
            z_death=0.0,
            z_recovery=0.0,
            z_arrest=0.0,
            has_other_exits=False,
            transfer_out_per_day=0.0,
            transfer_in=0.0,
            recannulation=0.0,
            over_89=0.0,
        )

"""Everything about shares and rates in one place for callers; each estimator lives in its own module."""

from outcomes.analysis.difference import paired_difference, proportion_difference
from outcomes.analysis.overdispersion import overdispersion
from outcomes.analysis.proportion import proportion
from outcomes.analysis.rate import incidence_rate, rate_by_band
from outcomes.analysis.ratio import rate_ratio, standardised_ratio
from outcomes.analysis.recurrent import mean_cumulative_count
from outcomes.analysis.standardise import direct_standardisation

__all__ = [
    "direct_standardisation",
    "incidence_rate",
    "mean_cumulative_count",
    "overdispersion",
    "paired_difference",
    "proportion",
    "proportion_difference",
    "rate_by_band",
    "rate_ratio",
    "standardised_ratio",
]

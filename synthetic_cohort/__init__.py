"""A made-up programme of veno-arterial ECMO support with known truth, and messy exports of it."""

from synthetic_cohort.cohort import Cohort, generate
from synthetic_cohort.export import STYLES, Export, write_export

from synthetic_cohort.names import PROGRAMME, Programme
from synthetic_cohort.settings import Settings

__all__ = ["PROGRAMME", "STYLES", "Cohort", "Export", "Programme", "Settings", "generate", "write_export"]

"""A made-up programme of veno-arterial ECMO support with known truth, and messy exports of it.

Nothing here knows the product: numpy, pandas, the standard library and, to write workbooks, openpyxl.

cohort = generate(500, seed=1) export = write_export(cohort, "north", folder, seed=1, defects=DEFECT_KINDS)
export.paths, export.mapping, export.defects
"""

from synthetic_cohort.cohort import Cohort, generate
from synthetic_cohort.defects import DEFECT_KINDS, plant
from synthetic_cohort.export import STYLES, Export, tables_of, write_export
from synthetic_cohort.names import PROGRAMME, Programme
from synthetic_cohort.planter import Defect
from synthetic_cohort.settings import Settings
from synthetic_cohort.truth import Truth, truth

__all__ = [
    "DEFECT_KINDS",
    "PROGRAMME",
    "STYLES",
    "Cohort",
    "Defect",
    "Export",
    "Programme",
    "Settings",
    "Truth",
    "generate",
    "plant",
    "tables_of",
    "truth",
    "write_export",
]

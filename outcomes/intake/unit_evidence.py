"""Units are tested, not trusted: a column whose median fits another unit and not its declared one stops the import."""

from __future__ import annotations

import duckdb

from outcomes.errors import DataRefused
from outcomes.findings import Finding
from outcomes.intake.rules import RULES

MIN_VALUES = 20

_EVIDENCE = f"""
with columns as (
  select p.piece_no, p.sheet_no, p.header, p.unit, p.quantity, t.low, t.high, count(*) as n,
         median(r.received * p.factor + p.shift) as as_declared, median(r.received) as received
  from staging.received r join staging.piece p using (piece_no)
  join vocabulary.typical_median t on t.field = p.field
  group by all having count(*) >= {MIN_VALUES}
)
select s.file_key, s.sheet_key, c.header, c.unit, c.n, c.as_declared, string_agg(distinct u.received_unit, ' or ' order by u.received_unit)
from columns c
join staging.sheet s using (sheet_no)
join vocabulary.unit_conversion u on u.quantity = c.quantity
  and c.received * u.factor + u.shift between c.low and c.high
where not c.as_declared between c.low and c.high
group by c.piece_no, s.file_key, s.sheet_key, c.header, c.unit, c.n, c.as_declared
order by c.piece_no
"""


def require_units(con: duckdb.DuckDBPyConnection) -> None:
    """Raise DataRefused UNIT.CONTRADICTED for columns whose values contradict their declared unit.

    con: the staging connection after all chunks. Nothing is ever converted on suspicion.
    """
    rows = con.execute(_EVIDENCE).fetchall()
    findings = [
        Finding("COLUMN.UNIT", "file", 0, file_key, sheet_key, 0, header,
                f"{RULES['COLUMN.UNIT']} {unit}: the median of {n} values would be about {median:.2g}, unheard of; "
                f"it would fit {fitting}")
        for file_key, sheet_key, header, unit, n, median, fitting in rows
    ]  # fmt: skip
    if findings:
        raise DataRefused(
            "UNIT.CONTRADICTED",
            f"{len(findings)} columns contradict their declared unit",
            where="; ".join(f.text() for f in findings),
            todo="correct the unit in the mapping file",
            findings=findings,
        )

"""What each defect of a cell, row or sheet means in words. One line a code; the codes are stable."""

from __future__ import annotations

RULES = {
    "CELL.NUMBER": "a number in the declared form was expected",
    "CELL.DATE": "a date or time in the declared pattern was expected",
    "CELL.CODE": "the code is not in the mapping",
    "CELL.WORD": "a short word of plain letters and digits was expected",
    "CELL.WHOLE": "a whole number was expected",
    "CELL.EMPTY": "the mapping says that this cell is never empty",
    "CELL.PARTS": "the cell does not have as many parts as the mapping declares",
    "CELL.FORMULA": "the cell holds a formula without a stored result",
    "CELL.ERROR": "the cell holds a spreadsheet error",
    "CELL.MERGED": "the cell is merged with another one",
    "CELL.LIMIT": "the value lies outside what is possible in the declared unit",
    "CELL.TIME": "the time lies before the start of support, or impossibly far from it",
    "CELL.TOKEN": "a word that the mapping declares as not recorded",
    "CELL.UNUSUAL": "the value is unusual, but possible; kept",
    "CELL.BIRTH": "the birth lies after the start of support, or more than 130 years before it",
    "CELL.TIME-SKIPPED": "this local time does not exist: the clocks went forward",
    "CELL.TIME-REPEATED": "this local time exists twice: the clocks went back; the later one was taken",
    "KEY.EMPTY": "the row does not say which run or person it belongs to",
    "KEY.UNKNOWN-RUN": "no run with a start of support is known under this key, neither here nor from earlier imports",
    "KEY.NO-START": "the start of support is missing",
    "KEY.PERSONS-DIFFER": "rows of one run name different persons; all of them are set aside",
    "ROW.TWIN": "the same row stands twice; one was kept",
    "ROW.TWINS-DIFFER": "two rows name the same run and differ; both are set aside",
    "ROW.WITH-ITS-RUN": "set aside together with its run",
    "ROW.CONFLICT": "this run is stored already, with other values",
    "COLUMN.UNIT": "the column contradicts its declared unit",
}


def rule_text(code: str, plausible_as: str | None = None) -> str:
    """The rule of a code; names the unit in which the value would be plausible, if there is one."""
    text = RULES.get(code, code)
    return f"{text}; as {plausible_as} it would be plausible" if plausible_as else text

"""The closed list of what the reader can say: code -> what was expected, and what to do about it."""

from __future__ import annotations

_EXPORT_AGAIN = "export the file again from its source"
_DECLARE = "correct the declaration in the mapping file"
_MEND = "mend the export at the place named and import it again"

REFUSALS: dict[str, tuple[str, str]] = {
    "READ.EMPTY": ("the file has no content", _EXPORT_AGAIN),
    "READ.KIND": ("the bytes of the file are of another kind than the mapping declares", _DECLARE),
    "READ.ENCRYPTED": ("the file is protected by a password", "save a copy without a password"),
    "READ.FILE-LONG": ("the file is larger than the reader takes", "split the export by year"),
    "READ.BOM": ("the byte-order mark contradicts the declared encoding", _DECLARE),
    "READ.ENCODING": ("bytes that are not valid in the encoding of the file", _DECLARE),
    "READ.ENCODING-OTHER": (
        "the whole file is valid UTF-8, although a single-byte encoding is declared",
        "declare encoding = 'utf-8' in the mapping file",
    ),
    "READ.NUL": (
        "a NUL character: the file is damaged, binary or UTF-16 without a byte-order mark",
        _EXPORT_AGAIN,
    ),
    "READ.CONTROL": ("a control character inside text", _MEND),
    "READ.BIDI": ("a character that changes the direction of writing", _MEND),
    "READ.INVISIBLE": ("a character without width, which makes two equal-looking texts differ", _MEND),
    "READ.LINE-LONG": ("a line of more than 1 MiB", _EXPORT_AGAIN),
    "READ.RECORD-LONG": ("a record of more than 1 MiB; perhaps a quotation mark is not closed", _MEND),
    "READ.FIELD-LONG": (
        "a cell of more than 65,536 characters; perhaps a quotation mark is not closed",
        _MEND,
    ),
    "READ.LINE-END": ("a carriage return without a line feed", "save the file with CRLF or LF line ends"),
    "READ.QUOTE-INSIDE": ("a quotation mark inside a cell that is not quoted", _MEND),
    "READ.QUOTE-AFTER": ("text after the closing quotation mark of a cell", _MEND),
    "READ.QUOTE-OPEN": ("a quotation mark is opened and never closed", _MEND),
    "READ.ROW-SHORT": ("the row has fewer cells than the header", _MEND),
    "READ.ROW-LONG": ("the row has more cells than the header", _MEND),
    "READ.CUT-OFF": ("the file ends in the middle of a row", _EXPORT_AGAIN),
    "READ.COLUMNS": ("more than 500 columns", "export fewer columns"),
    "READ.ROWS": (
        "more rows than the mapping allows",
        "raise max_rows in the mapping file or split the export",
    ),
    "READ.HEADER-LINE": (
        "the declared header line does not hold the header",
        "correct header_line in the mapping file",
    ),
    "READ.HEADER-EMPTY": ("a column with data but without a header", _MEND),
    "READ.HEADER-TWIN": ("two columns have the same header, apart from case and spaces", _MEND),
    "READ.HEADER-DATA": (
        "the header line looks like a row of data",
        "correct header_line, or export with a header",
    ),
    "READ.HEADER-LONG": ("a header of more than 512 characters", _MEND),
    "READ.HEADER-REPEATED": ("the header stands again among the rows", "remove the repeated header"),
    "READ.HEADER-MERGED": (
        "a merged cell in the header",
        "undo the merging and give every column its own header",
    ),
    "READ.SEPARATOR": ("the header is one single cell, but holds another separator", _DECLARE),
    "READ.UNITS-ROW": (
        "a row of units stands below the header",
        "remove the row; units belong into the mapping file",
    ),
    "READ.TOTALS-ROW": ("a line of totals, a footer or a heading among the rows", "remove the line"),
    "READ.WORKBOOK": (
        "the workbook is damaged or breaks its own format",
        "open it, save it as .xlsx and import it again",
    ),
    "READ.PACKED": (
        "the workbook unpacks to more than the reader takes",
        "save it again, without pictures and spare sheets",
    ),
    "READ.MACROS": ("the workbook contains macros", "save it as .xlsx without macros"),
    "READ.EXTERNAL-LINKS": (
        "the workbook takes values from other files",
        "replace the links by their values and save",
    ),
    "READ.DOCTYPE": (
        "a part of the workbook declares XML entities",
        "do not use this file: no spreadsheet program writes that",
    ),
    "READ.SHEETS": ("the workbook has more than 200 sheets", "export the needed sheets only"),
    "READ.SHEET": (
        "the workbook has no table at the declared sheet number",
        "correct position in the mapping file",
    ),
    "READ.PARQUET": ("the Parquet file is damaged or cut off", _EXPORT_AGAIN),
    "READ.PARQUET-TYPE": (
        "a column type that is not text, number, truth value, date or time",
        "flatten or leave out the column",
    ),
    "READ.CHANGED": (
        "the file changed while it was read",
        "wait until it is written completely and import it again",
    ),
}

NOTES: dict[str, str] = {
    "READ.UTF-16": "read as UTF-16 because of its byte-order mark",
    "READ.LINE-ENDS-MIXED": "lines end in two ways; both were accepted",
    "READ.NO-FINAL-LINE-END": "the last line has no line end; the file may be cut off in its last cell",
    "READ.BLANK-LINES": "blank lines were skipped",
    "READ.EMPTY-ROWS": "rows without any content were skipped",
    "READ.EMPTY-COLUMNS": "columns without header and without content were skipped",
    "READ.REPLACED": "the replacement character: text was damaged before it came here",
    "READ.FORMULA": "cells hold formulae; the last computed value was taken",
    "READ.HIDDEN-SHEET": "the sheet is hidden; it was read like the others",
    "READ.HIDDEN-ROWS": "rows are hidden or filtered out; they were read like the others",
    "READ.HIDDEN-COLUMNS": "columns are hidden; they were read like the others",
    "READ.MERGED": "merged cells; none of the cells they cover was taken",
    "READ.LONG-NUMBER": "a number of more than 15 digits, whose last digits the spreadsheet has lost",
}

"""The value of one cell of a sheet, from its type, its format and what it holds."""

from __future__ import annotations

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.grid import Cell, ErrorCell
from outcomes.intake.reading.limits import FIELD_CHARS
from outcomes.intake.reading.serial import dated_cell, iso_cell, number_cell
from outcomes.intake.reading.text import scan
from outcomes.intake.reading.workbook import Workbook, plain_text, whole

_LONG = 1e15
_BOOLEANS = {"1": True, "0": False, "true": True, "false": False}


class CellValue:
    """Fed with the elements inside a cell; `finish` gives its value. Counts formulae."""

    def __init__(self, workbook: Workbook, defects: Defects) -> None:
        self.workbook = workbook
        self.defects = defects
        self.n_formulae = 0
        self.first_formula = 0
        self._line = self._column = 0
        self._type = ""
        self._style = ""
        self._has_formula = False
        self._is_value = self._is_text = self._is_aid = False
        self._pieces: list[str] = []
        self._size = 0

    def start(self, line: int, column: int, attributes: dict[str, str]) -> None:
        """A cell begins."""
        self._line, self._column = line, column
        self._type = attributes.get("t", "n")
        self._style = attributes.get("s", "0")
        self._has_formula = self._is_value = self._is_text = self._is_aid = False
        self._pieces = []
        self._size = 0

    def start_inner(self, name: str) -> None:
        """An element inside a cell begins."""
        if name == "v":
            self._is_value = True
        elif name == "f":
            self._has_formula = True
        elif name == "rPh":
            self._is_aid = True
        elif name == "t":
            self._is_text = not self._is_aid

    def end_inner(self, name: str) -> None:
        """An element inside a cell ends."""
        if name == "v":
            self._is_value = False
        elif name == "t":
            self._is_text = False
        elif name == "rPh":
            self._is_aid = False

    def text(self, data: str) -> None:
        """Text inside a cell; that of a formula is passed over."""
        if self._is_value or self._is_text:
            self._size += len(data)
            if self._size > FIELD_CHARS:
                raise self.defects.fatal("READ.FIELD-LONG", self._line, self._column)
            self._pieces.append(data)

    def finish(self) -> Cell:
        """The value of the cell that ends here."""
        raw = "".join(self._pieces)
        if self._has_formula:
            if (not raw and self._type != "str") or not self.workbook.is_computed:
                return ErrorCell("formula")
            self.n_formulae += 1
            self.first_formula = self.first_formula or self._line
        if self._type == "e":
            return ErrorCell("error")
        if self._type in ("str", "inlineStr"):
            return self._text(plain_text(raw))
        return None if not raw.strip() else self._by_type(raw.strip())

    def _by_type(self, raw: str) -> Cell:
        if self._type == "s":
            texts = self.workbook.texts
            index = whole(raw)
            if not 0 <= index < len(texts):
                raise self._damaged("a text that is not there")
            return self._text(texts[index])
        if self._type == "b" and raw in _BOOLEANS:
            return _BOOLEANS[raw]
        if self._type == "d":
            return iso_cell(raw)
        return self._number(raw)

    def _number(self, raw: str) -> Cell:
        number = number_cell(raw) if self._type == "n" else None
        if number is None:
            raise self._damaged("a value that its type does not allow")
        if isinstance(number, ErrorCell):
            return number
        kind = self._kind()
        if kind != "number":
            return dated_cell(number.value, kind, self.workbook.is_1904)
        if abs(number.value) >= _LONG:
            self.defects.note("READ.LONG-NUMBER", self._line, self._column)
        return number

    def _kind(self) -> str:
        formats = self.workbook.formats
        index = (
            int(self._style)
            if self._style.isascii() and self._style.isdigit() and len(self._style) <= 9
            else -1
        )
        if index == 0 and not formats:
            return "number"
        if not 0 <= index < len(formats):
            raise self._damaged("a cell format that is not there")
        return formats[index]

    def _text(self, text: str) -> Cell:
        if not text.isprintable() or "\ufffd" in text:
            scan(text, self._line, self._column, self.defects)
        if len(text) > FIELD_CHARS:
            self.defects.add("READ.FIELD-LONG", self._line, self._column)
        return text or None

    def _damaged(self, detail: str) -> Exception:
        return self.defects.fatal("READ.WORKBOOK", self._line, self._column, detail=detail)

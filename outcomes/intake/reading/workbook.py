"""What a workbook says of itself: its sheets, its day numbers, its cell formats, its shared texts."""

from __future__ import annotations

import re
from dataclasses import dataclass

from outcomes.intake.reading.defects import Defects
from outcomes.intake.reading.limits import SHARED_TEXT_CHARS, SHEETS, STYLES
from outcomes.intake.reading.package import Package
from outcomes.intake.reading.serial import format_kind
from outcomes.intake.reading.xml_part import Part

_ESCAPE = re.compile("_x([0-9A-Fa-f]{4})_")
_TRUE = ("1", "true")


@dataclass(frozen=True)
class SheetPart:
    """part: name inside the container, '' if the sheet is not a table (a chart)."""

    part: str
    is_hidden: bool


class Workbook:
    """The parts that every sheet needs. Raises Fatal for what is damaged or refused."""

    def __init__(self, package: Package, defects: Defects) -> None:
        self.package = package
        start = _only(package.relations(""), "officeDocument", defects)
        if not start.startswith("xl/") or not start.endswith(".xml"):
            raise defects.fatal("READ.KIND", detail="it is an office document, but not an .xlsx workbook")
        relations = package.relations(start)
        kinds = {kind for kind, _ in relations.values()}
        if "externalLink" in kinds:
            raise defects.fatal("READ.EXTERNAL-LINKS")
        if kinds & {"vbaProject", "xlMacrosheet", "xlIntlMacrosheet"}:
            raise defects.fatal("READ.MACROS")
        book = _Book()
        package.read(start, book)
        if len(book.sheets) > SHEETS:
            raise defects.fatal("READ.SHEETS", detail=f"{len(book.sheets)}")
        self.is_1904 = book.is_1904
        self.is_computed = not book.computes_on_load
        self.sheets = [_sheet_part(relations, ident, is_hidden) for ident, is_hidden in book.sheets]
        self.formats = self._formats(relations)
        self.texts = self._texts(relations, defects)

    def _formats(self, relations: dict[str, tuple[str, str]]) -> list[str]:
        """`format_kind` of every cell style."""
        styles = _Styles()
        for kind, part in relations.values():
            if kind == "styles":
                self.package.read(part, styles)
        codes = styles.codes
        kinds = {number: format_kind(number, codes.get(number)) for number in set(styles.numbers)}
        return [kinds[number] for number in styles.numbers]

    def _texts(self, relations: dict[str, tuple[str, str]], defects: Defects) -> list[str]:
        for kind, part in relations.values():
            if kind == "sharedStrings":
                shared = _Shared()
                for _ in self.package.walk(part, shared, defects):
                    if shared.size > SHARED_TEXT_CHARS:
                        raise defects.fatal("READ.PACKED", detail="the texts of the workbook")
                return shared.texts
        return []


def plain_text(text: str) -> str:
    """A text of the file as it is meant: escapes such as _x000D_ undone, every line end a line feed.

    >>> plain_text("a_x000D_\\nb _x005F_x0041_")
    'a\\nb _x0041_'
    """
    if "_x" in text:
        text = _ESCAPE.sub(lambda match: chr(int(match[1], 16)), text)
    return text.replace("\r\n", "\n").replace("\r", "\n") if "\r" in text else text


def _only(relations: dict[str, tuple[str, str]], kind: str, defects: Defects) -> str:
    parts = [part for found, part in relations.values() if found == kind]
    if len(parts) != 1:
        raise defects.fatal("READ.WORKBOOK", detail="its table of contents is missing")
    return parts[0]


def _sheet_part(relations: dict[str, tuple[str, str]], ident: str, is_hidden: bool) -> SheetPart:
    kind, part = relations.get(ident, ("", ""))
    return SheetPart(part if kind == "worksheet" else "", is_hidden)


class _Book(Part):
    def __init__(self) -> None:
        self.sheets: list[tuple[str, bool]] = []
        self.is_1904 = False
        self.computes_on_load = False

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if name == "sheet":
            self.sheets.append((attributes.get("id", ""), attributes.get("state", "visible") != "visible"))
        elif name == "workbookPr":
            self.is_1904 = attributes.get("date1904") in _TRUE
        elif name == "calcPr":
            self.computes_on_load = attributes.get("fullCalcOnLoad") in _TRUE


class _Styles(Part):
    def __init__(self) -> None:
        self.codes: dict[int, str] = {}
        self.numbers: list[int] = []
        self._is_inside = False

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if name == "numFmt":
            self.codes[whole(attributes.get("numFmtId", ""))] = attributes.get("formatCode", "")
        elif name == "cellXfs":
            self._is_inside = True
        elif name == "xf" and self._is_inside and len(self.numbers) < STYLES:
            self.numbers.append(whole(attributes.get("numFmtId", "0")))

    def end(self, name: str) -> None:
        if name == "cellXfs":
            self._is_inside = False


class _Shared(Part):
    """Text of every <si>, runs joined, reading aids for East Asian characters (rPh) left out."""

    def __init__(self) -> None:
        self.texts: list[str] = []
        self.size = 0
        self._pieces: list[str] = []
        self._is_text = self._is_aid = False

    def start(self, name: str, attributes: dict[str, str]) -> None:
        if name == "si":
            self._pieces = []
        elif name == "rPh":
            self._is_aid = True
        elif name == "t":
            self._is_text = not self._is_aid

    def end(self, name: str) -> None:
        if name == "t":
            self._is_text = False
        elif name == "rPh":
            self._is_aid = False
        elif name == "si":
            self.texts.append(plain_text("".join(self._pieces)))
            self._pieces = []

    def text(self, data: str) -> None:
        if self._is_text:
            self._pieces.append(data)
            self.size += len(data)


def whole(text: str) -> int:
    """A small whole number of the file, -1 if it is none."""
    return int(text) if text.isascii() and text.isdigit() and len(text) <= 9 else -1

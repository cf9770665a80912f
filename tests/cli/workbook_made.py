"""Workbooks for the tests of the reader: written part by part, so that every defect can be made."""

from __future__ import annotations

import io
import zipfile

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
DOC = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
RELS = "http://schemas.openxmlformats.org/package/2006/relationships"


def relations(*entries: tuple[str, str, str], mode: str = "") -> str:
    extra = f' TargetMode="{mode}"' if mode else ""
    inner = "".join(
        f'<Relationship Id="{i}" Type="{DOC}/{kind}" Target="{target}"{extra}/>'
        for i, kind, target in entries
    )
    return f'<Relationships xmlns="{RELS}">{inner}</Relationships>'


def sheet(rows: str = "", before: str = "", after: str = "") -> str:
    return f'<worksheet xmlns="{MAIN}">{before}<sheetData>{rows}</sheetData>{after}</worksheet>'


def row(line: int, *cells: str, more: str = "") -> str:
    """cells: content of <c> from column A on; '' is left out; one that begins with '<c' is taken as it is."""
    inner = ""
    for column, cell in enumerate(cells):
        place = f"{chr(65 + column)}{line}"
        if cell.startswith("<c"):
            inner += cell
        elif cell:
            inner += f'<c r="{place}" t="inlineStr"><is><t>{cell}</t></is></c>'
    return f'<row r="{line}"{more}>{inner}</row>'


def value(place: str, raw: str, kind: str = "n", style: int = 0, formula: str = "") -> str:
    inside = f"<f>{formula}</f>" if formula else ""
    return f'<c r="{place}" t="{kind}" s="{style}">{inside}<v>{raw}</v></c>'


HEAD = row(1, "run", "kg")


def parts(
    *sheets: str, states: tuple[str, ...] = (), book: str = "", styles: str = "", shared: str = ""
) -> dict[str, str]:
    """Name of every part -> its text, for a plain workbook of these sheets."""
    listed = f"{book}<sheets>" + "".join(
        f'<sheet name="s{n}" sheetId="{n}" state="{(states or ("visible",) * 999)[n - 1]}" r:id="r{n}"/>'
        for n in range(1, len(sheets) + 1)
    )
    links = [(f"r{n}", "worksheet", f"worksheets/sheet{n}.xml") for n in range(1, len(sheets) + 1)]
    made = {
        "[Content_Types].xml": '<Types><Default Extension="xml" ContentType="application/xml"/></Types>',
        "_rels/.rels": relations(("r1", "officeDocument", "xl/workbook.xml")),
        "xl/workbook.xml": f'<workbook xmlns="{MAIN}" xmlns:r="{DOC}">{listed}</sheets></workbook>',
    }
    if styles:
        made["xl/styles.xml"] = f'<styleSheet xmlns="{MAIN}">{styles}</styleSheet>'
        links.append(("st", "styles", "styles.xml"))
    if shared:
        made["xl/sharedStrings.xml"] = f'<sst xmlns="{MAIN}">{shared}</sst>'
        links.append(("ss", "sharedStrings", "/xl/sharedStrings.xml"))
    made["xl/_rels/workbook.xml.rels"] = relations(*links)
    for n, text in enumerate(sheets, 1):
        made[f"xl/worksheets/sheet{n}.xml"] = text
    return made


def packed(made: dict[str, str | bytes], method: int = zipfile.ZIP_DEFLATED) -> bytes:
    held = io.BytesIO()
    with zipfile.ZipFile(held, "w", method) as archive:
        for name, text in made.items():
            archive.writestr(name, text)
    return held.getvalue()


def workbook(*sheets: str, **more: object) -> bytes:
    return packed(parts(*sheets, **more))  # type: ignore[arg-type]


def styles(*codes: str, builtin: tuple[int, ...] = ()) -> str:
    """Style 0 is plain; then one style a format code, then one a built-in format."""
    formats = "".join(f'<numFmt numFmtId="{164 + i}" formatCode="{c}"/>' for i, c in enumerate(codes))
    used = [0, *(164 + i for i in range(len(codes))), *builtin]
    cells = "".join(f'<xf numFmtId="{n}"/>' for n in used)
    named = '<cellStyleXfs><xf numFmtId="14"/></cellStyleXfs>'
    return f"<numFmts>{formats}</numFmts>{named}<cellXfs>{cells}</cellXfs>"

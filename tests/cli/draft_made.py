"""Files for the tests of the draft, its parts by name, and answers to all of its questions."""

from __future__ import annotations

import csv
import io
import random
import re
import tomllib
from collections.abc import Mapping, Sequence
from typing import Any

import openpyxl

from outcomes.intake.draft import draft_mapping

RUNS = [
    "Run no", "Record no", "Name", "DOB", "Sex", "Weight kg", "Flow on", "Flow off", "How support ended", "Lactate", "BP",
    "stroke - first onset", "Remarks",
]  # fmt: skip


def rows(n: int = 60) -> list[list[str]]:
    """n runs under RUNS; the record numbers repeat now and then."""
    source = random.Random(4)
    made = []
    for i in range(n):
        day = 1 + i % 28
        made.append([
            f"R{i:03d}", f"P{100 + i - (i % 20 == 7)}", "Eichelhart Zaunkoenig", f"03/{day:02d}/1951", "MF"[i % 2], str(60 + i % 30),
            f"04/{day:02d}/2023 08:15 AM", f"05/{day:02d}/2023 09:30 PM", ["weaned", "died on support"][i % 2],
            f"{source.uniform(20, 90):.1f}", f"{90 + i % 9}/{50 + i % 7}", f"04/{day:02d}/2023 11:00 AM" if i % 4 == 0 else "",
            f"wrote to the aunt {i}",
        ])  # fmt: skip
    return made


def as_csv(headers: Sequence[str], body: Sequence[Sequence[str]], separator: str = ",") -> bytes:
    buffer = io.StringIO()
    csv.writer(buffer, lineterminator="\n", delimiter=separator).writerows([headers, *body])
    return buffer.getvalue().encode("utf-8")


def with_columns(more: Mapping[str, Sequence[str]], headers: Sequence[str] = RUNS) -> bytes:
    """The runs with columns replaced or added."""
    n = max((len(cells) for cells in more.values()), default=60)
    table = {h: [row[i] for row in rows(n)] for i, h in enumerate(RUNS) if h in headers}
    table.update({h: list(cells) for h, cells in more.items()})
    return as_csv(list(table), list(zip(*table.values(), strict=True)))


def as_workbook(*sheets: Sequence[Sequence[object]]) -> bytes:
    book = openpyxl.Workbook()
    book.remove(book.active)
    for number, body in enumerate(sheets, start=1):
        page = book.create_sheet(f"s{number}")
        for row in body:
            page.append(list(row))
    held = io.BytesIO()
    book.save(held)
    return held.getvalue()


def draft(*datas: bytes) -> str:
    return draft_mapping(list(datas), "made")[0]


def columns(text: str) -> dict[str, dict[str, Any]]:
    """Header -> the column block of a draft; of sheets that share a header the last."""
    return {c["header"]: c for s in sheets(text) for c in s.get("column", [])}


def sheets(text: str) -> list[dict[str, Any]]:
    return [s for f in tomllib.loads(text)["file"] for s in f["sheet"]]


def beside(text: str, header: str) -> str:
    """All comments of a column block, on one line."""
    block = re.split(r"\n\n", text[text.index(f"[[file.sheet.column]]\nheader = \"{header}\"") :])[0]
    return " ".join(line.removeprefix("# ") for line in block.splitlines() if line.startswith("#"))


def said(text: str) -> str:
    """All comments of a draft, on one line."""
    return " ".join(line.removeprefix("# ") for line in text.splitlines() if line.startswith("#"))


ANSWERS = {
    "identifiers": '"made"', "period": "[2023-01-01, 2023-12-31]", "extract_date": "2024-03-31", "extent": '"whole"',
    "time_zone": '"Europe/Vienna"', "plan_written": '"unknown"', "vital_status_checked": "2024-03-31",
    "vital_status_date": '"day of death"', "no_death_means": '"unknown"', "attempts": '"not in this source"',
    "calendar": '"keep"', "events_kept": '"first"', "looked_until_hours_after_end": "0", "definition": '"our own"',
    "valid_from_year": "2023", "window": '"pre_undated"', "means": '"not recorded"', "decimal_mark": '"."',
    "pattern": '"MM/DD/YYYY"', "row_is": '"detail"', "run": '["Run no"]', "person": '["Record no"]', "BP.unit": '"mm[Hg]"',
}  # fmt: skip


def settled(text: str, answers: Mapping[str, str] | None = None) -> str:
    """The draft with every question of the usual keys answered; `answers` adds or replaces keys, or 'header.key'."""
    given = {**ANSWERS, **(answers or {})}
    header, out = "", []
    for line in text.splitlines():
        if line.startswith("header = "):
            header = str(tomllib.loads(line)["header"])
        found = re.fullmatch(r'(\w+) = (\["\?"\]|"\?")', line)
        answer = given.get(f"{header}.{found[1]}", given.get(found[1])) if found else None
        out.append(f"{found[1]} = {answer}" if found and answer else line)
    return "\n".join(out) + "\n"

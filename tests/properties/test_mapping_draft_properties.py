"""Whatever a table holds: its draft is valid, stable, names every column, and shows no rare cell."""

from __future__ import annotations

import csv
import io
import re
import tomllib

from hypothesis import event, given, settings
from hypothesis import strategies as st

from outcomes.errors import DataRefused
from outcomes.intake.draft import draft_mapping
from outcomes.intake.mapping_file import unsettled

_WORD = st.text(alphabet=st.characters(codec="utf-8", categories=("L", "N", "P", "S", "Zs")), min_size=1, max_size=12)
_HEADER = _WORD.map(str.strip).filter(lambda h: h and not h[0].isdigit() and any(c.isalpha() for c in h))
_SECRET = st.from_regex(r"[b-df-hj-np-tv-z]{9}", fullmatch=True)
_FREQUENT = st.sampled_from(["Yes", "No", "7.5", "12", "03/16/2021", "n/a", "", "92/54", "08:15", "1,234"])


@st.composite
def tables(draw: st.DrawFn) -> tuple[list[str], list[list[str]], set[str]]:
    """Headers, rows, and the cells that stand in them once only."""
    headers = draw(st.lists(_HEADER, min_size=2, max_size=5, unique_by=lambda h: re.sub(r"\s+", " ", h).casefold()))
    n = draw(st.integers(12, 40))
    body = [[draw(_FREQUENT) for _ in headers] for _ in range(n)]
    secrets = set()
    for secret in draw(st.lists(_SECRET, min_size=1, max_size=6, unique=True)):
        body[draw(st.integers(0, n - 1))][draw(st.integers(0, len(headers) - 1))] = secret
        secrets.add(secret)
    return ["Run no", *headers], [[f"R{i}", *row] for i, row in enumerate(body)], secrets


def _bytes(headers: list[str], body: list[list[str]]) -> bytes:
    held = io.StringIO()
    csv.writer(held, lineterminator="\n", quoting=csv.QUOTE_ALL).writerows([headers, *body])
    return held.getvalue().encode("utf-8")


@settings(max_examples=60, deadline=None)
@given(tables())
def test_a_draft_is_valid_stable_complete_and_shows_no_rare_cell(table: tuple[list[str], list[list[str]], set[str]]) -> None:
    headers, body, secrets = table
    data = _bytes(headers, body)
    try:
        text, marks = draft_mapping([data], "made")
    except DataRefused as refusal:
        event("refused")
        assert not [s for s in secrets if s in str(refusal)]
        return
    assert draft_mapping([data], "made") == (text, marks)
    made = tomllib.loads(text)
    assert marks == len(unsettled(made))
    assert not [s for s in secrets if s in text]
    sheet = made["file"][0]["sheet"][0]
    if sheet["row_is"] != "code list":
        named = [c["header"] for c in sheet.get("column", [])] + sheet.get("leave_out", [])
        named += [j for c in sheet.get("column", []) for j in c.get("join", [])]
        named += [h for key in ("run", "person") if isinstance(sheet[key], list) for h in sheet[key]]
        assert len(named) == len(set(named)) == len(headers)

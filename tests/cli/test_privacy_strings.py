"""Planted strings of people: in every place of an export, through every command, and nowhere to be found afterwards."""

from __future__ import annotations

import base64
import html
import importlib.util
import urllib.parse
from collections.abc import Iterator

import pytest
from import_made import ROWS, Desk, Mapped, detail_file

from outcomes.intake.identify import Identities, RunNumbers

# Where the string is put -> the string. Identifiers that the mapping asks for belong in the link file and are not here.
PLANTED = {
    "unknown header": "Zwiebelhuber Kunigunde",
    "file name": "Quastenflosser-Ottokar",
    "sheet cell, left out": "Ringelnatter Eusebius",
    "left out, id": "MRN-88317745",
    "left out, mail": "kunigunde.z@klinik-wolkenstein.example",
    "left out, phone": "+43 664 9917382",
    "left out, remark": "found by her sister in the allotment",
    "left out, quoted lines": "Wolkenstein Adalbert",
    "left out, address": "Dachsbauweg 417",
    "code cell, name": "Tannhauser Melisande",
    "code cell, letters": "ÄGIDIUS-ÖTTINGER",
    "number cell, id": "7719923845",
    "number cell, text": "eighty kilos Hagebutte",
    "date cell, words": "the day Isolde fell",
    "date cell, birth date": "17.11.1958",
    "end cell": "Parzival-Gawan",
    "complication cell": "stroke of Herr Zacharias",
    "grade, name": "Brunhilde Siegmund-Xanten",
    "grade, date": "9.4.1947",
    "twin that differs": "Querkopf-Dietlinde",
    "run without a start": "Nibelung-Walpurga",
    "mapping header": "Gottfried von Drachenfels",
    "argument": "Kriemhild-Argument",
}
BIRTHS = ["1960-05-01", "1950-05-01", "1970-05-01", "1980-05-01"]


def spellings(text: str) -> Iterator[bytes]:
    """Every way in which a file could hold the text."""
    forms = {text, text.upper(), text.lower(), text[::-1], urllib.parse.quote(text), urllib.parse.quote_plus(text), html.escape(text)}
    for form in forms:
        for encoding in ("utf-8", "utf-16-le", "utf-16-be", "latin-1"):
            raw = form.encode(encoding, errors="replace")
            yield raw
            yield raw.hex().encode()
            yield raw.hex().upper().encode()
            for shift in range(3):
                coded = base64.b64encode(bytes(shift) + raw)
                yield coded[4 if shift else 0 : len(coded) - 4]


def mapped() -> Mapped:
    made = Mapped(leave_out='["Note"]')
    made.columns["Sex"] = 'field = "person.sex_recorded", codes = { M = "male", F = "female" }, blank = "not recorded"'
    events = {
        "What": 'field = "complication_event.kind", codes = { s = "stroke" }, blank = "defect"',
        "At": 'field = "complication_event.onset", blank = "defect"',
        "Grade": 'field = "complication_event.grade", blank = "not recorded"',
    }
    made.more = detail_file("events", events, row_is="event")
    return made


def run_rows() -> list[str]:
    p = PLANTED
    good = [f"{row},{note}" for row, note in zip(ROWS, [
        p["sheet cell, left out"], f'"{p["left out, quoted lines"]}\nsecond line"', f'{p["left out, id"]} {p["left out, mail"]}',
        f'"{p["left out, phone"]}, {p["left out, remark"]}, {p["left out, address"]}"',
    ], strict=True)]  # fmt: skip
    return [
        *good,
        f"11,B11,1961-01-01,{p['code cell, name']},80,2021-03-01 10:00,2021-03-05 10:00,{p['code cell, letters']},yes,4,,",
        f"12,B12,{p['date cell, birth date']},M,{p['number cell, id']},2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,{p['number cell, text']},,",
        f"13,B13,1961-01-01,M,80,{p['date cell, words']},2021-03-05 10:00,Recovered,yes,4,,",
        f"14,B14,1961-01-01,M,80,2021-03-01 10:00,{p['end cell']},Recovered,yes,4,{p['complication cell']},",
        "15,B15,1961-01-01,M,80,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,4,,",
        f"15,B15,1961-01-01,{p['twin that differs']},80,2021-03-01 10:00,2021-03-05 10:00,Recovered,yes,4,,",
        f"16,{p['run without a start']},1961-01-01,M,80,,2021-03-05 10:00,Recovered,yes,4,,",
    ]


def exports(desk: Desk) -> dict[str, str]:
    """Paths by name: the map and the two files, a file with an unknown header, a mapping that does not fit."""
    made = mapped()
    head = made.header() + ",Note"
    p = PLANTED
    events = f"Run,What,At,Grade\n1,s,2021-03-02 10:00,{p['grade, name']}\n2,s,2021-04-01 20:00,{p['grade, date']}\n"
    wrong = Mapped(columns=made.columns | {p["mapping header"]: 'field = "nothing", blank = "none"'})
    return {
        "map": desk.write("map.toml", made.text()),
        "runs": desk.write(f"{p['file name']}.csv", "\n".join([head, *run_rows(), ""])),
        "events": desk.write("events.csv", events),
        "unknown": desk.write("unknown.csv", "\n".join([f"{head},{p['unknown header']}", *(r + "," for r in run_rows()[4:]), ""])),
        "ragged": desk.write("ragged.csv", "\n".join([head, run_rows()[0], p["end cell"], f'x"{p["code cell, name"]}', ""])),
        "wrong": desk.write("wrong.toml", wrong.text()),
    }


def everything_said_and_kept(desk: Desk, inputs: dict[str, str]) -> dict[str, bytes]:
    """Run every command, the failing ones too; give what was printed and what lies in the folder, but the link file."""
    store = ("--store", str(desk.store))
    listed = [str(desk.folder / name) for name in ("a.csv", "b.json", "c.csv")]
    good = (inputs["map"], inputs["runs"], inputs["events"])
    drafting = [("mapping", "check", inputs["wrong"]), ("mapping", "check", inputs["map"])]
    if importlib.util.find_spec("outcomes.intake.draft") is None:
        drafting = []
    said = []
    for words in [
        ("import", *good, *store, "--findings", listed[0]),
        ("check", *good, *store, "--rules", "--findings", listed[1]),
        ("import", inputs["map"], inputs["unknown"], inputs["events"], *store),
        ("import", inputs["map"], inputs["ragged"], inputs["events"], *store, "--debug"),
        ("import", *good, *store, "--set-aside", "--findings", listed[2]),
        ("import", *good, *store, "--set-aside", "--json"),
        ("import", inputs["wrong"], inputs["runs"], *store),
        ("import", *good[:2], *store),
        ("import", *good, *store, f"--{PLANTED['argument']}"),
        ("summary", *store), ("summary", *store, "--json"), ("describe", PLANTED["argument"]),
        ("report", "audit", *store), ("report", PLANTED["argument"], *store),
        ("summary", "--store", inputs["runs"]), *drafting,
    ]:  # fmt: skip
        code, out, err = desk.run(*words)
        assert code != 1, (words, err)
        said.append(out + err)
    kept = {
        p.relative_to(desk.folder).as_posix(): p.read_bytes()
        for p in desk.folder.rglob("*") if p.is_file() and p != desk.link and str(p) not in inputs.values()
    }  # fmt: skip
    # The mapping is the user's own file; a header that it lists may be named in print, but the store need not know it.
    return {"printed": "\n".join(said).replace(PLANTED["mapping header"], "").encode(), **kept}


def test_no_planted_string_survives_outside_the_link_file(desk: Desk, tmp_path_factory: pytest.TempPathFactory, monkeypatch: pytest.MonkeyPatch) -> None:
    scratch = tmp_path_factory.mktemp("scratch")
    monkeypatch.setenv("TMPDIR", str(scratch))
    monkeypatch.setattr("tempfile.tempdir", None)
    assert len(PLANTED) >= 20
    found = everything_said_and_kept(desk, exports(desk))
    assert {"unit.duckdb", "unit.duckdb.calendar", "a.csv", "b.json", "c.csv", "printed"} <= found.keys()
    found |= {f"scratch/{p.name}": p.read_bytes() for p in scratch.rglob("*") if p.is_file()}
    hits = [(where, name) for where, data in found.items() for name, text in PLANTED.items() if any(s in data for s in spellings(text))]
    assert hits == []
    # Identifiers of the mapping stand in the link file alone; births nowhere.
    for text in ("A11", "A14", "B12"):
        assert all(text.encode() not in data for where, data in found.items() if where in ("unit.duckdb", "unit.duckdb.calendar"))
    assert all(b.encode() not in data for data in found.values() for b in BIRTHS)
    assert b"Nibelung" not in found["unit.duckdb"] and desk.leftovers() == []


def test_the_search_finds_what_is_there() -> None:
    """The search itself: each spelling of a string inside other bytes."""
    text = PLANTED["code cell, name"]
    for hidden in (text.encode("utf-16-le"), b"xy" + base64.b64encode(b"ab" + text.encode() + b"c"), text[::-1].encode(), text.encode().hex().encode()):
        assert any(s in b"...." + hidden + b"...." for s in spellings(text))


def test_what_holds_identifiers_in_memory_does_not_show_them() -> None:
    identities = Identities(lambda: "0" * 32)
    numbers = RunNumbers(identities, "north")
    numbers.number("R-1", "Zwiebelhuber")
    assert "Zwiebelhuber" not in repr(identities) + repr(numbers) + str(numbers)

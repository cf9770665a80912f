"""From results to cells, and a table as HTML and CSV."""

import csv
import io
from html.parser import HTMLParser

import pytest

from outcomes.analysis.result import Method, Result, tidy
from outcomes.tables.csv_text import csv_text, harmless
from outcomes.tables.from_result import cell_of, find, marked, written
from outcomes.tables.html import table_html
from outcomes.tables.kind import KINDS
from outcomes.tables.table import Cell, Column, Row, Table, anchor, plain_words

METHOD = Method("share of runs", interval="Wilson")
RESULT = Result(
    tidy(
        [
            {"group": "weaned", "estimate": 0.62, "lower": 0.49, "upper": 0.74, "at_risk": 61, "events": 38},
            {"group": "lvad", "at_risk": 12, "events": 3, "reason": "too_few"},
            {"group": "other", "at_risk": 0, "events": 0, "reason": "nobody"},
        ],
        ["group", "estimate", "lower", "upper", "at_risk", "events", "reason"],
    ),
    METHOD,
)


def example(label: str = "Weaned", caption: str = "How support ended", note: str = "") -> Table:
    columns = (
        Column("events", "Runs", "count"),
        Column("share", "Share", "percent"),
        Column("interval", "95% CI", "percent_interval"),
        Column("change", "Change", "points", "percentage points"),
        Column("remark", "Remark", "word"),
    )
    rows = []
    for key, words in (("weaned", label), ("lvad", "Durable LVAD"), ("other", "Other exit")):
        source = find(RESULT, {"group": key})
        rows.append(
            Row(
                key,
                words,
                (
                    cell_of("count", source, ("events",), link="runs_" + key),
                    cell_of("percent", source, ("estimate", "at_risk")),
                    cell_of("percent_interval", source, ("lower", "upper", "at_risk")),
                    written("points", (-0.031, 61)),
                    written("word", (label,)),
                ),
            )
        )
    return Table("endings", caption, "Ending", columns, tuple(rows), (note,) if note else ())


class Elements(HTMLParser):
    """Counts elements and keeps ids, headers and the text of the cells."""

    def __init__(self, text):
        super().__init__()
        self.tags, self.ids, self.headers = [], [], []
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        values = dict(attrs)
        self.tags.append((tag, values.get("scope")))
        if "id" in values:
            self.ids.append(values["id"])
        self.headers += values.get("headers", "").split()


def test_cells_hold_text_numbers_and_marks():
    table = example()
    assert [cell.text for cell in table.rows[0].cells] == ["38", "62%", "49% to 74%", "−3", "Weaned"]
    assert table.cell("lvad", "share") == Cell("[low]", ("[low]",))
    assert table.cell("other", "interval") == Cell("[z]", ("[z]", "[z]"))
    assert table.cell("weaned", "share").number == 0.62
    assert table.marks() == ("[z]", "[low]")


def test_a_row_is_found_or_not_but_never_guessed():
    assert find(RESULT, {"group": "nowhere"}) is None
    assert find(RESULT, {"group": "weaned"})["reason"] is None
    with pytest.raises(ValueError, match="3 rows"):
        find(RESULT, {})
    with pytest.raises(KeyError):
        find(RESULT, {"cause": "weaned"})


def test_a_missing_number_shows_its_reason():
    assert cell_of("ratio", {"value": None, "reason": "not_reached"}).text == "not reached"
    assert cell_of("ratio", {"value": None, "reason": "separation"}).text == "not estimable"
    assert cell_of("ratio", {"value": None}).text == "[x]"
    assert cell_of("ratio", None).text == "[z]"
    with pytest.raises(ValueError, match="takes lower, upper, n"):
        cell_of("percent_interval", {"a": 1}, ("a",))


@pytest.mark.parametrize(
    ("kind", "values", "text", "plain"),
    [
        ("x_of_n", (3, 12), "3 of 12", ("3", "12")),
        ("percent_with_counts", (3, 12), "3/12", ("3", "12")),
        ("percent_with_counts", (30, 60), "50% (30/60)", ("30", "60")),
        ("of_100", (0.5, 60), "about 50 of 100", ("about 50 of 100",)),
        ("points_interval", (-0.1, 0.02, 60), "−10 to 2", ("-10", "2")),
        ("ratio_interval", (1.5, 0.001, 3), "<0.01 to 3.00", ("<0.01", "3.00")),
        ("p_value", (0.0001,), "<0.001", ("<0.001",)),
        ("duration", (30,), "30 h", ("30", "h")),
        ("duration_quartiles", (96, 48, 120), "4.0 (2.0 to 5.0) days", ("4.0", "2.0", "5.0", "days")),
        ("time", (0.5,), "0.5", ("0.5",)),
        ("time", (30.0,), "30", ("30",)),
        ("quartiles_1", (1, 0.5, 2), "1.0 (0.5 to 2.0)", ("1.0", "0.5", "2.0")),
        ("number_interval_0", (-2, 3), "−2 to 3", ("-2", "3")),
        ("number_2", (1234.5,), "1,234.50", ("1234.50",)),
        ("word", ("a\tb\u202e",), "a b", ("a b",)),
    ],
)
def test_every_kind_writes_its_text_and_its_csv_parts(kind, values, text, plain):
    cell = written(kind, values)
    assert (cell.text, cell.plain) == (text, plain)
    assert len(plain) == len(KINDS[kind].parts)


def test_tables_that_do_not_fit_are_refused():
    column, cell = Column("n", "Runs", "count"), written("count", (3,))
    with pytest.raises(ValueError, match="one cell a column"):
        Table("t", "c", "s", (column,), (Row("a", "A", ()),))
    with pytest.raises(ValueError, match="share a key"):
        Table("t", "c", "s", (column,), (Row("a", "A", (cell,)), Row("a", "B", (cell,))))
    with pytest.raises(ValueError, match="not of its kind"):
        Table("t", "c", "s", (column,), (Row("a", "A", (marked("x_of_n", "[x]"),)),))
    with pytest.raises(ValueError, match="no such kind"):
        Column("n", "Runs", "pie")
    for key in ("A", "a b", "a--b", '"', ""):
        with pytest.raises(ValueError, match="small letters"):
            anchor("t", key, "c")


def test_html_has_caption_scopes_marks_and_only_wanted_ids():
    text = str(
        table_html(example(note="Follow-up ends at discharge."), 3, {anchor("endings", "weaned", "share")})
    )
    seen = Elements(text)
    assert seen.ids == ["t-endings", "t-endings-caption", "t-endings--weaned--share"]
    assert seen.tags.count(("th", "col")) == 6
    assert seen.tags.count(("th", "row")) == 3
    assert '<span class="label">Table 3.</span> How support ended' in text
    assert '<abbr title="too few to estimate">[low]</abbr>' in text
    assert '<p class="note">[z] not applicable; [low] too few to estimate.</p>' in text
    assert '<a href="#l-runs_weaned">38</a>' in text


def test_two_rows_of_headings_are_tied_to_their_cells():
    columns = (Column("n", "Runs", "count"), Column("a", "Share", "percent", over="Weaned"),
               Column("b", "95% CI", "percent_interval", over="Weaned"))  # fmt: skip
    cells = (
        written("count", (3,)),
        written("percent", (0.5, 50)),
        written("percent_interval", (0.4, 0.6, 50)),
    )
    text = str(table_html(Table("t", "c", "s", columns, (Row("r", "R", cells),)), 1))
    seen = Elements(text)
    assert ("th", "colgroup") in seen.tags
    assert set(seen.headers) <= set(seen.ids)
    assert 'headers="t-t-over-a t-t-head-b"' in text


def test_decimal_points_of_a_column_stand_in_line():
    column = Column("r", "Ratio", "ratio")
    rows = tuple(Row(f"r{i}", "x", (written("ratio", (v,)),)) for i, v in enumerate((1.23, 22.7, 312)))
    text = str(table_html(Table("t", "c", "s", (column,), rows), 1))
    assert ">1.23<" in text
    assert ">22.7\N{FIGURE SPACE}<" in text
    assert ">312\N{PUNCTUATION SPACE}\N{FIGURE SPACE}\N{FIGURE SPACE}<" in text


HOSTILE = (
    "</td></table><script>alert(1)</script>{{ 7*7 }}{% raw %}<!-- \"'><img src=x onerror=y> $x^2$ \x00\ue000"
)


def test_hostile_text_changes_no_element():
    kind = str(table_html(example(note="n"), 1))
    foul = str(table_html(example(HOSTILE, HOSTILE, HOSTILE), 1))
    assert Elements(foul).tags == Elements(kind).tags
    assert "<script" not in foul


@pytest.mark.parametrize(
    ("raw", "safe"),
    [
        ("=1+1", "'=1+1"),
        ("  @SUM(A1)", "'@SUM(A1)"),
        ("\t-2", "'-2"),
        ("−2", "'-2"),
        ("＝1", "'＝1"),
        ('x";=cmd', "x\";'=cmd"),
        ("a, +b", "a, '+b"),
        ("a - b", "a - b"),
        ("low-flow", "low-flow"),
        ("'=1", "''=1"),
    ],
)
def test_no_text_can_become_a_formula(raw, safe):
    assert harmless(raw) == safe


def test_csv_keeps_numbers_and_quotes_text():
    text = csv_text(example('=cmd|"x"'))
    assert text.endswith("\r\n")
    rows = list(csv.reader(io.StringIO(text, newline="")))
    assert rows[0][:4] == ["Ending", "Runs", "Share", "95% CI, lower"]
    assert rows[0][4:] == ["95% CI, upper", "Change (percentage points)", "Remark"]
    assert rows[1] == ['\'=cmd|"x"', "38", "62", "49", "74", "-3", '\'=cmd|"x"']
    assert ',38,62,49,74,-3,"' in text
    assert rows[2][2:5] == ["[low]", "[low]", "[low]"]


def test_plain_words_is_one_clean_line():
    assert plain_words(" a\u2028b\r\n\u202ec\x07\ue000 ") == "a b c"

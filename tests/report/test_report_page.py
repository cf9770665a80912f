"""The whole page: its structure, numbers that repeat their cells, nothing from outside, no data as code."""

import base64
import csv
import hashlib
import io
import re
from itertools import pairwise

import pytest
from html_reading import Reading
from made_report import FILES, made

from outcomes.report.codec import report_id, results_json
from outcomes.report.render import compact, render
from outcomes.tables.csv_text import csv_text

HOSTILE = (
    "</span></td></table><script>alert(1)</script><img src=x onerror=alert(1)> {{ 7*7 }} {% raw %} {# x #} "
    "<!-- -->]]> &lt;b&gt; \"'`=${} *a* \ue0000\ue001 \x00 $x^2$"
)


@pytest.fixture(scope="module")
def page() -> str:
    return render(made())


@pytest.fixture(scope="module")
def reading(page: str) -> Reading:
    return Reading(page)


def test_one_language_one_title_one_first_heading_none_skipped(page, reading):
    levels = [level for level, _ in reading.headings]
    assert levels.count(1) == 1
    assert levels[0] == 1
    assert all(b - a <= 1 for a, b in pairwise(levels))
    assert '<html lang="en-GB">' in page
    assert "<title>Audit of support runs – Internal – contains individual runs</title>" in page
    assert reading.unclosed == []


def test_ids_are_unique_and_every_pointer_has_its_target(reading):
    assert len(reading.ids) == len(set(reading.ids))
    targets = [v["href"][1:] for tag, v in reading.attributes if (v.get("href") or "").startswith("#")]
    labelled = [i for _, v in reading.attributes for i in (v.get("aria-labelledby") or "").split()]
    headers = [i for _, v in reading.attributes for i in (v.get("headers") or "").split()]
    assert targets
    assert headers
    assert set(targets) | set(labelled) | set(headers) <= set(reading.ids)


def test_every_number_in_a_sentence_repeats_its_cell(reading):
    assert len(reading.references) > 15
    for target, text in reading.references:
        assert reading.texts[target] == text


def test_digits_of_a_sentence_are_slots_pointers_or_listed(page):
    """Outside spans with a cell, links and the listed unit, a finding holds no digit but the level's."""
    for paragraph in re.findall(r"<p><em class=\"head\">Finding\.</em>.*?</p>", page, flags=re.DOTALL):
        bare = re.sub(r"<span data-ref=.*?</span>|<a .*?</a>|<[^>]+>", "", paragraph)
        bare = bare.replace("95% CI", "").replace("1,000 support-days", "")
        assert not re.search(r"\d", bare), bare


def test_no_word_for_a_number_that_is_none(page, reading):
    assert not re.search(r"\b(nan|inf|None|NaN|NaT|<NA>)\b", reading.visible)
    assert not re.search(r"(?<![\d\w])[-−]0(?:\.0+)?(?![\d.])", reading.visible)
    assert "Undefined" not in page


def test_policy_comes_first_and_its_hash_is_that_of_the_style(page):
    head = page.index('<meta charset="utf-8">')
    assert page[head:].split("\n")[1].startswith('<meta http-equiv="Content-Security-Policy"')
    style = re.findall(r"<style>(.*?)</style>", page, flags=re.DOTALL)
    assert len(style) == 1
    digest = base64.b64encode(hashlib.sha256(style[0].encode()).digest()).decode()
    assert f"style-src &#39;sha256-{digest}&#39;" in page
    assert "default-src &#39;none&#39;" in page


def test_nothing_is_asked_for_and_nothing_runs(page, reading):
    for banned in (
        "<script",
        "<iframe",
        "<link",
        "<object",
        "<base",
        "<form",
        "@import",
        " style=",
        "javascript:",
    ):
        assert banned not in page
    assert not any(name.startswith("on") for _, values in reading.attributes for name in values)
    assert set(re.findall(r"https?://[^\s\"'<]+", page)) == {"http://www.w3.org/2000/svg"}
    assert set(re.findall(r"url\(([^)]{2})", page)) <= {"#f"}
    sources = [v.get("href") or v.get("src") or "" for _, v in reading.attributes]
    assert all(s == "" or s.startswith(("#", "data:text/csv")) for s in sources)


def test_hostile_text_in_every_label_leaves_the_elements_alone(reading):
    foul = render(made(HOSTILE, title=HOSTILE, provenance={HOSTILE[:20]: [HOSTILE, HOSTILE]}))
    kind = render(made("Myocarditis", title="T", provenance={"P": ["a", "b"]}))
    assert Reading(foul).tags == Reading(kind).tags
    assert foul.count("{{ 7*7 }}") > 10
    assert "<script" not in foul
    assert Reading(foul).ids == Reading(kind).ids


def test_every_figure_has_its_table_and_its_numbers_to_take_away(page, reading):
    report = made()
    tables = {table.key: table for table in report.tables()}
    links = [v for tag, v in reading.attributes if tag == "a" and "download" in v]
    assert [v["download"] for v in links] == [f"fig-{n:02d}.csv" for n in range(1, 7)]
    for figure, values in zip(report.figures(), links, strict=True):
        kind, _, data = values["href"].partition("base64,")
        assert kind == "data:text/csv;charset=utf-8;"
        text = base64.b64decode(data).decode("utf-8")
        assert text == csv_text(tables[figure.table])
        assert len(list(csv.reader(io.StringIO(text, newline="")))) == len(tables[figure.table].rows) + 1
        assert f'href="#t-{figure.table}"' in page


def test_order_within_a_section(page):
    section = page[page.index('<section id="s-endings"') : page.index('<section id="s-survival"')]
    places = [
        section.index(mark) for mark in ("<h2>", "Finding.", "<table", "<figure", "Caution.", "Method.")
    ]
    assert places == sorted(places)
    assert "This is never shown" not in section
    assert "reflect few of another. Two runs were still supported." in section


def test_the_level_is_named_once_in_a_section(page):
    section = page[page.index('<section id="s-survival"') : page.index('<section id="s-harm"')]
    finding = re.sub(r"<[^>]+>", "", section[section.index("Finding.") : section.index("<table")])
    assert finding.count("95% CI") == 1
    assert "(95% CI 41% to 67%)" in finding
    assert "(66% to 87%)" in " ".join(finding.split())


def test_cautions_are_counted_on_the_first_page_with_where_they_stand(page):
    summary = page[page.index('<section id="s-summary"') : page.index('<section id="s-who"')]
    text = " ".join(re.sub(r"<[^>]+>", "", summary).split())
    assert "3 cautions stand with the numbers: 1 in section 2, 1 in section 3, 1 in section 4." in text


def test_methods_and_references_are_those_used_and_agree(page, reading):
    section = page[page.index('<section id="s-methods"') : page.index('<section id="s-provenance"')]
    text = " ".join(re.sub(r"<[^>]+>", " ", section).split())
    for words in ("Kaplan-Meier estimate of survival; variance: Greenwood; interval: log-log, level 95%",
                  "Count of runs.", "Aalen-Johansen"):  # fmt: skip
        assert words in text
    cited = {v["href"] for _, v in reading.attributes if (v.get("href") or "").startswith("#r-")}
    listed = {f"#{i}" for i in reading.ids if i.startswith("r-")}
    assert cited == listed == {"#r-1", "#r-2", "#r-3"}


def test_only_the_methods_of_the_sections_that_ran_appear():
    few = {
        name: text
        for name, text in FILES.items()
        if name[:3] in ("010", "080", "090", "100") or name == "report.toml"
    }
    page = render(made(files=few))
    assert "Count of runs." in page
    assert "Kaplan" not in page
    assert '<li id="r-1">' not in page


def test_a_section_without_an_answer_gives_its_reason(page):
    assert "No answer can be given: there are too few centres to compare." in page
    assert "Not reached" not in page
    assert "Centres are compared in" not in page


def test_counts_lead_to_the_runs_behind_them(page, reading):
    assert '<a href="#l-weaned">20</a>' in page
    assert reading.texts["l-weaned"] == "Weaned. R0001, Myocarditis"


def test_the_stamp_and_the_identity_stand_on_every_printed_page(page):
    identity = report_id(results_json(made()))
    assert '@top-left{content:"Internal – contains individual runs"}' in page
    assert f'@top-right{{content:"Report {identity}"}}' in page
    assert re.fullmatch(r"[0-9a-f]{12}", identity)


def test_a_style_sheet_cannot_end_its_block():
    assert compact("/* a\n < b */ p { color: #000000; }\n") == "p { color: #000000; }"
    with pytest.raises(ValueError, match="less-than"):
        compact("p {} </style>")

"""Figures as they reach a page: clean, the same every time, named, unique, only in the colours allowed."""

import os
import re
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree as Tree

import pandas as pd
import pytest
from made_results import (
    ENDINGS,
    TICKS,
    blocks,
    centres_and_limits,
    dot_rows,
    ending_curve,
    fifths,
    survival_curve,
)

from outcomes.analysis.result import Result, tidy
from outcomes.figures.draw import KINDS, draw
from outcomes.figures.drawing import Drawing
from outcomes.figures.palette import ALLOWED
from outcomes.figures.reach import Reach, parts, reach
from outcomes.figures.svg import clean_svg
from outcomes.tables.from_result import written
from outcomes.tables.table import Column, Row, Table

TITLE, SENTENCE = "Survival after the start of support", "By day 30, about 40 of 100 were alive."
HOSTILE = "</text></svg><script>x</script> $x^2$ {{ 7*7 }} & \x00 'quoted' \"twice\""


def steps_table(label: str = "support runs read") -> Table:
    columns = (Column("left", "Left", "count"), Column("reason", "Reason", "word"),
               Column("remaining", "Remaining", "count"))  # fmt: skip
    stages = ((label, 0, "", 96), ("of adults", 6, label, 90))
    rows = tuple(
        Row(f"stage_{i}", words, (written("count", (a,)), written("word", (b,)), written("count", (c,))))
        for i, (words, a, b, c) in enumerate(stages)
    )
    return Table("who", "Who is counted", "Stage", columns, rows)


def drawing(kind: str, key: str, label: str = "") -> Drawing:
    axes = {"time": "Days since start of support", "value": "Alive", "event": "Died", "rest": "Supported"}
    words = {**axes, "now": "this period", "before": "the period before"}
    results: dict[str, Result] = {}
    labels: dict[str, str] = {}
    options: dict[str, float] = {}
    if kind == "survival":
        results["curve"], results["risk"] = survival_curve({"a": 50, "b": 30, "c": 18})
        labels = {"a": label or "Infarction", "b": "Myocarditis", "c": "After surgery"}
    elif kind.startswith("endings"):
        results = {
            "curve": ending_curve(),
            "ticks": Result(tidy([{"time": t} for t in TICKS], ["time"]), ending_curve().method),
        }
        labels = {**ENDINGS, "recovery": label or "Weaned"}
        options = {"end": 30.0}
    elif kind == "calibration":
        results = dict(zip(("points", "rug"), fifths(), strict=True))
        words["equal"] = label or "as predicted"
    elif kind == "time_order":
        results, options = {"points": blocks()}, {"percent": 1}
        words["centre"] = label or "median"
    elif kind == "funnel":
        results = dict(zip(("units", "limits"), centres_and_limits(), strict=True))
        labels, options = {"usual": label or "95% limits", "wide": "99.8% limits"}, {"target": 0.5}
    elif kind == "dots":
        results = {"now": dot_rows(), "before": dot_rows(1.2)}
        labels = {"bleeding": label or "Major bleeding", "limb": "Limb ischaemia", "stroke": "Stroke"}
        options = {"reference": 10.0}
    return Drawing(
        key, TITLE, SENTENCE, steps_table(label or "support runs read"), results, labels, words, options
    )


def tags(svg: str) -> list[str]:
    return [str(e.tag) for e in Tree.fromstring(svg).iter()]


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_a_figure_is_clean_and_named(kind):
    svg = draw(kind, drawing(kind, "one"))
    root = Tree.fromstring(svg)
    assert root.attrib["role"] == "img"
    assert root.attrib["viewBox"].startswith("0 0 ")
    assert "width" not in root.attrib
    ids = {e.attrib["id"]: e for e in root.iter() if "id" in e.attrib}
    title, desc = (ids[i] for i in root.attrib["aria-labelledby"].split())
    assert (title.text, desc.text) == (TITLE, SENTENCE)
    for banned in (" style=", "<style", "<!", "<?", "metadata", "xlink", "rdf", "font-weight", "DejaVu"):
        assert banned not in svg
    assert re.findall(r"https?://[^\"' ]*", svg) == ["http://www.w3.org/2000/svg"]
    assert {c.lower() for c in re.findall(r"#[0-9a-fA-F]{6}", svg)} <= ALLOWED
    assert "<text" in svg
    assert not re.search(r"nan|inf\b|None|-0(?:\.0+)?(?![\d.])", svg)


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_every_reference_has_its_id_and_every_id_is_used(kind):
    svg = draw(kind, drawing(kind, "one"))
    ids = re.findall(r' id="([^"]+)"', svg)
    used = set(re.findall(r"url\(#([^)]+)\)", svg)) | set(re.findall(r'href="#([^"]+)"', svg))
    assert len(ids) == len(set(ids))
    assert used | {"f-one-title", "f-one-desc"} == set(ids)
    assert all(i.startswith("f-one-") for i in ids)


def test_several_figures_share_a_page_without_sharing_an_id():
    page = "".join(draw(kind, drawing(kind, f"fig_{i}")) for i, kind in enumerate(sorted(KINDS)))
    ids = re.findall(r' id="([^"]+)"', page)
    assert len(ids) == len(set(ids))


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_hostile_labels_change_no_element(kind):
    kind_svg, foul = draw(kind, drawing(kind, "one")), draw(kind, drawing(kind, "one", HOSTILE))
    if kind != "steps":  # there a long reason may take a second line
        assert tags(foul) == tags(kind_svg)
    assert set(tags(foul)) == set(tags(kind_svg))
    assert "<script" not in foul
    assert "$x^2$" in foul


def test_the_same_bytes_in_every_process():
    code = (
        "import hashlib, test_svg_figures as t\n"
        "all_of_them = ''.join(t.draw(k, t.drawing(k, 'one')) for k in sorted(t.KINDS))\n"
        "print(hashlib.sha256(all_of_them.encode()).hexdigest())"
    )
    here = Path(__file__).parent
    seen = set()
    for seed in ("0", "7"):
        environment = {**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": f"{here}:{here.parents[1]}"}
        run = subprocess.run(
            [sys.executable, "-c", code], env=environment, capture_output=True, text=True, check=True
        )
        seen.add(run.stdout)
    assert len(seen) == 1


def wrapped(inner: str) -> str:
    return f'<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink">{inner}</svg>'


@pytest.mark.parametrize(
    ("inner", "words"),
    [
        ("<script/>", "element script"),
        ("<g><image/></g>", "element image"),
        ('<g style="filter: url(#x)"/>', "property filter"),
        ('<use xlink:href="http://example.org/#a"/>', "outside itself"),
        ('<path clip-path="url(http://example.org)"/>', "outside itself"),
        ('<path fill="#ff0000"/>', "palette"),
        ('<path style="stroke: #123456"/>', "palette"),
        ('<text style="font: oddly"/>', "font"),
    ],
)
def test_what_no_figure_of_ours_uses_is_refused(inner, words):
    with pytest.raises(ValueError, match=words):
        clean_svg(wrapped(inner), "one", TITLE, SENTENCE)


def test_declarations_become_attributes():
    inner = (
        "<defs><style>*{x: y}</style></defs><metadata/><!-- gone -->"
        '<text id="t" style="font: italic 700 9.5px \'Some Serif\', serif; text-anchor: end" '
        'transform="rotate(-0 1 2)" onclick="x">a</text>'
    )
    root = Tree.fromstring(clean_svg(wrapped(inner), "one", "A < B", SENTENCE))
    assert [str(e.tag).rpartition("}")[2] for e in root.iter()] == ["svg", "title", "desc", "text"]
    assert root[2].attrib == {
        "font-size": "9.5", "font-style": "italic", "font-weight": "700", "text-anchor": "end",
    }  # fmt: skip
    assert root[0].text == "A < B"


def curve(at_risk: list[int]) -> pd.DataFrame:
    n = len(at_risk)
    return pd.DataFrame(
        {"time": [float(i) for i in range(n)], "estimate": [1 - i / n for i in range(n)], "at_risk": at_risk}
    )


def test_reach_of_a_curve():
    """Fewer than 10, or than a tenth of the start if that is more: dashed. Fewer than 5: ended."""
    assert reach(curve([30, 20, 10, 9, 5, 4, 1])) == Reach(reliable_until=3, stop=5)
    assert reach(curve([300, 100, 30, 29])) == Reach(reliable_until=3, stop=None)
    assert reach(curve([])) == Reach(None, None)


def test_a_curve_does_not_run_on_once_all_have_left():
    ended = curve([40, 30, 20]).assign(events=[0, 1, 0], censored=[0, 9, 20])
    assert reach(ended) == Reach(reliable_until=2, stop=2)
    firm, loose = parts(ended, end=30.0)
    assert firm["time"].max() == 2
    assert loose.empty


def test_parts_of_a_curve_meet_and_end_where_they_should():
    firm, loose = parts(curve([30, 20, 10, 9, 5, 4, 1]), end=30.0)
    assert list(firm["time"]) == [0, 1, 2, 3]
    assert firm["estimate"].iloc[-1] == firm["estimate"].iloc[-2]  # carried to the turn, not beyond it
    assert list(loose["time"]) == [3, 4, 5]
    whole, none = parts(curve([30, 20, 15]), end=1.5)
    assert list(whole["time"]) == [0, 1, 1.5]
    assert none.empty


def test_a_panel_of_five_lines_is_refused():
    many = drawing("survival", "one")
    results = dict(zip(("curve", "risk"), survival_curve({c: 20 for c in "abcde"}), strict=True))
    with pytest.raises(ValueError, match="four lines"):
        draw(
            "survival",
            Drawing("one", TITLE, SENTENCE, many.table, results, {c: c for c in "abcde"}, many.words),
        )


def test_the_counts_under_a_curve_are_those_of_the_result():
    svg = draw("survival", drawing("survival", "one"))
    texts = [e.text for e in Tree.fromstring(svg).iter() if str(e.tag).endswith("text")]
    for column in ("at_risk", "events", "censored"):
        for value in survival_curve({"a": 50, "b": 30, "c": 18})[1].table[column]:
            assert f"{value:g}" in texts
    for words in ("At risk", "Censored", "Died", "Infarction", "Myocarditis", "After surgery"):
        assert words in texts


def test_ratios_have_a_logarithmic_axis_with_plain_numbers():
    base = drawing("dots", "one")
    ratio = Drawing(
        "one",
        TITLE,
        SENTENCE,
        base.table,
        {"now": dot_rows(0.1)},
        base.labels,
        base.words,
        {"log": 1, "reference": 1},
    )
    texts = [e.text for e in Tree.fromstring(draw("dots", ratio)).iter() if str(e.tag).endswith("text")]
    assert {"0.5", "1", "2"} <= set(texts)
    assert "e" not in "".join(t for t in texts if t and t[0].isdigit())


def test_a_point_outside_the_limits_has_a_ring_and_no_colour():
    svg = draw("time_order", drawing("time_order", "one"))
    assert {"median", "lower", "upper"} <= {e.text for e in Tree.fromstring(svg).iter() if e.text}
    inside = blocks().table.assign(estimate=0.55)
    given = {"points": Result(inside, blocks().method)}
    calm = Drawing("one", TITLE, SENTENCE, steps_table(), given, {}, {}, {"percent": 1})
    assert svg.count("<use") == draw("time_order", calm).count("<use") + 1


def test_a_chart_without_limits_has_none():
    bare = blocks().table[["time", "estimate"]]
    plain = Drawing(
        "one", TITLE, SENTENCE, steps_table(), {"points": Result(bare, blocks().method)}, {}, {}, {}
    )
    texts = {e.text for e in Tree.fromstring(draw("time_order", plain)).iter() if e.text}
    assert not texts & {"centre", "lower", "upper"}


def test_causes_at_different_times_cannot_be_stacked():
    good = drawing("endings_stacked", "one")
    table = good.frame("curve")
    short = Result(table[~((table["cause"] == "lvad") & (table["time"] > 9))], ending_curve().method)
    bad = Drawing("one", TITLE, SENTENCE, good.table, {"curve": short}, good.labels, good.words, good.options)
    with pytest.raises(ValueError, match="same times"):
        draw("endings_stacked", bad)


@pytest.mark.parametrize("kind", ["endings_stacked", "endings_apart"])
def test_without_given_times_the_axis_has_six_ticks_at_most(kind):
    good = drawing(kind, "one")
    plain = Drawing(
        "one", TITLE, SENTENCE, good.table, {"curve": good.results["curve"]}, good.labels, {}, good.options
    )
    texts = [e.text for e in Tree.fromstring(draw(kind, plain)).iter() if str(e.tag).endswith("text")]
    assert {"0", "30"} <= set(texts)
    assert len([t for t in texts if t in ("0", "6", "12", "18", "24", "30")]) <= 6 * len(ENDINGS)
    assert "Supported" not in texts

"""Tables of a site: a score of one's own invention, a replacement of ours, every fault a table can have."""

import pandas as pd
import pytest

from outcomes.errors import UsageError
from outcomes.scores.catalogue import catalogue, list_scores, our_catalogue
from outcomes.scores.checking import check_table
from outcomes.scores.conventions import option_sets
from outcomes.scores.engine import compute
from outcomes.scores.gate import usable_for_expectation
from outcomes.scores.sheet import describe_score

# An invented score: three items, one on a field that the data dictionary does not have.
OWN = """
form = 1
key = "harbour"
name = "Harbour"
long_name = "An invented score for this test"
status = "implemented"
purpose = "prognosis"
direction = "higher is worse"
range = [-1, 6]
population_text = "Invented."
distrust = ["It is invented."]
convention = [
  { key = "edge", question = "Is 10 low?", default = "low", options = { low = "yes", high = "no" } },
]
population = [
  { key = "adult", text = "adult", evidence = "verified", any = [{ input = "age_years", at_least = 18 }] },
]
input = [
  { field = "age_years", window = "run", worst = "none" },
  { field = "lactate_mmol_l", window = "pre_last", worst = "last" },
  { field = "tide_m", window = "run", worst = "none", kind = "number", unit = "m", low = 0, high = 20 },
  { field = "had_arrest", window = "run", worst = "any" },
]

[citation]
text = "Nobody, nowhere"
evidence = "verified"

[outcome]
event = "death"
text = "death within 30 days"
horizon = "30 days"

[[item]]
key = "lactate"
label = "lactate"
evidence = "verified"
input = "lactate_mmol_l"
bands = [{ below = 4, points = 0 }, { at_least = 4, points = 2 }]

[[item]]
key = "tide"
label = "tide"
evidence = "verified"
input = "tide_m"
bands = [
  { at_most = 10, points = -1, only_with = ["edge=low"] },
  { above = 10, points = 1, only_with = ["edge=low"] },
  { below = 10, points = -1, only_with = ["edge=high"] },
  { at_least = 10, points = 1, only_with = ["edge=high"] },
]

[[item]]
key = "arrest"
label = "arrest"
evidence = "verified"
input = "had_arrest"
yes = 3
no = 0

[[class]]
key = "calm"
at_most = 1
probability = 0.1
evidence = "verified"

[[class]]
key = "rough"
at_least = 2
probability = 0.6
evidence = "verified"

[[vector]]
id = "H1"
inputs = { age_years = 50, lactate_mmol_l = 4.0, tide_m = 10.0, had_arrest = true }
points = { lactate = 2, tide = -1, arrest = 3 }
total = 4
class = "rough"
probability = 0.6
"""


def own_tables(folder, text=OWN, key="harbour"):
    (folder / f"{key}.toml").write_text(text, encoding="utf-8")
    return catalogue(folder)


def test_an_invented_score_is_listed_checked_and_computed_without_code(tmp_path):
    assert check_table(OWN).lines() == ["harbour: no fault found; 1 worked vectors agree"]
    tables = own_tables(tmp_path)
    listed = list_scores(tables).set_index("key")
    assert listed.loc["harbour", "table"] == "site" and len(listed) == len(our_catalogue().keys) + 1
    runs = pd.DataFrame({"age_years": [50, 12], "lactate_mmol_l": [5.0, 1.0], "tide_m": [10.0, 3.0]})
    found = compute("harbour", runs, tables=tables, declared={"had_arrest": False})
    assert found["total"].tolist() == [1, -1] and found["table"].tolist() == ["site", "site"]
    assert found["eligible"].tolist() == ["yes", "no"] and found["predicted"].iloc[0] == 0.1
    high = compute("harbour", runs, tables=tables, declared={"had_arrest": False}, options={"edge": "high"})
    assert high["total"].tolist() == [3, -1] and high["class"].iloc[0] == "rough"
    assert [label for label, _ in option_sets("harbour", tables)] == ["defaults", "edge=high"]
    assert describe_score("harbour", tables).table == "site"
    assert usable_for_expectation("harbour", tables=tables).is_usable
    with pytest.raises(UsageError, match=r"SCORE\.UNKNOWN"):
        compute("harbour", runs)


def test_a_sites_table_replaces_ours_and_the_answer_says_so(tmp_path):
    """A site that has read the paper marks its lines verified; the gate then opens for its table only."""
    ours = our_catalogue().text("save")
    theirs = ours.replace('"from memory"', '"verified"').replace('"second-hand"', '"verified"')
    tables = own_tables(tmp_path, theirs, "save")
    frame = pd.DataFrame([our_catalogue().score("save").vectors[0].inputs])
    assert compute("save", frame, tables=tables)["table"].iloc[0] == "site"
    assert compute("save", frame)["table"].iloc[0] == "ours"
    assert usable_for_expectation("save", tables=tables).code == "verified"
    assert not usable_for_expectation("save").is_usable


def test_a_site_can_fill_a_reserved_score(tmp_path):
    text = OWN.replace('key = "harbour"', 'key = "hope"')
    found = compute("hope", pd.DataFrame({"tide_m": [1.0]}), tables=own_tables(tmp_path, text, "hope")).iloc[
        0
    ]
    assert (found["total_low"], found["total_high"], found["table"]) == (-1, 4, "site")
    assert found["missing"] == "lactate_mmol_l; had_arrest"


def test_a_wrong_table_of_a_site_is_refused_when_it_is_used(tmp_path):
    tables = own_tables(tmp_path, OWN.replace("range = [-1, 6]", "range = [0, 6]"))
    with pytest.raises(UsageError) as refused:
        compute("harbour", pd.DataFrame({"tide_m": [1.0]}), tables=tables)
    assert refused.value.code == "SCORE-FILE.RANGE" and "harbour" in refused.value.where
    assert compute("tips65", pd.DataFrame({"ph": [7.0]}), tables=tables)["total_low"].iloc[0] == 1


FAULTS = [
    ("form = 1", "form = 2", "FORM"),
    ("form = 1", "form = [", "TOML"),
    ('status = "implemented"', 'status = "implementd"', "WORD"),
    ('population_text = "Invented."', 'populaton_text = "Invented."', "UNKNOWN-KEY"),
    ("range = [-1, 6]", "range = [-1, 5]", "RANGE"),
    ("range = [-1, 6]", "range = [-1]", "TYPE"),
    ("{ below = 4, points = 0 }", "{ below = 3, points = 0 }", "GAP"),
    ("{ below = 4, points = 0 }", "{ at_most = 4, points = 0 }", "OVERLAP"),
    ("{ below = 4, points = 0 }", "{ below = 5, points = 0 }", "OVERLAP"),
    ("{ at_least = 4, points = 2 }", "{ above = 4, points = 2 }", "GAP"),
    ("{ at_least = 4, points = 2 }", "{ at_least = 4, at_most = 9, points = 2 }", "GAP"),
    ("{ at_least = 4, points = 2 }", '{ at_least = "4", points = 2 }', "TYPE"),
    ("{ at_least = 4, points = 2 }", "{ at_least = 4, above = 3, points = 2 }", "BOUND"),
    ("{ at_least = 4, points = 2 }", "{ at_least = 4, below = 1, points = 2 }", "BOUND"),
    ("{ at_least = 4, points = 2 }", '{ at_least = 4, unit = "stone", points = 2 }', "UNIT"),
    ("{ at_least = 4, points = 2 }", "{ is = true, points = 2 }", "CONDITION"),
    ("{ at_least = 4, points = 2 }", "{ at_least = 4, points = 2, colour = 1 }", "UNKNOWN-KEY"),
    ("{ at_least = 4, points = 2 }", "{ at_least = 4, points = 2.5 }", "RANGE"),
    ("yes = 3\nno = 0", "values = [{ is = true, points = 3 }]", "GAP"),
    ("yes = 3\nno = 0", "values = [{ is = 1, points = 3 }, { is = false, points = 0 }]", "CONDITION"),
    ("yes = 3\nno = 0", "yes = 3\nno = 0\npoints_per_unit = 1", "FORM"),
    ("yes = 3\nno = 0", "yes = 3\nno = 0\notherwise = 1", "FORM"),
    ("yes = 3\nno = 0", "yes = true\nno = 0", "TYPE"),
    ('input = "had_arrest"', 'input = "had_arest"', "INPUT"),
    ('key = "arrest"', 'key = "tide"', "TWICE"),
    ("at_most = 1\nprobability", "at_most = 0\nprobability", "CLASS"),
    ("at_most = 1\nprobability", "at_most = 2\nprobability", "CLASS"),
    ("probability = 0.1\nevidence", "probability = 10\nevidence", "PROBABILITY"),
    ('event = "death"', 'event = "none"', "OUTCOME"),
    (", low = 0, high = 20 }", " }", "FIELD"),
    ('field = "tide_m"', 'field = "age_weeks"', "INPUT"),
    ('{ field = "age_years", window', '{ field = "age_years", kind = "choice", window', "FIELD"),
    ('window = "pre_last"', 'window = "pre_first"', "WORD"),
    ('worst = "last"', 'worst = "least"', "WORD"),
    ('evidence = "verified"\ninput = "tide_m"', 'evidence = "certain"\ninput = "tide_m"', "WORD"),
    ('only_with = ["edge=high"]', 'only_with = ["edge=hihg"]', "CONVENTION"),
    ('default = "low"', 'default = "middle"', "CONVENTION"),
    ("total = 4\n", "total = 5\n", "VECTOR"),
    ("arrest = 3 }", "arrest = 2 }", "VECTOR"),
    ("arrest = 3 }", "arrst = 3 }", "VECTOR"),
    ('class = "rough"', 'class = "calm"', "VECTOR"),
    ("tide_m = 10.0, had", "had", "VECTOR"),
    ("tide_m = 10.0, had", "tide_m = 100.0, had", "VECTOR"),
    ('key = "harbour"', 'key = "Harbour"', "KEY"),
    ('text = "Nobody, nowhere"\n', "", "MISSING"),
]


@pytest.mark.parametrize(("old", "new", "code"), FAULTS)
def test_each_fault_has_its_code(old, new, code):
    assert old in OWN
    check = check_table(OWN.replace(old, new))
    assert f"SCORE-FILE.{code}" in {p.code for p in check.problems}, check.lines()
    assert not check.is_good


def test_all_faults_are_listed_at_once_and_the_refusal_counts_them():
    text = OWN.replace("form = 1", "form = 9").replace('worst = "last"', 'worst = "least"')
    assert len(check_table(text).problems) == 2
    with pytest.raises(UsageError, match="1 more"):
        catalogue_of(text).score("harbour")


def catalogue_of(text):
    return type(our_catalogue())([("harbour", text, "site")])


def test_a_file_name_that_differs_from_the_key_is_refused(tmp_path):
    with pytest.raises(UsageError) as refused:
        own_tables(tmp_path, OWN, "port").score("port")
    assert refused.value.code == "SCORE-FILE.KEY"


def test_a_reserved_table_must_say_what_is_missing():
    text = OWN.replace('status = "implemented"', 'status = "reserved"')
    assert [p.code for p in check_table(text).problems] == ["SCORE-FILE.RESERVED"]


def test_an_input_that_a_choice_removes_is_noticed():
    text = OWN.replace(
        'window = "run", worst = "none", kind',
        'window = "run", worst = "none", only_with = ["edge=low"], kind',
    )
    assert "SCORE-FILE.INPUT" in {p.code for p in check_table(text).problems}


def test_not_applicable_must_be_points_or_range():
    gate = 'not_applicable = [{ when = [{ input = "had_arrest", is = true }], points = "some" }]\n'
    text = OWN.replace('key = "tide"\n', 'key = "tide"\n' + gate)
    assert "SCORE-FILE.TYPE" in {p.code for p in check_table(text).problems}


def test_points_of_not_applicable_outside_the_bands_widen_an_unknown_gate():
    gate = 'not_applicable = [{ when = [{ input = "had_arrest", is = true }], points = 9 }]\n'
    tables = catalogue_of(OWN.replace('key = "tide"\n', 'key = "tide"\n' + gate))
    runs = pd.DataFrame(
        {"lactate_mmol_l": [1.0] * 3, "tide_m": [None] * 3, "had_arrest": [True, False, None]}
    )
    found = compute("harbour", runs, tables=tables)
    assert list(zip(found["total_low"], found["total_high"], strict=True)) == [(12, 12), (-1, 1), (-1, 12)]
    assert found["not_applicable"].tolist() == ["tide_m", "", ""]
    assert found["missing"].tolist() == ["", "tide_m", "tide_m; had_arrest"]

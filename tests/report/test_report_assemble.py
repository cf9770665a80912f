"""Section files, slots and what assemble refuses."""

import warnings

import pytest
from made_report import ANALYSES, FILES, made

from outcomes.analysis.result import Method, Result, tidy
from outcomes.errors import DisclosureRefused, OutcomesError, UsageError
from outcomes.report.assemble import Options, assemble, assemble_files
from outcomes.report.render import render
from outcomes.report.section_file import Source, read_section
from outcomes.report.watch import watched
from outcomes.study.answer import Answer, ColumnOf, FigureOf, RowOf, TableOf

COLUMNS = ["group", "events", "at_risk", "estimate"]
ROW = dict(zip(COLUMNS, ("a", 1, 12, 1 / 12), strict=True))
ONE = Result(tidy([ROW], COLUMNS), Method("m"))
SHAPE = TableOf(
    "Runs",
    "Kind",
    "one",
    (RowOf("a", "A", {"group": "a"}), RowOf("b", "B", {"group": "b"})),
    (
        ColumnOf("n", "Runs", "count", ("events",)),
        ColumnOf("share", "Share", "percent", ("estimate", "at_risk")),
    ),
)


def answer(**given: object) -> Answer:
    return Answer(**{"results": {"one": ONE}, "tables": {"runs": SHAPE}, **given})


def report_of(prose: str, front: str = "", given: Answer | None = None, **options: object):
    """A report of one section over one small table."""
    text = f'+++\ntitle = "Q"\nanalysis = "x"\ntables = ["runs"]\n{front}\n+++\n{prose}\n'
    files = [("000_one.md", text), ("report.toml", 'title = "T"\nreader = "R"\nversion = "1"\n')]
    chosen = Options(**{"profile": "internal", **options})
    return assemble_files("r", files, {"x": lambda cohort: given or answer()}, None, chosen)


def sentence(prose: str, **given: object) -> list[tuple[str, ...]]:
    blocks = report_of(prose, given=answer(**given)).sections[0].findings
    return [part for block in blocks for part in block.parts]


def test_slots_become_parts():
    assert sentence('*Now* {{ cell("runs", "a", "n") }} `x`.') == [
        ("emphasis", "Now"),
        ("text", " "),
        ("cell", "runs", "a", "n"),
        ("text", " "),
        ("code", "x"),
        ("text", "."),
    ]
    assert sentence('{{ plural("runs", "a", "n", "run was", "runs were") }}') == [("text", "run was")]
    assert sentence('{% if known("runs", "a", "n") %}yes{% endif %}') == [("text", "yes")]
    assert sentence('{% if not known("runs", "a", "share") %}few{% endif %}') == [("text", "few")]
    assert sentence('{% if not known("runs", "b", "n") %}none{% endif %}') == [("text", "none")]
    assert sentence('{{ table("runs") }} {{ section("one") }}') == [
        ("table", "runs"),
        ("text", " "),
        ("section", "one"),
    ]


def test_facts_decide_and_print_words_only():
    assert sentence('{% if fact("a") %}y{% endif %}', facts={"a": True}) == [("text", "y")]
    assert sentence('{% if fact("w") == "up" %}{{ fact("w") }}{% endif %}', facts={"w": "up"}) == [
        ("text", "up")
    ]
    with pytest.raises(UsageError, match="number in the fact"):
        sentence('{{ fact("w") }}', facts={"w": "12 runs"})
    with pytest.raises(UsageError, match="does not give"):
        sentence('{{ fact("other") }}')


def test_words_of_the_data_cannot_become_a_slot():
    foul = "<b> {{ cell('x') }} *a* \ue0000\ue001"
    assert sentence('{{ fact("w") }}', facts={"w": foul.replace("0", "")}) == [
        ("text", "<b> {{ cell('x') }} *a*")
    ]


@pytest.mark.parametrize(
    ("prose", "words"),
    [
        ('{{ cell("gone", "a", "n") }}', "does not show"),
        ('{{ cell("runs", "z", "n") }}', "does not have: z"),
        ('{{ figure("gone") }}', "points to a figure"),
        ("{{ unknown }}", "UndefinedError"),
        ("{{ cell.__class__ }}", "SecurityError|UndefinedError"),
        ("{% if %}", "TemplateSyntaxError"),
        ('*{{ cell("runs", "a", "n") }}*', "emphasises nothing"),
    ],
)
def test_slots_that_cannot_be_filled_are_refused(prose, words):
    with pytest.raises(UsageError, match=words):
        report_of(prose)


def test_blocks_are_split_before_slots_are_filled():
    prose = "One\ntwo.\n\n- a\n  b\n- c\n\n## Head\n\nCaution. Mind.\n\n```\nx  {{ y }}\n\nz\n```\n"
    text = f'+++\ntitle = "Q"\n+++\n{prose}'
    assert read_section("010_q.md", text).blocks == (
        Source("paragraph", "", "One\ntwo."),
        Source("item", "", "a\n  b\n"),
        Source("item", "", "c"),
        Source("heading", "", "Head"),
        Source("paragraph", "Caution", "Mind."),
        Source("verbatim", "", "x  {{ y }}\n\nz"),
    )


@pytest.mark.parametrize(
    ("name", "text", "words"),
    [
        ("one.md", '+++\ntitle = "Q"\n+++\n', "NNN_key"),
        ("010_one.md", "no front matter", "NNN_key"),
        ("010_one.md", "+++\ntitle = \n+++\n", "not TOML"),
        ("010_one.md", "+++\n+++\n\n", "NNN_key|title"),
        ("010_one.md", '+++\ntitle = "Q"\ncolour = "red"\n+++\n', "colour"),
        ("010_one.md", '+++\ntitle = "Q"\nkind = "pie"\n+++\n', "title or kind"),
        ("010_one.md", '+++\ntitle = "Q"\n+++\nOf 12 runs.', r"typed number \(12\)"),
        ("010_one.md", '+++\ntitle = "The 3 ends"\n+++\n', "typed number"),
        ("010_one.md", '+++\ntitle = "Q"\n[caption]\na = "n=5"\n+++\n', "typed number"),
        ("010_one.md", '+++\ntitle = "Q"\n+++\n\ue000', "private-use"),
    ],
)
def test_section_files_that_are_wrong_are_refused(name, text, words):
    with pytest.raises(UsageError, match=words):
        read_section(name, text)


def test_listed_numerals_and_free_pages_may_hold_digits():
    text = '+++\ntitle = "Q"\nnumerals = ["1,000 days"]\n+++\nPer 1,000 days.'
    assert read_section("010_q.md", text).blocks[0].text == "Per 1,000 days."
    assert read_section("010_q.md", '+++\ntitle = "Q 2"\n+++\n3', free_numbers=True).title == "Q 2"


@pytest.mark.parametrize("profile", ["shareable", "", "public"])
def test_any_profile_but_internal_is_refused(profile):
    with pytest.raises(DisclosureRefused, match="only an internal report"):
        made(profile=profile)
    with pytest.raises(DisclosureRefused):
        assemble("annual_audit", {}, None, Options())


def test_what_does_not_fit_is_refused():
    with pytest.raises(UsageError, match="unknown analysis"):
        assemble_files("r", sorted(FILES.items()), {}, "", Options("internal"))
    with pytest.raises(UsageError, match=r"report\.toml"):
        assemble_files("r", [], {}, "", Options("internal"))
    with pytest.raises(UsageError, match="two section files"):
        made(files={**FILES, "010_other.md": FILES["070_listed.md"]})
    with pytest.raises(UsageError, match="not in its answer"):
        report_of("x", given=Answer({"one": ONE}))
    with pytest.raises(UsageError, match="shown in two"):
        made(files={**FILES, "060_again.md": FILES["010_who.md"]})


def test_an_optional_table_may_be_missing():
    section = report_of("x", 'optional = ["runs"]', Answer({"one": ONE})).sections[0]
    assert section.tables == ()


def test_a_figure_needs_its_words_and_its_table():
    drawn = FigureOf("dots", "T", "runs")
    with pytest.raises(UsageError, match="does not describe"):
        report_of("x", 'figures = ["f"]', answer(figures={"f": drawn}))
    with pytest.raises(UsageError, match="no table"):
        report_of(
            "x",
            'figures = ["f"]\n[description]\nf = "d"',
            answer(figures={"f": FigureOf("dots", "T", "gone")}),
        )


def test_the_same_analysis_with_the_same_parameters_runs_once():
    runs = []

    def counted(cohort: object, day: int) -> Answer:
        runs.append(day)
        key = f"runs_{len(runs)}"
        return Answer({"one": ONE}, {key: SHAPE})

    front = '+++\ntitle = "Q"\nanalysis = "x"\n{}[parameters]\nday = {}\n+++\n'
    files = [
        ("000_a.md", front.format('tables = ["runs_1"]\n', 30)),
        ("010_b.md", front.format("", 30)),
        ("020_c.md", front.format('tables = ["runs_2"]\n', 90)),
        ("report.toml", FILES["report.toml"]),
    ]
    report = assemble_files("r", files, {"x": counted}, None, Options("internal"))
    assert runs == [30, 90]
    assert list(report.results) == ["x", "x 2"]
    chosen = Options("internal", parameters={"x": {"day": 7}})
    assemble_files("r", files[:1] + files[3:], {"x": counted_one(runs)}, None, chosen)
    assert runs == [30, 90, 7]


def counted_one(runs: list[int]):
    def run(cohort: object, day: int) -> Answer:
        runs.append(day)
        return Answer({"one": ONE}, {"runs_1": SHAPE})

    return run


class ConvergenceWarning(UserWarning):
    """Stands for a library's warning of the same name."""


def test_a_known_warning_becomes_a_caution_once():
    def noisy() -> Answer:
        warnings.warn("no luck with value 7.3", ConvergenceWarning, stacklevel=1)
        warnings.warn("again", ConvergenceWarning, stacklevel=1)
        return answer()

    assert [caution.code for caution in watched(noisy).cautions] == ["NOCONV"]


def test_an_unknown_warning_stops_the_report_without_its_text():
    def noisy() -> Answer:
        warnings.warn("secret 7.3", RuntimeWarning, stacklevel=1)
        return answer()

    with pytest.raises(OutcomesError, match="nobody has judged") as refused:
        watched(noisy)
    assert "7.3" not in str(refused.value)
    assert "RuntimeWarning" in str(refused.value)


@pytest.mark.parametrize(
    "line", ["/home/x/data.csv", "~/a", "C:\\data", "see ../x", "who@host", "http://x", 'read "/srv/a"']
)
def test_provenance_holds_no_path_or_address(line):
    with pytest.raises(ValueError, match="no path"):
        made(provenance={"Source": line})


def test_every_analysis_of_the_made_report_is_used():
    assert {s.split('analysis = "')[1].split('"')[0] for s in FILES.values() if "analysis = " in s} == set(
        ANALYSES
    )


def test_captions_and_descriptions_are_filled_and_hold_no_pointer():
    front = "[caption]\nruns = \"Of {{ cell('runs', 'a', 'n') }} run\""
    assert report_of("x", front).sections[0].tables[0].caption == "Of 1 run"
    with pytest.raises(UsageError, match="pointer in a caption"):
        report_of("x", "[caption]\nruns = \"{{ table('runs') }}\"")


def test_a_verbatim_block_is_printed_as_it_stands():
    blocks = report_of("```\n{{ a }}  *b*\n```").sections[0].findings
    assert [(b.kind, b.parts) for b in blocks] == [("verbatim", (("text", "{{ a }}  *b*"),))]


def test_a_page_needs_no_analysis_and_no_first_head():
    files = [("000_a.md", '+++\ntitle = "How to start"\nkind = "page"\n+++\nRun `outcomes`, 3 times.\n')]
    about = FILES["report.toml"] + "free_numbers = true\n"
    report = assemble_files("manual", [*files, ("report.toml", about)], {}, None, Options("internal"))
    assert report.sections[0].findings[0].head == ""
    assert "<code>outcomes</code>" in render(report)

"""From a folder of section files and a set of analyses to a finished report: hop seven, without HTML."""

from __future__ import annotations

import json
import tomllib
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

from outcomes import resources
from outcomes.errors import NotEstimable, UsageError
from outcomes.report.lay_out import cautions_of, lay_out_figure, lay_out_table, methods_of, used_results
from outcomes.report.model import Block, Figure, Part, Report, Section
from outcomes.report.prose import Prose
from outcomes.report.provenance import Given, provenance_lines
from outcomes.report.section_file import ASIDES, SectionFile, Source, read_section
from outcomes.report.stamp import stamp
from outcomes.report.watch import watched
from outcomes.study.answer import Answer
from outcomes.tables.table import Table, plain_words

Analysis = Callable[..., Answer]


@dataclass(frozen=True)
class Options:
    """profile: what may be shown; nothing chosen means the shareable one. title: replaces the report's own.
    parameters: replace those of the section files, by analysis. provenance: see provenance_lines."""

    profile: str = "shareable"
    title: str = ""
    parameters: Mapping[str, Mapping[str, Any]] = field(default_factory=dict)
    provenance: Given = field(default_factory=dict)


@dataclass(frozen=True)
class _Call:
    """One run of an analysis: its name in the report, and its answer or why there is none."""

    name: str
    answer: Answer | None
    refused: str = ""


def assemble(report_key: str, analyses: Mapping[str, Analysis], cohort: Any, options: Options) -> Report:
    """The report `reports/<report_key>/`, with its analyses run on the cohort.

    analyses: name in a section file → function of the cohort and the section's parameters as keywords. The
    same analysis with the same parameters runs once. An analysis that raises NotEstimable leaves its
    section with the reason. DisclosureRefused for a profile other than internal; UsageError for a section
    file that does not fit.
    """
    return assemble_files(report_key, resources.report_files(report_key), analyses, cohort, options)


def assemble_files(
    report_key: str,
    files: list[tuple[str, str]],
    analyses: Mapping[str, Analysis],
    cohort: Any,
    options: Options,
) -> Report:
    """As `assemble`, from the files (name, text) of a report's folder."""
    stamp(options.profile)
    about, sections = _read(files)
    calls = _run(sections, analyses, cohort, options)
    tables = _tables(sections, calls)
    keys = {
        "table": set(tables),
        "figure": _figure_keys(sections, calls),
        "section": {s.key for s in sections},
    }
    finished = []
    for number, section in enumerate(sections):
        call = calls.get(section.key)
        facts = call.answer.facts if call and call.answer else {}
        prose = Prose(section.key, tables, facts, keys)
        finished.append(_section(section, number, call, tables, prose))
    used = {call.name: call.answer for call in calls.values() if call.answer}
    return Report(
        report_key, str(about["version"]), plain_words(options.title) or about["title"], about["reader"],
        options.profile, tuple(finished),
        {name: answer.results for name, answer in used.items()},
        {key: runs for answer in used.values() for key, runs in answer.lists.items()},
        provenance_lines(options.provenance),
    )  # fmt: skip


def _read(files: list[tuple[str, str]]) -> tuple[dict[str, Any], list[SectionFile]]:
    texts = dict(files)
    if "report.toml" not in texts:
        raise UsageError("REPORT.FOLDER", "the report has no report.toml")
    about = tomllib.loads(texts.pop("report.toml"))
    free = bool(about.get("free_numbers", False))
    sections = [read_section(name, text, free_numbers=free) for name, text in texts.items()]
    sections.sort(key=lambda s: (s.order, s.key))
    if len({s.key for s in sections}) != len(sections) or len({s.order for s in sections}) != len(sections):
        raise UsageError("REPORT.FOLDER", "two section files share a key or a place in the order")
    return about, sections


def _run(
    sections: list[SectionFile], analyses: Mapping[str, Analysis], cohort: Any, options: Options
) -> dict[str, _Call]:
    """Section key → call; sections that ask for the same analysis with the same parameters share one."""
    done: dict[str, _Call] = {}
    out: dict[str, _Call] = {}
    for section in sections:
        if not section.analysis:
            continue
        if section.analysis not in analyses:
            raise UsageError(
                "REPORT.ANALYSIS",
                f"the section {section.key} asks for an unknown analysis: {section.analysis}",
            )
        parameters = {**section.parameters, **options.parameters.get(section.analysis, {})}
        signature = f"{section.analysis} {json.dumps(parameters, sort_keys=True)}"
        if signature not in done:
            taken = [call.name for call in done.values()]
            count = sum(name.partition(" ")[0] == section.analysis for name in taken)
            name = section.analysis if not count else f"{section.analysis} {count + 1}"
            done[signature] = _call(name, analyses[section.analysis], cohort, parameters)
        out[section.key] = done[signature]
    return out


def _call(name: str, analysis: Analysis, cohort: Any, parameters: Mapping[str, Any]) -> _Call:
    try:
        return _Call(name, watched(lambda: analysis(cohort, **parameters)))
    except NotEstimable as reason:
        return _Call(name, None, reason.what)


def _tables(sections: list[SectionFile], calls: Mapping[str, _Call]) -> dict[str, Table]:
    """Every table that is shown, by key. Captions are filled by a section's prose later on."""
    out: dict[str, Table] = {}
    for section in sections:
        for key in _present(section, calls.get(section.key), section.tables, "tables"):
            if key in out:
                raise UsageError("REPORT.TABLE-TWICE", f"the table {key} is shown in two sections")
            answer = calls[section.key].answer
            assert answer is not None
            out[key] = lay_out_table(key, answer.tables[key], answer.results)
    return out


def _figure_keys(sections: list[SectionFile], calls: Mapping[str, _Call]) -> set[str]:
    found = [k for s in sections for k in _present(s, calls.get(s.key), s.figures, "figures")]
    if len(set(found)) != len(found):
        raise UsageError("REPORT.FIGURE-TWICE", "a figure is shown in two sections")
    return set(found)


def _present(section: SectionFile, call: _Call | None, keys: tuple[str, ...], kind: str) -> tuple[str, ...]:
    """Those of the keys that the section's answer gives. Only those listed as optional may be missing."""
    if call is not None and call.answer is None:
        return ()
    given: Mapping[str, object] = {} if call is None or call.answer is None else getattr(call.answer, kind)
    for key in keys:
        if key not in given and key not in section.optional:
            raise UsageError(
                "REPORT.NOT-GIVEN", f"the section {section.key} lists {key}, which is not in its answer"
            )
    return tuple(key for key in keys if key in given)


def _section(
    section: SectionFile, number: int, call: _Call | None, tables: Mapping[str, Table], prose: Prose
) -> Section:
    title = prose.words(section.title)
    if call is not None and call.answer is None:
        return Section(section.key, number, section.kind, title, refused=call.refused)
    blocks = [filled for source in section.blocks if (filled := _block(source, prose)).parts]
    findings = tuple(b for b in _with_first_head(blocks, section.kind) if b.head not in ASIDES)
    asides = tuple(b for b in blocks if b.head in ASIDES)
    if call is None or call.answer is None:
        return Section(section.key, number, section.kind, title, findings, asides=asides)
    shown = _present(section, call, section.tables, "tables")
    drawn = _present(section, call, section.figures, "figures")
    used = used_results(call.answer, shown, drawn)
    return Section(
        section.key, number, section.kind, title, findings,
        tuple(_captioned(tables[key], section, prose) for key in shown),
        tuple(_figure(key, section, call, tables, prose) for key in drawn),
        asides, cautions_of(call.answer, used), methods_of(call.answer, used),
    )  # fmt: skip


def _block(source: Source, prose: Prose) -> Block:
    if source.kind == "verbatim":
        return Block("verbatim", "", (("text", source.text),))
    return Block(source.kind, source.head, prose.parts(source.text))


def _with_first_head(blocks: list[Block], kind: str) -> list[Block]:
    """The first paragraph that is no aside is headed "Finding." in a section that answers a question."""
    if kind != "answer":
        return blocks
    for place, block in enumerate(blocks):
        if block.kind == "paragraph" and not block.head:
            return [*blocks[:place], Block("paragraph", "Finding", block.parts), *blocks[place + 1 :]]
    return blocks


def _captioned(table: Table, section: SectionFile, prose: Prose) -> Table:
    if table.key not in section.caption:
        return table
    caption = prose.words(section.caption[table.key])
    return Table(table.key, caption, table.stub, table.columns, table.rows, table.notes, table.interval_name)


def _figure(key: str, section: SectionFile, call: _Call, tables: Mapping[str, Table], prose: Prose) -> Figure:
    assert call.answer is not None
    recipe = call.answer.figures[key]
    if recipe.table not in tables:
        raise UsageError(
            "REPORT.FIGURE-TABLE", f"the figure {key} has no table in the report: {recipe.table}"
        )
    if key not in section.description:
        raise UsageError(
            "REPORT.FIGURE-WORDS", f"the section {section.key} does not describe its figure {key}"
        )
    caption: tuple[Part, ...] = prose.parts(section.caption.get(key, "")) or (("text", f"{recipe.title}."),)
    return lay_out_figure(key, recipe, call.name, caption, prose.words(section.description[key]))

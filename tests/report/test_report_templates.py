"""What may stand in our templates, style sheet and section files."""

import re
from pathlib import Path

import pytest

from outcomes import resources
from outcomes.report.section_file import SectionFile, read_section

TEMPLATES = dict(resources.report_files("templates"))
MARKUP = {n: t for n, t in TEMPLATES.items() if n.endswith(".j2")}
ROOT = resources.shipped("reports")
SECTIONS = sorted(p for p in ROOT.rglob("*.md"))
PACKAGE = Path(resources.__file__).parent
CODE = [
    path for package in ("report", "figures", "tables") for path in sorted((PACKAGE / package).glob("*.py"))
]
BANNED = re.compile(
    r"\bsignifican|\btrend\b|\bproved?\b|\bsafe(?:ly|ty)?\b|\bbest\b|\bworst\b|±|\bbaseline\b|survival rate|"
    r"\bred\b|\bamber\b|\bdashboard\b|\b1 in \d",
    re.IGNORECASE,
)


@pytest.mark.parametrize("name", sorted(MARKUP))
def test_attributes_are_quoted_and_nothing_is_declared_safe(name):
    text = MARKUP[name]
    assert not re.search(r"\|\s*safe|autoescape|Markup", text)
    bare = re.sub(r"\{\{.*?\}\}|\{%.*?%\}", "X", text, flags=re.DOTALL)
    for tag in re.findall(r"<[a-zA-Z][^>]*>", bare):
        assert not re.search(r"=\s*[^\s\"]", re.sub(r"\"[^\"]*\"", '""', tag)), tag
        assert not re.search(r"\s(on\w+|style)\s*=", tag), tag


def test_only_our_own_writers_make_markup():
    makers = {p.name for p in CODE if re.search(r"\bMarkup\(", p.read_text("utf-8"))}
    assert makers == {"page.py", "render.py", "html.py"}


def test_no_number_is_rounded_outside_the_formatting_module():
    for path in CODE:
        if path.name != "format.py":
            assert not re.search(r"(?<![\w.])round\(|:\.\d+[fge%]|:g\}|%\.\d", path.read_text("utf-8")), path


def test_the_style_sheet_asks_for_nothing_and_uses_readable_colours():
    style = TEMPLATES["style.css"]
    assert not re.search(r"url\(|@import|@font-face|expression|http", style)
    colours = {c.lower() for c in re.findall(r"#[0-9a-fA-F]{6}\b", style)}
    assert all(contrast(colour) >= 4.5 for colour in colours - {"#ffffff"})
    assert "prefers-color-scheme" not in style


def contrast(colour: str) -> float:
    """Contrast with white by the WCAG formula.

    >>> contrast("#000000")
    21.0
    """
    parts = [int(colour[i : i + 2], 16) / 255 for i in (1, 3, 5)]
    red, green, blue = (p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts)
    return 1.05 / (0.2126 * red + 0.7152 * green + 0.0722 * blue + 0.05)


def test_contrast_formula_on_values_of_the_standard():
    """WCAG 2: #767676 is the lightest grey that reaches 4.5 to 1 on white; #777777 fails."""
    assert contrast("#767676") >= 4.5 > contrast("#777777")


@pytest.mark.parametrize("path", SECTIONS, ids=[str(p.relative_to(ROOT)) for p in SECTIONS])
def test_section_files_can_be_read_and_use_no_banned_word(path):
    folder = path.parent.name
    section = read_section(path.name, path.read_text("utf-8"), free_numbers=folder == "manual")
    if folder != "manual":
        words = " ".join([section.title, *(block.text for block in section.blocks)])
        assert not BANNED.search(re.sub(r"\{\{.*?\}\}|\{%.*?%\}", "", words))


@pytest.mark.parametrize("name", sorted(MARKUP))
def test_templates_use_no_banned_word(name):
    assert not BANNED.search(re.sub(r"\{\{.*?\}\}|\{%.*?%\}|<[^>]+>", " ", MARKUP[name], flags=re.DOTALL))


FOLDERS = sorted({path.parent for path in SECTIONS if path.parent.name != "manual"})
SLOT = re.compile(r"\{\{.*?\}\}")


def sections_of(folder: Path) -> list[SectionFile]:
    return [read_section(path.name, path.read_text("utf-8")) for path in sorted(folder.glob("*.md"))]


@pytest.mark.parametrize("folder", FOLDERS, ids=[f.name for f in FOLDERS])
def test_a_report_opens_with_its_summary_and_says_how_it_was_made(folder):
    sections = sections_of(folder)
    assert (sections[0].order, sections[0].key, sections[0].kind) == (0, "summary", "answer")
    kinds = [section.kind for section in sections]
    for needed in ("methods", "references", "provenance"):
        assert kinds.count(needed) == 1
    assert all(section.title.endswith("?") for section in sections if section.kind == "answer")


@pytest.mark.parametrize("folder", FOLDERS, ids=[f.name for f in FOLDERS])
def test_summaries_and_sentences_are_short(folder):
    sections = sections_of(folder)
    findings = [b for b in sections[0].blocks if b.head == "" and b.kind in ("paragraph", "item")]
    assert len(findings) <= 7
    for section in sections:
        for block in section.blocks:
            text = re.sub(r"\{%.*?%\}", "", SLOT.sub("X", block.text))
            for sentence in re.split(r"(?<=[.?:;])\s+", text):
                assert len(sentence.split()) <= 40, sentence

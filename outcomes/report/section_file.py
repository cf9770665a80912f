"""A section file: TOML between two lines of +++, then prose in blocks.

A block is what stands between blank lines. Blocks are split before any slot is filled, so data can never
make a new one. A block that fills to nothing is left out. Kinds of block:

    plain text          a paragraph; "Caution. …", "Method. …" and "Note. …" go below tables and figures
    - text              an item of a list (one line each, further lines indented)
    ## text             a heading within the section
    ```                 verbatim lines up to the next ```

In a paragraph *words* are emphasised and `words` are code. Digits may not be typed into prose: a number
comes out of a cell. What must be typed (a unit such as 1,000 support-days) is listed in `numerals`.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from outcomes.errors import UsageError
from outcomes.tables.table import check_key

KINDS = ("answer", "lists", "methods", "references", "provenance", "page")
ASIDES = ("Caution", "Method", "Note")
_NAME = re.compile(r"(\d{3})_([a-z0-9_]+)\.md")
_FRONT = re.compile(r"\A\+\+\+\n(.*?)\n\+\+\+\n(.*)\Z", re.DOTALL)
_SLOT = re.compile(r"\{\{.*?\}\}|\{%.*?%\}|\{#.*?#\}", re.DOTALL)
_HEAD = re.compile(rf"({'|'.join(ASIDES)})\.\s+")
_PRIVATE = re.compile("[\ue000-\uf8ff]")


@dataclass(frozen=True)
class Source:
    """One block of prose before its slots are filled."""

    kind: str
    head: str
    text: str


@dataclass(frozen=True)
class SectionFile:
    key: str
    order: int
    title: str
    kind: str = "answer"
    analysis: str = ""
    tables: tuple[str, ...] = ()
    figures: tuple[str, ...] = ()
    optional: tuple[str, ...] = ()
    parameters: Mapping[str, Any] = field(default_factory=dict)
    caption: Mapping[str, str] = field(default_factory=dict)
    description: Mapping[str, str] = field(default_factory=dict)
    blocks: tuple[Source, ...] = ()


_ALLOWED = {
    "title", "kind", "analysis", "tables", "figures", "optional", "parameters", "caption", "description",
    "numerals",
}  # fmt: skip


def read_section(name: str, text: str, *, free_numbers: bool = False) -> SectionFile:
    """The section of one file `NNN_key.md`. UsageError says what is wrong with it."""
    named, parted = _NAME.fullmatch(name), _FRONT.match(text)
    if named is None or parted is None:
        raise _wrong(name, "is not NNN_key.md with TOML between two lines of +++")
    try:
        front = tomllib.loads(parted[1])
    except tomllib.TOMLDecodeError:
        raise _wrong(name, "has front matter that is not TOML") from None
    unknown = sorted(set(front) - _ALLOWED)
    if unknown or "title" not in front or front.get("kind", "answer") not in KINDS:
        raise _wrong(name, f"has an unknown or missing entry: {', '.join(unknown) or 'title or kind'}")
    prose = parted[2]
    if _PRIVATE.search(text):
        raise _wrong(name, "holds a private-use sign")
    if not free_numbers:
        _no_digits(name, [prose, front["title"], *_texts(front)], front.get("numerals", []))
    lists = {entry: tuple(front.pop(entry, ())) for entry in ("tables", "figures", "optional")}
    entries: dict[str, Any] = {**front, **lists}
    entries.pop("numerals", None)
    return SectionFile(check_key(named[2]), int(named[1]), blocks=_blocks(prose), **entries)


def _texts(front: Mapping[str, Any]) -> list[str]:
    return [text for entry in ("caption", "description") for text in front.get(entry, {}).values()]


def _no_digits(name: str, texts: list[str], numerals: list[str]) -> None:
    for text in texts:
        bare = _SLOT.sub("", text)
        for allowed in sorted(numerals, key=len, reverse=True):
            bare = bare.replace(allowed, "")
        typed = re.search(r"\S*\d\S*", bare)
        if typed:
            raise _wrong(name, f"has a typed number ({typed[0]}): name a cell, or list it in numerals")


def _wrong(name: str, what: str) -> UsageError:
    return UsageError(
        "REPORT.SECTION-FILE", f"the section file {name} {what}", todo="correct the section file"
    )


def _blocks(prose: str) -> tuple[Source, ...]:
    """Verbatim parts are every second piece between lines of ```; the rest is split at blank lines."""
    out: list[Source] = []
    for place, piece in enumerate(re.split(r"^```\n?", prose, flags=re.MULTILINE)):
        if place % 2:
            out.append(Source("verbatim", "", piece.rstrip("\n")))
            continue
        for block in re.split(r"\n\s*\n", piece):
            out += _block(block.strip())
    return tuple(out)


def _block(text: str) -> list[Source]:
    if not text:
        return []
    if text.startswith("## "):
        return [Source("heading", "", text[3:])]
    if text.startswith("- "):
        return [Source("item", "", item) for item in re.split(r"^- ", text, flags=re.MULTILINE) if item]
    head = _HEAD.match(text)
    if head:
        return [Source("paragraph", head[1], text[head.end() :])]
    return [Source("paragraph", "", text)]

"""Writing the draft as TOML: values, comments and tables that a person reads and corrects."""

from __future__ import annotations

import json
import re
import textwrap
from collections.abc import Mapping, Sequence

_WIDTH = 110
_CONTROL = re.compile(r"[\x00-\x1f\x7f-\x9f\u2028\u2029\u202a-\u202e\u2066-\u2069]")


def quoted(value: object) -> str:
    """A value as TOML on one line. A basic string of TOML is a JSON string but for DEL, which it must escape."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, int):
        return str(value)
    if isinstance(value, Mapping):
        return (
            "{ " + ", ".join(f"{quoted(str(k))} = {quoted(v)}" for k, v in value.items()) + " }"
            if value
            else "{}"
        )
    if isinstance(value, list | tuple):
        return "[" + ", ".join(quoted(v) for v in value) + "]"
    text = json.dumps(str(value), ensure_ascii=False)
    return _CONTROL.sub(lambda m: f"\\u{ord(m[0]):04x}", text)


def comment(words: str) -> list[str]:
    """Comment lines; nothing in a header can end one early.

    >>> comment("a\\nb")
    ['# a b']
    """
    plain = " ".join(_CONTROL.sub(" ", words).split())
    return [
        f"# {line}"
        for line in textwrap.wrap(plain, _WIDTH - 2, break_long_words=False, break_on_hyphens=False)
    ]


def entry(key: str, value: object) -> list[str]:
    """key = value; a long list takes several lines."""
    line = f"{key} = {quoted(value)}"
    if len(line) <= _WIDTH or not isinstance(value, list | tuple):
        return [line]
    rows, row = [], ""
    for item in value:
        piece = f"{quoted(item)},"
        if row and len(row) + len(piece) > _WIDTH - 3:
            rows.append(row)
            row = piece
        else:
            row = f"{row} {piece}" if row else piece
    return [f"{key} = [", *(f"  {r}" for r in (*rows, row)), "]"]


def column_lines(
    header: str, values: Mapping[str, object], comments: Mapping[str, Sequence[str]]
) -> list[str]:
    """One [[file.sheet.column]]. More than three codes become a table below it, a line each."""
    lines = ["", "[[file.sheet.column]]", f"header = {quoted(header)}"]
    below: list[str] = []
    for key, value in values.items():
        said = [line for words in comments.get(key, ()) for line in comment(words)]
        if key == "codes" and isinstance(value, Mapping) and len(value) > 3:
            below = ["[file.sheet.column.codes]", *(f"{quoted(k)} = {quoted(v)}" for k, v in value.items())]
            below = [*said, *below]
        else:
            lines += [*said, *entry(key, value)]
    return [*lines, *below]

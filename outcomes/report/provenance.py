"""Where the numbers come from: lines given by the command line, checked for what must not be printed."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from outcomes.tables.table import plain_words

_PATH = re.compile(r"(?:^|[\s='\"(])(?:~?/[^\s/]|[A-Za-z]:[\\/]|\\\\|\.{1,2}/)|\w@\w|://")

Given = Mapping[str, str | int | Sequence[str]]


def provenance_lines(given: Given) -> dict[str, tuple[str, ...]]:
    """Label → lines, in the order given. ValueError for a path, an address or a mailbox.

    >>> provenance_lines({"Data cut-off": "end of 2023", "Import batches": ["1: 96 rows", "2: 4 rows"]})
    {'Data cut-off': ('end of 2023',), 'Import batches': ('1: 96 rows', '2: 4 rows')}
    """
    out = {}
    for label, value in given.items():
        lines = [str(value)] if isinstance(value, str | int) else [str(line) for line in value]
        if any(_PATH.search(line) for line in lines):
            raise ValueError(f"provenance, {label}: no path, address or mailbox may be printed")
        out[plain_words(label)] = tuple(plain_words(line) for line in lines)
    return out

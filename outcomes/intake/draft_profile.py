"""What the distribution of a column shows, without any value of a cell: kinds of cells, quartiles, codes, date shapes."""

from __future__ import annotations

import datetime as dt
import re
from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field

import numpy as np

from outcomes.findings import shape_of
from outcomes.intake.draft_codes import MISSING
from outcomes.intake.draft_moment import DATE, TIME, Pattern, pattern_of
from outcomes.intake.draft_number import NUMBER, Marks, marks_of, number_of
from outcomes.intake.reading.grid import Cell, ErrorCell, Number

# What a draft may show of the cells: distinct codes if they are few, short and frequent; quartiles of enough values.
MOST_CODES, LONGEST_CODE, FEWEST_SEEN, FEWEST_VALUES = 30, 24, 5, 10
_SCAN = re.compile(
    r"[0-9]{5}|\S@\S|[0-9]{1,4}[-./][0-9]{1,2}[-./][0-9]{1,4}"
    r"|\b(?:[Dd]r|[Mm]rs?|[Mm]s|[Mm]iss|[Pp]rof|[Dd]ipl|[Hh]err|[Ff]rau|[Ss]ir|[Dd]ame)\b\.? *[A-ZÄÖÜ]\w"
)
_SPLIT = re.compile(r"[0-9]{1,4} ?/ ?[0-9]{1,4}")
_MOST = 0.9


@dataclass
class Profile:
    """What one column looks like.

    kind       'empty', 'moment', 'time', 'number', 'split' (two whole numbers with / between) or 'text'
    n_filled   cells that hold something; missing words count as filled
    n_distinct different texts among them
    missing    words of MISSING that stand in the column
    others     shapes of cells that are not of this kind, with counts
    codes      code -> count, only those that may be shown, joined where they differ by capitals
    hidden     why no code may be shown, '' if they may; folds: some differ by capitals only
    rare       shapes of codes seen fewer than five times, with counts
    quartiles  of at least ten numbers, exact; `quartile_words` rounds them. parts: the same for both parts of a split
    """

    n: int = 0
    n_filled: int = 0
    n_distinct: int = 0
    kind: str = "empty"
    missing: tuple[str, ...] = ()
    others: tuple[str, ...] = ()
    codes: dict[str, int] = field(default_factory=dict)
    rare: tuple[str, ...] = ()
    folds: bool = False
    hidden: str = ""
    marks: Marks = field(default_factory=Marks)
    quartiles: tuple[float, float, float] | None = None
    n_numbers: int = 0
    parts: tuple[tuple[float, float, float] | None, ...] = ()
    pattern: Pattern | None = None
    n_words: float = 0.0
    is_identifying: bool = False

    @property
    def n_blank(self) -> int:
        return self.n - self.n_filled

    @property
    def distinct_share(self) -> float:
        return self.n_distinct / self.n_filled if self.n_filled else 0.0


def cell_word(cell: Cell) -> str:
    """A cell as the draft compares it: trimmed, '' for nothing."""
    if cell is None or isinstance(cell, ErrorCell):
        return ""
    if isinstance(cell, bool):
        return "TRUE" if cell else "FALSE"
    if isinstance(cell, (dt.date, dt.time)):
        return cell.isoformat()
    return cell.text if isinstance(cell, Number) else cell.strip()


def profile(cells: Sequence[Cell]) -> Profile:
    """The profile of one column. Typed numbers and dates need no marks and no pattern; those go by the texts alone."""
    counts = Counter(word for word in map(cell_word, cells) if word)
    made = Profile(n=len(cells), n_filled=counts.total(), n_distinct=len(counts))
    made.missing = tuple(sorted(counts.keys() & set(MISSING)))
    values = {word: n for word, n in counts.items() if word not in MISSING}
    total = sum(values.values())
    if total:
        typed = Counter(cell_word(c) for c in cells if isinstance(c, (dt.date, Number)))
        made.kind = _kind(values, total, {cell_word(c) for c in cells if isinstance(c, dt.date)})
        _look_closer(made, values, typed)
        made.n_words = sum(n * len(word.split()) for word, n in values.items()) / total
        made.is_identifying = _share(values, total, lambda w: bool(re.search(r"[0-9]{5}|\S@\S", w))) >= _MOST
    _codes(made, counts)
    return made


def _share(values: dict[str, int], total: int, test: Callable[[str], object]) -> float:
    return sum(n for word, n in values.items() if test(word)) / total


def _kind(values: dict[str, int], total: int, dates: set[str]) -> str:
    kinds: tuple[tuple[str, Callable[[str], object]], ...] = (
        ("moment", lambda w: w in dates or DATE.fullmatch(w)),
        ("time", TIME.fullmatch),
        ("split", _SPLIT.fullmatch),
        ("number", NUMBER.fullmatch),
    )
    return next((kind for kind, test in kinds if _share(values, total, test) >= _MOST), "text")


def _look_closer(made: Profile, values: dict[str, int], typed: Counter[str]) -> None:
    test = {"moment": DATE, "time": TIME, "split": _SPLIT, "number": NUMBER}.get(made.kind)
    if test is None:
        return
    fitting = {w: n for w, n in values.items() if test.fullmatch(w)}
    made.others = _shapes((w, n) for w, n in values.items() if w not in fitting and w not in typed)
    written = {w: n - typed[w] for w, n in fitting.items() if n > typed[w]}
    if made.kind == "moment" and written:
        made.pattern = pattern_of(written)
    elif made.kind == "number":
        made.marks = marks_of(written)
        numbers = [
            (number_of(w, made.marks if w in written else Marks(".")), n) for w, n in sorted(fitting.items())
        ]
        made.n_numbers = sum(n for v, n in numbers if v is not None)
        made.quartiles = _quartiles(numbers)
    elif made.kind == "split":
        made.n_numbers = sum(fitting.values())
        made.parts = tuple(
            _quartiles((float(w.split("/")[i]), n) for w, n in sorted(fitting.items())) for i in (0, 1)
        )


def _quartiles(numbers: Iterable[tuple[float | None, int]]) -> tuple[float, float, float] | None:
    values = [v for v, n in numbers if v is not None for _ in range(n)]
    if len(values) < FEWEST_VALUES:
        return None
    low, middle, high = np.quantile(values, [0.25, 0.5, 0.75])
    return float(low), float(middle), float(high)


def quartile_words(quartiles: tuple[float, float, float]) -> str:
    """Rounded to two significant digits, so that no single value can be read off.

    >>> quartile_words((24.3, 41.26, 67.0))
    'median about 41, half of the values between 24 and 67'
    """
    low, middle, high = (f"{float(f'{q:.2g}'):.10g}" for q in quartiles)
    return f"median about {middle}, half of the values between {low} and {high}"


def caught(text: str) -> bool:
    """A text that may name a person: five digits in a row, an e-mail address, a date, a title before a name."""
    return bool(_SCAN.search(text))


def _why_hidden(made: Profile, counts: Counter[str]) -> str:
    """Why no code of the column may be shown, '' if they may."""
    if not counts:
        return "the column is empty"
    if any(caught(code) for code in counts):
        return "some look as if they named a person, a date or a number"
    if made.n_distinct > MOST_CODES or (made.n_distinct > 12 and made.distinct_share >= 0.2):
        return "they are too many"
    return f"some are longer than {LONGEST_CODE} characters" if max(map(len, counts)) > LONGEST_CODE else ""


def _codes(made: Profile, counts: Counter[str]) -> None:
    """Codes may be shown only if there are few, short, frequent ones and none looks like a person's."""
    made.hidden = _why_hidden(made, counts)
    if made.hidden:
        return
    groups: dict[str, Counter[str]] = {}
    for word, n in counts.items():
        groups.setdefault(word.lower(), Counter())[word] = n
    made.folds = any(len(spellings) > 1 for spellings in groups.values())
    rare = []
    for folded, spellings in sorted(groups.items()):
        commonest = max(spellings, key=lambda w: (spellings[w], w))
        if spellings.total() >= FEWEST_SEEN or commonest in MISSING:
            often = spellings[commonest] >= FEWEST_SEEN or commonest in MISSING
            made.codes[commonest if often else folded] = spellings.total()
        else:
            rare.append((commonest, spellings.total()))
    made.rare = _shapes(rare)


def _shapes(words: Iterable[tuple[str, int]], most: int = 12) -> tuple[str, ...]:
    """Counts and shapes, the commonest first; '3 x <9.9' stands for all cells of that shape."""
    shapes: Counter[str] = Counter()
    for word, n in words:
        shapes[shape_of(word)] += n
    listed = sorted(shapes.items(), key=lambda item: (-item[1], item[0]))
    return tuple(f"{n} x {shape}" for shape, n in listed[:most]) + (
        (f"and {len(listed) - most} more shapes",) if len(listed) > most else ()
    )

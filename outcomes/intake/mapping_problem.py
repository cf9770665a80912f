"""Reading TOML tables strictly: each wrong, missing or unknown key is collected with its place."""

from __future__ import annotations

import re
from collections.abc import Sequence
from datetime import date
from typing import Any

from outcomes.errors import UsageError

_NOTHING = object()


class Problems:
    """Mistakes of one mapping file, in the order in which they were met."""

    def __init__(self) -> None:
        self.lines: list[str] = []
        self.start_missing = False

    def add(self, place: str, rule: str) -> None:
        self.lines.append(f"{place}: {rule}")

    def warn_start_missing(self) -> None:
        """A batch of late follow-up has no start column; its runs must then be known already."""
        self.start_missing = True

    def raise_if_any(self) -> None:
        if self.lines:
            shown = self.lines[:40] + ([f"and {len(self.lines) - 40} more"] if len(self.lines) > 40 else [])
            raise UsageError(
                "MAPPING.INVALID",
                f"{len(self.lines)} mistakes in the mapping file",
                where="\n         ".join(shown),
                todo="correct them; `outcomes describe` lists fields, units and codes",
            )


class Table:
    """One TOML table; every key must be asked for before `done`, so that unknown keys are found."""

    def __init__(self, raw: Any, place: str, problems: Problems) -> None:
        self.problems = problems
        self.place = place
        self.asked: set[str] = set()
        if not isinstance(raw, dict):
            problems.add(place, "a table is needed here")
            raw = {}
        self.raw: dict[str, Any] = raw

    def problem(self, key: str, rule: str) -> None:
        self.problems.add(f"{self.place}.{key}", rule)

    def has(self, key: str) -> bool:
        return key in self.raw

    def _get(self, key: str, default: Any, kind: type, word: str) -> Any:
        self.asked.add(key)
        value = self.raw.get(key, _NOTHING)
        if value is _NOTHING:
            if default is _NOTHING:
                self.problem(key, "is missing")
                return kind()
            return default
        if not isinstance(value, kind) or (kind is int and isinstance(value, bool)):
            self.problem(key, f"must be {word}")
            return kind()
        return value

    def text(self, key: str, default: Any = _NOTHING) -> str:
        return str(self._get(key, default, str, "a text"))

    def flag(self, key: str, default: bool) -> bool:
        return bool(self._get(key, default, bool, "true or false"))

    def integer(self, key: str, default: Any = _NOTHING, *, low: int = 0, high: int = 2**31) -> int:
        value = int(self._get(key, default, int, "a whole number"))
        if key in self.raw and not low <= value <= high:
            self.problem(key, f"must lie between {low} and {high}")
        return value

    def number(self, key: str) -> float:
        value = self.raw.get(key)
        if isinstance(value, int) and not isinstance(value, bool):
            self.asked.add(key)
            return float(value)
        return float(self._get(key, _NOTHING, float, "a number"))

    def day(self, key: str) -> date:
        self.asked.add(key)
        value = self.raw.get(key)
        if type(value) is not date:
            self.problem(key, "must be a date such as 2024-03-31, without quotes")
            return date(2000, 1, 1)
        return value

    def choice(self, key: str, allowed: Sequence[str], default: Any = _NOTHING) -> str:
        value = self.text(key, default)
        if value not in allowed and (key in self.raw or default is not _NOTHING):
            self.problem(key, "must be one of " + ", ".join(repr(a) for a in allowed))
        return value

    def pattern(self, key: str, form: re.Pattern[str]) -> str:
        value = self.text(key)
        if key in self.raw and not form.fullmatch(value):
            self.problem(key, f"must have the form {form.pattern}")
        return value

    def texts(self, key: str, default: Any = _NOTHING) -> tuple[str, ...]:
        values = self._get(key, default, list, "a list of texts") if key in self.raw else self._get(key, default, tuple, "")
        if not all(isinstance(v, str) for v in values):
            self.problem(key, "must be a list of texts")
            return ()
        return tuple(values)

    def words(self, key: str) -> dict[str, str]:
        values = self._get(key, {}, dict, "a table of texts")
        if not all(isinstance(v, str) for v in values.values()):
            self.problem(key, "every value must be a text")
            return {}
        return dict(values)

    def table(self, key: str) -> Table:
        self.asked.add(key)
        return Table(self.raw.get(key, {}), f"{self.place}.{key}".removeprefix("mapping."), self.problems)

    def tables(self, key: str) -> list[Table]:
        self.asked.add(key)
        value = self.raw.get(key, [])
        if not isinstance(value, list):
            self.problem(key, f"write it as [[{key}]]")
            return []
        place = f"{self.place}.{key}".removeprefix("mapping.")
        return [Table(v, f"{place}[{_label(v, i)}]", self.problems) for i, v in enumerate(value, start=1)]

    def done(self) -> None:
        for key in self.raw:
            if key not in self.asked:
                self.problem(key, "is not a key known here")


def _label(value: Any, number: int) -> str:
    """A list entry is named by its header or key if it has one, else by its number."""
    if isinstance(value, dict):
        for name in ("header", "key"):
            if isinstance(value.get(name), str):
                return str(value[name])
    return str(number)

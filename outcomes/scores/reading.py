"""Typed reading of a parsed TOML table that remembers every problem instead of stopping at the first."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from typing import Any

from outcomes.errors import UsageError


@dataclass(frozen=True)
class Problem:
    """One fault of a score table: dotted code, what is wrong, and where in the file."""

    code: str
    what: str
    where: str

    def text(self) -> str:
        """One line for a terminal."""
        return f"{self.code} {self.where}: {self.what}"


@dataclass
class Problems:
    """The faults found so far in one file."""

    found: list[Problem] = field(default_factory=list)

    def add(self, code: str, what: str, where: str) -> None:
        self.found.append(Problem(f"SCORE-FILE.{code}", what, where))

    def stop_if_any(self, key: str) -> None:
        """Raise the first as a UsageError that counts the rest."""
        if not self.found:
            return
        first, rest = self.found[0], len(self.found) - 1
        more = f" (and {rest} more)" if rest else ""
        raise UsageError(
            first.code,
            first.what + more,
            where=f"score table {key}, {first.where}",
            todo=f"correct the table; `outcomes score check` lists every fault. All: "
            f"{'; '.join(p.text() for p in self.found[:5])}",
        )


_ABSENT = object()


class Node:
    """One TOML table. Keys asked for are ticked off; `finish` reports those nobody asked for."""

    def __init__(self, data: Any, where: str, problems: Problems) -> None:
        self.problems = problems
        self.where = where
        self.data: dict[str, Any] = data if isinstance(data, dict) else {}
        self.asked: set[str] = set()
        if not isinstance(data, dict):
            problems.add("TYPE", "a table is expected here", where)

    def has(self, key: str) -> bool:
        return key in self.data

    def fault(self, code: str, what: str) -> None:
        self.problems.add(code, what, self.where)

    def _take(self, key: str, kinds: tuple[type, ...], kind_name: str, default: Any) -> Any:
        self.asked.add(key)
        value = self.data.get(key, _ABSENT)
        if value is _ABSENT:
            if default is _ABSENT:
                self.fault("MISSING", f"the key {key} is required")
                return None
            return default
        wrong_bool = isinstance(value, bool) and bool not in kinds
        if wrong_bool or not isinstance(value, kinds):
            self.fault("TYPE", f"{key} must be {kind_name}")
            return None if default is _ABSENT else default
        return value

    def text(self, key: str, default: Any = _ABSENT) -> str:
        value = self._take(key, (str,), "text", default)
        return "" if value is None else str(value)

    def word(self, key: str, allowed: Sequence[str], default: Any = _ABSENT) -> str:
        """Text out of a closed list; the nearest word is offered."""
        value = self.text(key, default)
        if value not in allowed and (self.has(key) or default is _ABSENT):
            near = get_close_matches(value, allowed, n=1)
            hint = f"; nearest: {near[0]}" if near else ""
            self.fault("WORD", f"{key} must be one of {', '.join(allowed)}{hint}")
            return allowed[0]
        return value

    def number(self, key: str, default: Any = _ABSENT) -> float:
        value = self._take(key, (int, float), "a number", default)
        return 0.0 if value is None else float(value)

    def optional_number(self, key: str) -> float | None:
        value = self._take(key, (int, float), "a number", None)
        return None if value is None else float(value)

    def flag(self, key: str, default: bool) -> bool:
        return bool(self._take(key, (bool,), "true or false", default))

    def any_value(self, key: str) -> Any:
        """A word, number or truth value; None if absent."""
        return self._take(key, (str, bool, int, float), "a word, a number or true/false", None)

    def words(self, key: str) -> tuple[str, ...]:
        """A list of texts, empty if absent."""
        value = self._take(key, (list,), "a list of texts", [])
        if not all(isinstance(item, str) for item in value):
            self.fault("TYPE", f"{key} must hold texts only")
            return ()
        return tuple(value)

    def values(self, key: str) -> tuple[Any, ...]:
        """A list of words or truth values, empty if absent."""
        return tuple(self._take(key, (list,), "a list", []))

    def child(self, key: str) -> Node:
        value = self._take(key, (dict,), "a table", {})
        return Node(value, f"{self.where}.{key}" if self.where else key, self.problems)

    def mapping(self, key: str) -> dict[str, Any]:
        """A free table (any keys), empty if absent."""
        return dict(self._take(key, (dict,), "a table", {}))

    def children(self, key: str) -> list[Node]:
        """A list of tables, empty if absent."""
        value = self._take(key, (list,), "a list of tables", [])
        return [Node(item, f"{self.where}{key}[{n}]", self.problems) for n, item in enumerate(value, 1)]

    def finish(self) -> None:
        for key in self.data:
            if key not in self.asked:
                near = get_close_matches(key, sorted(self.asked), n=1)
                hint = f"; nearest: {near[0]}" if near else ""
                self.fault("UNKNOWN-KEY", f"unknown key {key}{hint}")

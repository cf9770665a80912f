"""Identifiers become random surrogates before anything else happens to a row."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

SEPARATOR = "\x1f"


@dataclass
class Identities:
    """The link between identifiers and surrogates, as it is held in memory during one import.

    persons, runs: number space -> identifier -> surrogate (32 hex digits). new_key makes a fresh surrogate; a real
    import uses the operating system's randomness, the demo and the tests a seeded source.
    """

    new_key: Callable[[], str]
    persons: dict[str, dict[str, str]] = field(default_factory=dict)
    runs: dict[str, dict[str, str]] = field(default_factory=dict)
    fresh: set[str] = field(default_factory=set)

    def __repr__(self) -> str:
        return "Identities(***)"

    def person(self, space: str, identifier: str) -> str:
        return self._key(self.persons.setdefault(space, {}), identifier)

    def run(self, space: str, identifier: str) -> str:
        return self._key(self.runs.setdefault(space, {}), identifier)

    def forget(self, kept: set[str]) -> None:
        """Drop identifiers that were met for the first time and whose rows were not stored."""
        for space in (*self.persons.values(), *self.runs.values()):
            for identifier in [i for i, key in space.items() if key in self.fresh and key not in kept]:
                del space[identifier]

    def _key(self, table: dict[str, str], identifier: str) -> str:
        key = table.get(identifier)
        if key is None:
            key = self.new_key()
            table[identifier] = key
            self.fresh.add(key)
        return key


@dataclass
class RunNumbers:
    """Small whole numbers that stand for runs while a batch is staged, so that long keys are not repeated."""

    identities: Identities
    space: str
    run_space: str = ""
    number_of: dict[str, int] = field(default_factory=dict)
    run_keys: list[str] = field(default_factory=list)
    person_keys: list[str | None] = field(default_factory=list)
    attempts: dict[str, int] = field(default_factory=dict)
    disputed: set[int] = field(default_factory=set)

    def __repr__(self) -> str:
        return f"RunNumbers({len(self.run_keys)} runs)"

    def number(self, run: str, person: str | None) -> int:
        """Number of this run; the first row that names its person settles it, another person makes it disputed."""
        found = self.number_of.get(run)
        if found is None:
            found = len(self.run_keys)
            self.number_of[run] = found
            self.run_keys.append(self.identities.run(self.run_space or self.space, run))
            self.person_keys.append(None)
        if person is not None:
            key = self.identities.person(self.space, person)
            if self.person_keys[found] is None:
                self.person_keys[found] = key
            elif self.person_keys[found] != key:
                self.disputed.add(found)
        return found

    def fill_persons(self, known: Mapping[str, str]) -> None:
        """Persons of runs that this batch names without a person: from the store, else one person a run."""
        for i, person in enumerate(self.person_keys):
            if person is None and self.run_keys[i] in known:
                self.person_keys[i] = known[self.run_keys[i]]

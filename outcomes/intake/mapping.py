"""What a mapping file says, as values: the meaning of every column of one source, and of the source as a whole."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date

from outcomes.intake.vocabulary import Field

BLANKS = ("none", "not applicable", "not recorded", "still on support", "defect")
CODE_MEANINGS = ("not recorded", "not applicable", "none")


@dataclass(frozen=True)
class Coverage:
    """What the source means by a set of complication columns."""

    kinds: tuple[str, ...]
    events_kept: str
    looked_until_h: float
    definition: str
    valid_from_year: int


@dataclass(frozen=True)
class Source:
    """Declarations about the source as a whole; the dates go to the ledger only."""

    key: str
    identifiers: str
    period: tuple[date, date]
    extract_date: date
    extent: str
    time_zone: str
    plan_written: str
    vital_status_checked: date
    vital_status_date: str
    no_death_means: str
    attempts: str
    calendar: str
    coverage: tuple[Coverage, ...] = ()


@dataclass(frozen=True)
class Piece:
    """One value that a cell gives: most cells give one, a split cell gives two.

    factor, shift: canonical = received * factor + shift. codes: source text -> our code or a word of CODE_MEANINGS.
    """

    field: Field
    unit: str = ""
    factor: float = 1.0
    shift: float = 0.0
    window: str = ""
    site: str = ""
    reading: str = ""


@dataclass(frozen=True)
class Column:
    """One mapped column of a sheet. join: headers whose text follows after a space."""

    header: str
    pieces: tuple[Piece, ...]
    blank: str
    split: str = ""
    join: tuple[str, ...] = ()
    decimal_mark: str = "."
    thousands_mark: str = ""
    pattern: str = ""
    missing: tuple[str, ...] = ()
    codes: dict[str, str] = field(default_factory=dict)
    ignore_case: bool = False
    codes_from: str = ""


@dataclass(frozen=True)
class Sheet:
    """One table of a file. rows: first and last sheet row of a code list, inclusive. one_run_each: the source names no
    persons, and every run is taken for another one."""

    key: str
    position: int
    header_line: int
    row_is: str
    run: tuple[str, ...] = ()
    person: tuple[str, ...] = ()
    leave_out: tuple[str, ...] = ()
    columns: tuple[Column, ...] = ()
    code: str = ""
    meaning: str = ""
    rows: tuple[int, int] | None = None
    one_run_each: bool = False

    @property
    def listed(self) -> frozenset[str]:
        """Every header that this sheet says anything about."""
        names = {*self.run, *self.person, *self.leave_out, self.code, self.meaning} - {""}
        for column in self.columns:
            names.update((column.header, *column.join))
        return frozenset(names)


@dataclass(frozen=True)
class File:
    key: str
    kind: str
    encoding: str
    separator: str
    max_rows: int
    sheets: tuple[Sheet, ...]


@dataclass(frozen=True)
class Mapping:
    source: Source
    files: tuple[File, ...]
    digest: str

    @property
    def carried_fields(self) -> frozenset[str]:
        """Names of all fields that any sheet carries."""
        return frozenset(
            piece.field.name
            for file in self.files
            for sheet in file.sheets
            for column in sheet.columns
            for piece in column.pieces
        )

"""Invented names: birds, plants, stones, weather. Nobody and no hospital is called that."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Programme:
    """An invented programme. zone: IANA name of the clock on its walls."""

    name: str = "Wagtail Quarry Heart Support Programme"
    short: str = "Wagtail Quarry"
    zone: str = "Europe/Vienna"
    referring: tuple[str, ...] = ("Sleetmoss Infirmary", "Basalt Heron Clinic", "Teasel Gravel Hospital")
    registrar: str = "Office of Lichen Ledgers"


PROGRAMME = Programme()

_FIRST = (
    "Avocet",
    "Bracken",
    "Cinnabar",
    "Dunlin",
    "Ember",
    "Feldspar",
    "Garnet",
    "Hazelle",
    "Ibisa",
    "Junipera",
    "Knapweed",
    "Larkspur",
    "Mallowe",
    "Nightjar",
    "Onyxa",
    "Plovera",
    "Quartza",
    "Redshank",
    "Siskin",
    "Tansya",
    "Umbel",
    "Vervain",
    "Whinchat",
    "Yarrowe",
    "Zirconia",
)
_LAST = (
    "Agateveil",
    "Bogmyrtle",
    "Cragwillow",
    "Dolomitson",
    "Eiderfen",
    "Flintwort",
    "Gneissling",
    "Hoopoeton",
    "Ironmoss",
    "Jasperthorn",
    "Kittiwold",
    "Lapwingham",
    "Marlbrook-Stane",
    "Nuthatchley",
    "Obsidianko",
    "Pumicetree",
    "Quailstone",
    "Rushglint",
    "Sandpiperov",
    "Tufaborn",
    "Ungulith",
    "Vetchworth",
    "Wheatearson",
    "Xylithe",
    "Yewgravel",
    "Zephyrsedge",
)
REMARKS = (
    "",
    "",
    "",
    "",
    "seen by night team",
    "family informed",
    "moved; bed 4 to bed 9",
    'called it "a quiet night"',
    "lines changed, both sides",
    "notes on paper",
    "=see old chart",
    "tall; long cannula",
    "rhythm watched\nno change",
    "Übergabe ohne Befund",
    "letter sent – copy filed",
)


def person_names(rng: np.random.Generator, n: int) -> tuple[list[str], list[str]]:
    """First and last names of n people."""
    first = [_FIRST[i] for i in rng.integers(0, len(_FIRST), n)]
    last = [_LAST[i] for i in rng.integers(0, len(_LAST), n)]
    return first, last


def record_numbers(rng: np.random.Generator, n: int) -> list[str]:
    """n different hospital numbers of seven digits that do not start with 0."""
    numbers: dict[int, None] = {}
    while len(numbers) < n:
        numbers.update(dict.fromkeys(int(v) for v in rng.integers(1_000_000, 10_000_000, n)))
    return [str(v) for v in list(numbers)[:n]]


def phones(rng: np.random.Generator, n: int) -> list[str]:
    """Telephone numbers that cannot exist: the country code is 000."""
    return [
        f"+000 {a:03d} {b:04d}"
        for a, b in zip(rng.integers(0, 1000, n), rng.integers(0, 10_000, n), strict=True)
    ]


def remarks(rng: np.random.Generator, n: int) -> list[str]:
    """Free text, mostly empty; some with quotes, separators, line breaks and a leading equals sign."""
    return [REMARKS[i] for i in rng.integers(0, len(REMARKS), n)]

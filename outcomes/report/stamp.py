"""What may leave where: the profile of a report, stamped on its title, every printed page and its JSON."""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType

from outcomes.errors import DisclosureRefused

PROFILES: Mapping[str, str] = MappingProxyType({"internal": "Internal – contains individual runs"})


def stamp(profile: str) -> str:
    """The words of the profile. DisclosureRefused for any profile that no protection pass serves."""
    if profile not in PROFILES:
        raise DisclosureRefused(
            "DISCLOSURE.PROFILE",
            "only an internal report can be made: it shows exact numbers and individual runs",
            todo="ask for the profile internal, and keep the report within the care team",
        )
    return PROFILES[profile]

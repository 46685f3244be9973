"""What must hold beyond the checks that are built in, and what is waived."""

from enum import Enum

from seqcheck.records import dataclass
from seqcheck.source import Place


@dataclass(frozen=True, slots=True)
class MarginRule:
    """`margin at least D`."""

    place: Place
    least: int


@dataclass(frozen=True, slots=True)
class NeverRule:
    """`never S and S off …`; a literal is (switch, wanted on)."""

    place: Place
    literals: tuple[tuple[str, bool], ...]


@dataclass(frozen=True, slots=True)
class ClearsRule:
    """`TRIP clears S… within D`."""

    place: Place
    trip: str
    switches: tuple[str, ...]
    within: int


class Lasts(Enum):
    """Which length of a command a rule bounds."""

    ON_AT_MOST = "on at most"
    ON_AT_LEAST = "on at least"
    OFF_AT_LEAST = "off at least"


@dataclass(frozen=True, slots=True)
class LastsRule:
    """`S on at most D`, `S on at least D`, `S off at least D`."""

    place: Place
    switch: str
    lasts: Lasts
    limit: int


@dataclass(frozen=True, slots=True)
class ApartRule:
    """`M and M at least D apart`."""

    place: Place
    first: str
    second: str
    least: int


@dataclass(frozen=True, slots=True)
class ToleratesRule:
    """`tolerates single faults in M…`; the modes in the order of the line, or of the table where it says `any`."""

    place: Place
    modes: tuple[str, ...]


Rule = MarginRule | NeverRule | ClearsRule | LastsRule | ApartRule | ToleratesRule


@dataclass(frozen=True, slots=True)
class Waiver:
    """`waive CHECK for NAME because "reason"`."""

    place: Place
    check: str
    name: str
    reason: str

"""What a change of a file comes to, as data: what it says, what can be entered, what is proven, how much is left."""

from collections.abc import Iterator, Mapping
from enum import Enum
from itertools import zip_longest

from seqcheck.contents import Entry, contents
from seqcheck.drive import Drive
from seqcheck.hazards import Hazard, Literal
from seqcheck.records import dataclass
from seqcheck.source import Place
from seqcheck.verdict import WARNINGS, Finding, Margin, Outcome, Undecided, Unsafe, Verdict


class How(Enum):
    """What became of one thing that a file says."""

    ADDED = "added"
    REMOVED = "removed"
    CHANGED = "changed"


@dataclass(frozen=True, slots=True)
class Field:
    """What is said of a thing under a name, in the old and in the new file; None where nothing is."""

    name: str
    old: str | None
    new: str | None


@dataclass(frozen=True, slots=True)
class Change:
    """One thing that is said otherwise: of what kind, its name, and which of its fields differ.

    Its place is in the new file, in the old one if it was removed. `fields` are empty unless it was changed.
    """

    kind: str
    name: str
    how: How
    fields: tuple[Field, ...]
    place: Place


class Turn(Enum):
    """What became of one hazard, worst first."""

    POSSIBLE = "became possible"
    UNDECIDED = "undecided now"
    STILL = "still possible"
    PROVEN = "proven now"
    GONE = "no hazard any more"
    NEW = "a new hazard, proven"
    SAME = "as before"


@dataclass(frozen=True, slots=True)
class Turned:
    """One hazard with its verdict in the old and in the new file; None where it is none there.

    `old_waived` and `new_waived` have the reason of the waiver that lets it pass.
    """

    hazard: Hazard
    old: Verdict | None
    new: Verdict | None
    old_waived: str | None
    new_waived: str | None

    @property
    def turn(self) -> Turn:
        """What became of it; a hazard that was undecided was not known to be possible."""
        if isinstance(self.new, Unsafe):
            known = isinstance(self.old, Unsafe) and (self.old_waived is None or self.new_waived is not None)
            same = known and isinstance(self.old, Unsafe) and self.old.check is self.new.check
            return Turn.STILL if same else Turn.POSSIBLE
        if isinstance(self.new, Undecided):
            return Turn.UNDECIDED
        if self.new is None:
            return Turn.GONE
        if self.old is None:
            return Turn.NEW
        return Turn.SAME if not isinstance(self.old, Unsafe | Undecided) else Turn.PROVEN

    @property
    def worse(self) -> bool:
        """Whether it became possible, and no waiver lets that pass."""
        return self.turn is Turn.POSSIBLE and self.new_waived is None


@dataclass(frozen=True, slots=True)
class Moved:
    """The margin of one hazard after one of its literals, in two files that prove it; both are exact."""

    old: Margin
    new: Margin

    @property
    def shrank(self) -> bool:
        """Whether less is left than before."""
        return self.new.slack is not None and (self.old.slack is None or self.new.slack < self.old.slack)


@dataclass(frozen=True, slots=True)
class Unmeasured:
    """A margin that was not found, in one file or both, before a limit was reached."""

    hazard: Hazard
    after: Literal
    limit: str


@dataclass(frozen=True, slots=True)
class Way:
    """A way from a mode to another, and the events and trips that lead there."""

    source: str
    target: str
    by: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Reach:
    """Modes and ways of the mode graph that one file has and the other has not."""

    modes: tuple[str, ...]
    ways: tuple[Way, ...]


Told = tuple[Finding, str | None]
"""A finding, and the reason of the waiver that lets it pass."""


@dataclass(frozen=True, slots=True)
class Comparison:
    """Everything that a change comes to. `same`: both files mean the same, whatever they look like.

    `broken` are findings and warnings that only the new file has, `mended` those that only the old one has, each with
    the reason of a waiver that lets it pass.
    `unmeasured` are margins that were not found within a limit, which is named.
    """

    old: Outcome
    new: Outcome
    same: bool
    changes: tuple[Change, ...]
    gained: Reach
    lost: Reach
    verdicts: tuple[Turned, ...]
    broken: tuple[Told, ...]
    mended: tuple[Told, ...]
    margins: tuple[Moved, ...]
    unmeasured: tuple[Unmeasured, ...]

    @property
    def worse(self) -> bool:
        """Whether a hazard became possible or a check came to be broken that no waiver lets pass."""
        broken = any(one.check not in WARNINGS and why is None for one, why in self.broken)
        return broken or any(one.worse for one in self.verdicts)

    @property
    def undecided(self) -> bool:
        """Whether some hazard of the new file is neither proven nor disproven."""
        return any(one.turn is Turn.UNDECIDED for one in self.verdicts)


def differences(old: Drive, new: Drive) -> tuple[Change, ...]:
    """What two drives say differently, kind by kind in the order of a file."""
    before = {(one.kind, one.name): one for one in contents(old)}
    after = {(one.kind, one.name): one for one in contents(new)}
    return tuple(_differences(before, after))


Entries = Mapping[tuple[str, str], Entry]


def _differences(before: Entries, after: Entries) -> Iterator[Change]:
    for kind in dict.fromkeys(kind for kind, _ in (*after, *before)):
        for key, entry in after.items():
            if key[0] != kind:
                continue
            if key not in before:
                yield Change(kind, entry.name, How.ADDED, (), entry.place)
            elif fields := tuple(_fields(before[key], entry)):
                yield Change(kind, entry.name, How.CHANGED, fields, entry.place)
        for key, entry in before.items():
            if key[0] == kind and key not in after:
                yield Change(kind, entry.name, How.REMOVED, (), entry.place)


def _fields(old: Entry, new: Entry) -> Iterator[Field]:
    for name in dict.fromkeys((*old.fields, *new.fields)):
        if old.fields.get(name) != new.fields.get(name):
            yield Field(name, old.fields.get(name), new.fields.get(name))
    if old.steps == new.steps:
        return
    if len(old.steps) != len(new.steps):
        yield Field("steps", ", then ".join(old.steps) or None, ", then ".join(new.steps) or None)
        return
    for number, (before, after) in enumerate(zip_longest(old.steps, new.steps), 1):
        if before != after:
            yield Field(f"step {number}", before, after)

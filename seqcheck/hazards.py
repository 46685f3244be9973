"""What must never happen, as data."""

from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass

from seqcheck.drive import Known, Part
from seqcheck.quantities import INSTANT, Interval


@dataclass(frozen=True, slots=True, order=True)
class Literal:
    """A switch that can conduct (`on`), or can be open (not `on`)."""

    switch: str
    on: bool = True

    def __str__(self) -> str:
        return self.switch if self.on else f"{self.switch} off"


@dataclass(frozen=True, slots=True)
class Current:
    """A current through a winding, out of one node of the stage and into another; None where the file names none, or
    one at which nothing but windings meets."""

    out_of: str | None
    into: str | None


@dataclass(frozen=True, slots=True)
class Delays:
    """The times of one literal: from command to possibility (`rise`, the `in` of the meaning) and back (`fall`, its
    `out`), in ps."""

    rise: int
    fall: int


@dataclass(frozen=True, slots=True)
class Lasting:
    """That a command may be as one literal wants for longer than `limit` ps at a stretch (`longer`), or for less."""

    longer: bool
    limit: int


@dataclass(frozen=True, slots=True)
class Following:
    """That a mode may be entered less than `limit` ps after another was last left."""

    left: str
    entered: str
    limit: int


@dataclass(frozen=True, slots=True)
class Clearing:
    """That a switch can conduct later than `limit` ps after a trip arrived, before its target or `reset` is left."""

    trip: str
    limit: int


@dataclass(frozen=True, slots=True)
class Nearing:
    """That all other literals can be possible less than `limit` ps after the one at place `after` could last.

    A rule about margins asks so for evidence, of a short that is safe; the prover measures margins in another way.
    """

    after: int
    limit: int


Length = Lasting | Following | Clearing
"""What a rule of the file forbids, where it is about lengths of time."""


@dataclass(frozen=True, slots=True, order=True)
class Fault:
    """One thing stuck for ever: a switch conducts always (`on`) or never; or, with `pin`, it is the command at the pin
    of that switch that is always on or always off, whatever is written."""

    switch: str
    on: bool
    pin: bool


@dataclass(frozen=True, slots=True)
class Stuck:
    """That a short comes at rest in a mode while one thing is stuck; `faults` are those that come to the same.

    The literals are those that must come together beside what a stuck switch does by itself.
    """

    mode: str
    faults: tuple[Fault, ...]


Question = Length | Nearing | Stuck
"""What a rule of the file forbids that is more than to be possible together."""


@dataclass(frozen=True, slots=True)
class Hazard:
    """Literals that must not be possible together for a positive time.

    `joins` names the stiff nodes that a short would join, first the positive one, for people. `needs` are facts, the
    orientation of sources or directions of current: each entry is one set of them under which the hazard does harm;
    where all entries contradict what is known, the hazard is not asked for. An empty `needs` means always. `currents`
    are those that lose their way where the hazard is an open winding.

    With `asks` it is another question: about a length of time, then the literals name the switch that it is about, or
    about what one thing that is stuck brings.
    """

    literals: tuple[Literal, ...]
    joins: tuple[str, ...]
    needs: tuple[frozenset[Known], ...] = ()
    currents: tuple[Current, ...] = ()
    asks: Question | None = None


def reach(parts: tuple[Part, ...]) -> tuple[Interval, Interval]:
    """The bounds of a path's turn-on and turn-off: parts in series add."""
    on, off = INSTANT, INSTANT
    for part in parts:
        on, off = on + part.on, off + part.off
    return on, off


def delays(hazard: Hazard, paths: Mapping[str, tuple[Part, ...]]) -> tuple[Delays, ...]:
    """From command to possibility and back, for each literal in order; with the raise that `difference` allows.

    For a question about lengths: the time after which its automaton can tell no more.
    """
    if isinstance(hazard.asks, Lasting) and hazard.asks.longer:
        return (Delays(hazard.asks.limit, 0),)
    if isinstance(hazard.asks, Lasting | Following):
        return (Delays(hazard.asks.limit - 1, 0),)
    plain = tuple(_plain(literal, paths[literal.switch]) for literal in hazard.literals)
    if isinstance(hazard.asks, Clearing):
        return (*plain, Delays(hazard.asks.limit, 0))
    if len(plain) != 2 or not all(literal.on for literal in hazard.literals):
        return plain
    first, second = (paths[literal.switch] for literal in hazard.literals)
    return _raised(plain[0], plain[1], second, first), _raised(plain[1], plain[0], first, second)


def _plain(literal: Literal, parts: tuple[Part, ...]) -> Delays:
    on, off = reach(parts)
    return Delays(on.lo, _bounded(off)) if literal.on else Delays(off.lo, _bounded(on))


def _bounded(interval: Interval) -> int:
    assert interval.hi is not None, "the language asks for an upper bound of every part"
    return interval.hi


def _raised(mine: Delays, other: Delays, other_parts: tuple[Part, ...], my_parts: tuple[Part, ...]) -> Delays:
    """My `rise`, raised to where the difference lets me follow the other switch's turn-off at the soonest."""
    apart = min(other.fall - _excess(other_parts, my_parts), mine.fall)
    return Delays(max(mine.rise, apart), mine.fall)


def _excess(leaving: tuple[Part, ...], joining: tuple[Part, ...]) -> int:
    """The most by which the turn-off of one path exceeds the turn-on of the other.

    Parts that stand on both paths are two samples of one kind: their difference counts where it is smaller.
    """
    own, other = Counter(part.name for part in leaving), Counter(part.name for part in joining)
    shared = own & other
    kinds = {part.name: part for part in (*leaving, *joining)}
    total = sum(_bounded(kinds[name].off) * count for name, count in (own - shared).items())
    total -= sum(kinds[name].on.lo * count for name, count in (other - shared).items())
    for name, count in shared.items():
        part = kinds[name]
        plain = _bounded(part.off) - part.on.lo
        total += count * (plain if part.difference is None else min(plain, part.difference))
    return total

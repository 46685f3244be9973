"""The judge of rules about lengths: every behaviour of a small drive, with the rule's words kept beside the state."""

from collections import deque
from collections.abc import Iterator
from typing import Any, NamedTuple

from judge.possible import Monitor, aged, can, due, heard, settled
from judge.states import Rest, Run, State
from judge.world import World
from seqcheck.drive import RESET, Drive, Trip
from seqcheck.hazards import Delays, Literal


class Told(NamedTuple):
    """What a rule sees of an event: the state before and after, whether a run begins, and whether time passes; its
    words."""

    before: State
    after: State
    begins: bool = False
    tick: bool = False
    words: str = ""


class Long:
    """`S on at most D`: the age of the on-time that time 0 or a turn-on began; a break of no length breaks nothing."""

    def __init__(self, world: World, most: int) -> None:
        self.world, self.most = world, most

    def start(self, _: State) -> int | None:
        """Nothing counts before time 0."""
        return 0

    def after(self, age: int, told: Told) -> int | None:
        """The age later; None where the rule is broken."""
        on, _ = self.world.wanted(told.before)
        if not told.tick:
            return age
        if not on:
            return 0
        return None if age == self.most else age + 1


class Short:
    """`S on at least D` and `S off at least D`: the age of what began after time 0, -1 where nothing is timed."""

    def __init__(self, world: World, on: bool, least: int) -> None:
        self.world, self.on, self.least = world, on, least

    def _now(self, state: State) -> tuple[bool, bool]:
        on, off = self.world.wanted(state)
        return (on if self.on else off), on and off

    def start(self, state: State) -> int | None:
        """A pin that floats may give a pulse at once."""
        return None if self._now(state)[1] else -1

    def after(self, age: int, told: Told) -> int | None:
        """The age later; None where the rule is broken."""
        if told.tick:
            return age if age < 0 else min(age + 1, self.least)
        (was, _), (wanted, unknown) = self._now(told.before), self._now(told.after)
        if unknown or (was and not wanted and 0 <= age < self.least):
            return None
        return 0 if wanted and not was else age if wanted else -1


class Soon:
    """One direction of `M and M at least D apart`: the age of the last leaving of the one, -1 before the first."""

    def __init__(self, left: str, entered: str, least: int) -> None:
        self.left, self.entered, self.least = left, entered, least

    def start(self, _: State) -> int | None:
        """Nothing was left yet."""
        return -1

    def after(self, age: int, told: Told) -> int | None:
        """The age later; None where the rule is broken."""
        if told.tick:
            return age if age < 0 else min(age + 1, self.least)
        old, new = told.before.place, told.after.place
        if told.begins and isinstance(old, Rest) and old.mode == self.left:
            age = 0
        enters = isinstance(new, Rest) and (told.begins or isinstance(old, Run))
        if enters and isinstance(new, Rest) and new.mode == self.entered and 0 <= age < self.least:
            return None
        return age


Late = tuple[Monitor, int]


class Clear:
    """`TRIP clears S within D`: the automaton of S, and the age of the first arrival that is watched, -1 for none."""

    def __init__(self, world: World, delays: Delays, trip: Trip, within: int) -> None:
        self.world, self.delays, self.trip, self.within = world, delays, trip, within

    def start(self, state: State) -> Late | None:
        """The switch has been as it is for ever."""
        return settled(self.world.wanted(state)[0]), -1

    def after(self, kept: Late, told: Told) -> Late | None:
        """The automaton and the age later; None where the rule is broken."""
        monitor, age = kept
        if told.tick:
            monitor = due(monitor, self.delays)
            if age == self.within and can(monitor):
                return None
            return aged(monitor), age if age < 0 else min(age + 1, self.within)
        old = told.before.place
        if told.begins and isinstance(old, Rest) and old.mode in (self.trip.target, RESET):
            age = -1
        heading = f"trip {self.trip.name}," if self.trip.at_once else f"{self.trip.name} arrives"
        if age < 0 and told.words.startswith(heading):
            age = 0
        return heard(monitor, self.world.wanted(told.after)[0]), age


Watch = Long | Short | Soon | Clear


def world_of(drive: Drive, switch: str | None, *, bounded: bool = True) -> World:
    """The world as seen from one switch, or from none."""
    literals = () if switch is None else (Literal(switch, True), Literal(switch, False))
    return World(drive, literals, interlocks=True, bounded=bounded)


def broken(world: World, watch: Watch, most_states: int) -> bool | None:
    """Whether some run breaks a rule; None where that takes more states than allowed."""
    seen: set[tuple[State, object]] = set()
    waiting: deque[tuple[State, Any]] = deque()
    futures: dict[State, list[Told]] = {}
    for state in world.starts():
        age = watch.start(state)
        if age is None:
            return True
        seen.add((state, age))
        waiting.append((state, age))
    while waiting:
        state, age = waiting.popleft()
        if state not in futures:
            futures[state] = list(_future(world, state))
        for told in futures[state]:
            later = watch.after(age, told)
            if later is None:
                return True
            if (told.after, later) not in seen:
                seen.add((told.after, later))
                waiting.append((told.after, later))
        if len(seen) > most_states:
            return None
    return False


def _future(world: World, state: State) -> Iterator[Told]:
    for words, after in world.events(state):
        yield Told(state, after, begins=words.startswith(("move ", "trip ")) or " is taken" in words, words=words)
    later = world.tick(state)
    if later is not None:
        yield Told(state, later, tick=True)

"""The automaton of a literal against its definition by stretches of time, on random commands."""

from itertools import pairwise, product
from random import Random

import pytest
from judge.possible import Stretch, stretches

from seqcheck.hazards import Delays
from seqcheck.proving.conduction import (
    BLIP,
    ENTERING,
    IN,
    LEAVING,
    OUT,
    POSSIBLE,
    WANTED,
    Turn,
    ages,
    timeouts,
    turned,
)

STATES = (OUT, ENTERING, IN, LEAVING, BLIP)
END = 60


class Automaton:
    """The automaton, run with whole times: what time alone does is done after the commands of an instant."""

    def __init__(self, wanted: bool, delays: Delays) -> None:
        self.delays = delays
        self.state = IN if wanted else OUT
        self.age = {True: 0, False: 0}  # since the command came, since it went

    def command(self, wanted: bool) -> None:
        """The command changes, or is given again."""
        turn = turned(self.state, wanted, self.delays)
        self.state = turn.state
        if turn.resets_rise:
            self.age[True] = 0
        if turn.resets_fall:
            self.age[False] = 0

    def settle(self) -> None:
        """Nothing more happens at this instant but what time alone does."""
        limits = {True: self.delays.rise, False: self.delays.fall}
        while due := [after for by_rise, after in timeouts(self.state) if self.age[by_rise] >= limits[by_rise]]:
            self.state = due[-1]

    def tick(self) -> bool:
        """1 ps passes; whether the literal was possible in it."""
        possible = POSSIBLE[self.state]
        self.age = {by_rise: age + 1 for by_rise, age in self.age.items()}
        return possible


def commands(rng: Random) -> list[int]:
    """Times at which the command changes, in order; several may fall on one instant."""
    count = rng.randint(0, 12)
    return sorted(rng.randint(0, END - 20) for _ in range(count))


def by_automaton(first: bool, changes: list[int], delays: Delays) -> list[bool]:
    """Whether the literal is possible in each ps from 0 to END."""
    automaton, wanted, found = Automaton(first, delays), first, []
    for time in range(END):
        for _ in range(changes.count(time)):
            wanted = not wanted
            automaton.command(wanted)
        automaton.settle()
        found.append(automaton.tick())
    return found


def by_definition(first: bool, changes: list[int], delays: Delays) -> list[bool]:
    """The same from the stretches in which the command is as wanted."""
    far = 10 * END  # a command that has been so for ever
    times: list[int | None] = [*([-far] if first else []), *changes, None]
    wanted: list[Stretch] = [(start, end) for start, end in list(pairwise(times))[::2] if start is not None]
    possible = stretches(wanted, delays)
    return [any(start <= time and (end is None or time < end) for start, end in possible) for time in range(END)]


@pytest.mark.parametrize("seed", range(400))
def test_against_the_definition(seed: int) -> None:
    """Prolonged by `fall`, joined where stretches touch, and then shorter by `rise`."""
    rng = Random(seed)
    delays = Delays(rng.randint(0, 8), rng.randint(0, 8))
    first, changes = rng.random() < 0.5, commands(rng)
    assert by_automaton(first, changes, delays) == by_definition(first, changes, delays)


def test_every_short_command() -> None:
    """All pairs of a pulse and a pause up to 7 ps, with all delays up to 5 ps."""
    for rise, fall, pulse, pause, again in product(range(6), range(6), range(8), range(8), (0, 3)):
        changes = [2, 2 + pulse, 2 + pulse + pause, 2 + pulse + pause + again]
        delays = Delays(rise, fall)
        assert by_automaton(False, changes, delays) == by_definition(False, changes, delays), (changes, delays)


def test_a_command_given_again_changes_nothing() -> None:
    """Only changes of the command count."""
    for state, delays in product(STATES, (Delays(0, 0), Delays(3, 0), Delays(0, 3), Delays(3, 3))):
        assert turned(state, WANTED[state], delays) == Turn(state, False, False)


@pytest.mark.parametrize("rise", [0, 3])
def test_turn_and_turn_back(rise: int) -> None:
    """A pause starts the age of going off; coming back keeps the age of coming on where nothing was lost."""
    delays = Delays(rise, 5)
    assert turned(OUT, True, delays) == (Turn(ENTERING, True, False) if rise else Turn(IN, False, False))
    assert turned(ENTERING, False, delays) == Turn(BLIP, False, True)
    assert turned(BLIP, True, delays) == (Turn(ENTERING, False, False) if rise else Turn(IN, False, False))
    assert turned(IN, False, delays) == Turn(LEAVING, False, True)
    assert turned(LEAVING, True, delays) == Turn(IN, False, False)


def test_ages_are_those_that_timeouts_look_at() -> None:
    """A clock that nothing looks at would cost, a missing one would be wrong."""
    for state in STATES:
        looked_at = {by_rise for by_rise, _ in timeouts(state)}
        rise, fall = ages(state)
        assert looked_at == {by_rise for by_rise, runs in ((True, rise), (False, fall)) if runs}


def test_time_alone_keeps_the_command() -> None:
    """A timeout changes whether the literal is possible, never whether it is wanted."""
    for state in STATES:
        for _, after in timeouts(state):
            assert WANTED[after] == WANTED[state]

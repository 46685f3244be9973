"""The screen against exact zones: what least times settle, no run contradicts, however late the firmware is."""

import pytest
from judge.draws import draw
from proofs import at_most, leg
from reading import drive_of

from seqcheck.circuit import shorting_sets
from seqcheck.drive import Drive, Update
from seqcheck.firmware import Firmware
from seqcheck.hazards import Hazard, Literal, delays
from seqcheck.proving.clocks import Manner
from seqcheck.proving.projection import Projection
from seqcheck.proving.prove import LimitReached
from seqcheck.proving.screen import Map, least_after, screened
from seqcheck.proving.search import first_hazard
from seqcheck.proving.views import View, view
from seqcheck.zones import INFINITE

EXACT = Manner(forget=False, cut=False, measure=False)
"""Nothing is forgotten and no dwell cut, so that only the screen can be wrong."""
BLOCKS, BLOCK = 10, 10


def unpunctual(drive: Drive, looking: View) -> Firmware:
    """The firmware with no upper bounds, with the held writes that the hazard can tell."""
    waiting = frozenset(name for name in looking.carriers if drive.carriers[name].update is not Update.AT_ONCE)
    return Firmware(drive, waiting, looking.held if waiting else frozenset(), punctual=False)


def settled(drive: Drive, hazard: Hazard, interlocks: bool = True) -> bool:
    """Whether the screen settles a hazard."""
    looking = view(drive, hazard, delays(hazard, drive.paths), interlocks)
    return screened(looking, Map(unpunctual(drive, looking), lambda count: None)) is not None


def contradicted(drive: Drive, hazard: Hazard) -> bool | None:
    """Whether exact zones find the hazard; None if they would take too long."""
    looking = view(drive, hazard, delays(hazard, drive.paths), False)
    projection = Projection(looking, unpunctual(drive, looking), EXACT)
    try:
        return first_hazard(projection.initial(), at_most(1500)) is not None
    except LimitReached:
        return None


@pytest.mark.parametrize("block", range(BLOCKS))
def test_never_contradicts_zones(block: int) -> None:
    """Of a hundred drawn drives; the screen leaves interlocks out, and so do these zones."""
    confirmed = 0
    for seed in range(block * BLOCK, (block + 1) * BLOCK):
        drive = drive_of(draw(seed))
        for hazard in shorting_sets(drive.stage):
            if settled(drive, hazard):
                found = contradicted(drive, hazard)
                assert not found, (seed, hazard)
                confirmed += found is False
    assert confirmed > 0


def one(text: str) -> bool:
    """Whether the screen settles a drive with one hazard."""
    drive = drive_of(text)
    (hazard,) = shorting_sets(drive.stage)
    return settled(drive, hazard)


PAUSE = "  start a\n  a -> b when go\n    set A off\n    wait {} ps\n  b -> a when back\n    set B off\n    wait {} ps"


@pytest.mark.parametrize(("there", "back", "right"), [(5, 5, True), (5, 6, True), (4, 9, False), (9, 4, False)])
def test_each_direction_counts(there: int, back: int, right: bool) -> None:
    """Out 7, in 2: 5 ps each way, and 5 + 5 > 7."""
    assert one(leg("a on off\nb off on", PAUSE.format(there, back))) is right


def gaps(text: str) -> list[int | None]:
    """What the screen says of the gap after A and after B."""
    drive = drive_of(text)
    (hazard,) = shorting_sets(drive.stage)
    looking = view(drive, hazard, delays(hazard, drive.paths), True)
    here = Map(unpunctual(drive, looking), lambda _: None)
    return [least_after(looking, here, leaving) for leaving in (0, 1)]


def test_gap_after_each_literal() -> None:
    """The least time between commands, with 2 ps from command to possibility and 7 ps from its end to none."""
    rows = "a on off\nb off on"
    parts = {"parts": "p on 2 ps to 3 ps off 4 ps to 7 ps\n  q on 3 ps to 4 ps off 4 ps to 6 ps"}
    apart = {"paths": "A through p\n  B through q", **parts}
    assert gaps(leg(rows, PAUSE.format(9, 6))) == [9 + 2 - 7, 6 + 2 - 7]
    assert gaps(leg(rows, PAUSE.format(9, 6), **apart)) == [9 + 3 - 7, 6 + 2 - 6]
    assert gaps(leg(rows, PAUSE.format(5, 4))) == [None, None]
    assert gaps(leg("a on off\nab on on", "  start a\n  a -> ab when go")) == [None, None]
    once = "  start a\n  a -> b when go\n    set A off\n    wait 9 ps"
    assert gaps(leg(rows, once)) == [4, INFINITE]


def test_a_literal_of_an_open_switch_is_not_screened() -> None:
    """What a carrier's dead time keeps apart is conduction: two switches off at once are no matter of least times."""
    drive = drive_of(leg("a on off\nb off on", PAUSE.format(9, 9)))
    assert settled(drive, Hazard((Literal("A"), Literal("B")), ()))
    assert not settled(drive, Hazard((Literal("A", False), Literal("B")), ()))
    held = drive_of(leg("a on on\nb off off", PAUSE.format(9, 9)))
    assert not settled(held, Hazard((Literal("A"), Literal("B", False)), ()))


def test_commanded_both() -> None:
    """A state that commands both is never settled, however long the pauses are."""
    moves = "  start a\n  a -> ab when go\n    set all off\n    wait 99 ps"
    assert not one(leg("a on off\nab on on", moves))


def test_way_round_other_modes() -> None:
    """The shortest way counts, through modes that command neither too; a loop may be what makes it long enough."""
    rows = "a on off\nz off off\nb off on"
    moves = "  start a\n  a -> z when go\n  z -> b when go_on"
    assert not one(leg(rows, moves))
    assert one(leg(rows, moves, head="writes together\nloop at least 5 ps"))
    assert not one(leg(rows, moves, head="writes together\nloop at least 4 ps"))
    trip = "  x from z -> b within 3 ps"
    assert not one(leg(rows, moves, head="writes together\nloop at least 5 ps", trips=trip))


def test_dead_time_lies_between_outputs() -> None:
    """A carrier's dead time counts between an output and its complement, not with another carrier."""
    moves = "  start i\n  i -> m when go\n  m -> i when stop"
    rows = "i off off\nm k ~k"
    for dead, right in ((5, True), (4, False)):
        carrier = f"carriers\n  k 50 GHz duty 30 % to 70 % dead time {dead} ps"
        assert one(leg(rows, moves, more=carrier)) is right
    both = "carriers\n  k 50 GHz duty 30 % to 70 % dead time 9 ps\n  j 50 GHz duty 30 % to 70 % dead time 9 ps"
    assert not one(leg("i off off\nm k ~j", moves, more=both))
    moves = "  start i\n  i -> m when go\n  m -> n when swap"
    assert one(leg("i off off\nm k off\nn off ~k", moves, more=both))
    for joined in ("~j", "j", "k", "on"):
        assert not one(leg(f"i off off\nm k off\nn off {joined}", moves, more=both))


def test_upper_bounds_play_no_part() -> None:
    """What rests on a longest time is left to zones."""
    moves = "  start a\n  a -> ab when go\n  ab -> b after up to 1 ps"
    assert not one(leg("a on off\nab on on\nb off on", moves, parts="p on 9 ps off 1 ps"))


def test_one_safe_pair_settles_a_larger_set() -> None:
    """Three switches in series: two that never meet are enough."""
    text = (
        'drive "series"\nwrites together\nstage\n  rails P N\n  switch A from P to x\n  switch B from x to y\n'
        "  switch C from y to N\nparts\n  p on 2 ps to 3 ps off 4 ps to 7 ps\npaths\n  A B C through p\n"
        "modes A B C\n  a on off on\n  b off on on\nmoves\n  start a\n"
        "  a -> b when go\n    set A off\n    wait {} ps\n"
    )
    assert one(text.format(5))
    assert not one(text.format(4))

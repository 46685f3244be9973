"""The traps that the meaning names: each test says which naive reading it refutes, and fails for that reading.

The judge, which shares no code with the prover, has to give the same answers.
"""

import pytest
from judge.possible import stretches
from proofs import SAFE, Answer, answer, judged, leg, silent
from reading import drive_of

from seqcheck.circuit import shorting_sets
from seqcheck.drive import Drive
from seqcheck.firmware import Firmware
from seqcheck.hazards import Delays, delays
from seqcheck.proving.clocks import Manner
from seqcheck.proving.cutting import Cutting
from seqcheck.proving.projection import Projection
from seqcheck.proving.prove import Prover
from seqcheck.proving.references import Reference
from seqcheck.proving.screen import Map, screened
from seqcheck.proving.search import first_hazard
from seqcheck.proving.views import View, view


def looking_at(drive: Drive) -> View:
    """The view of a drive's only hazard."""
    (hazard,) = shorting_sets(drive.stage)
    return view(drive, hazard, delays(hazard, drive.paths), True)


def settled_by_screen(text: str) -> bool:
    """Whether the screen alone settles a drive."""
    drive = drive_of(text)
    firmware = Firmware(drive, frozenset(), frozenset(), punctual=False)
    return screened(looking_at(drive), Map(firmware, lambda count: None)) is not None


def proved_by(text: str) -> str:
    """What proves a safe drive."""
    drive = drive_of(text)
    (hazard,) = shorting_sets(drive.stage)
    return getattr(Prover(drive).prove(hazard, True, silent), "method", "nothing")


def with_manner(text: str, manner: Manner) -> bool:
    """Whether zones prove a drive in one manner."""
    drive = drive_of(text)
    looking = looking_at(drive)
    waiting = frozenset(name for name in looking.carriers if drive.carriers[name].update.value != "at once")
    firmware = Firmware(drive, waiting, looking.held if waiting else frozenset(), punctual=True)
    return first_hazard(Projection(looking, firmware, manner).initial(), silent) is None


# A carrier's phase lives on while no switch follows it


def rejoined(dead: int) -> str:
    """A leaves k; 3 ps later B joins ~k; in between no switch follows the carrier.

    A is last on at t with the reference high, so ~k comes on no sooner than the dead time after t, if the reference
    just falls at t. 7 - 2 = 5 ps are needed, and the 3 ps between the modes are too few.
    """
    moves = "  start i\n  i -> m when go\n  m -> z when stop\n  z -> n after 3 ps"
    carrier = f"carriers\n  k 50 GHz duty 50 % dead time {dead} ps"
    return leg("i off off\nm k off\nz off off\nn off ~k", moves, more=carrier)


@pytest.mark.parametrize(("dead", "right"), [(6, SAFE), (5, SAFE), (4, 1), (3, 2), (2, 2), (0, 2)])
def test_phase_lives_on(dead: int, right: Answer) -> None:
    """Below a dead time of 3 ps it is the 3 ps between the modes that count: 7 - 2 - 3 = 2."""
    assert answer(rejoined(dead)) == right
    assert judged(rejoined(dead)) == right


def test_phase_is_not_forgotten() -> None:
    """Refutes: a carrier that nobody follows may be anywhere afterwards. That is a false alarm here."""
    assert not with_manner(rejoined(5), Manner(forget=True, cut=False, measure=False))
    assert with_manner(rejoined(5), Manner(forget=False, cut=False, measure=False))


def test_phase_does_not_start_anew() -> None:
    """Refutes: a carrier starts its cycle when the first switch joins. Then ~k would come 10 ps after that at best."""
    assert answer(rejoined(4)) == 1


# A difference raises no further than the switch's own turn-off


def pulsed(length: int) -> str:
    """A is on for good, B is turned on for a pulse. A through p, B through p and q.

    Of p the turn-off exceeds a turn-on by 5 at most, q on takes 10: the excess of A's turn-off over B's turn-on is
    5 - 10 = -5, so that B would follow A's turn-off (20) at 25 at the soonest; but its own turn-off takes 20 + 1 = 21.
    """
    parts = "p on 2 ps to 3 ps off 4 ps to 20 ps difference at most 5 ps\nq on 10 ps off 1 ps"
    moves = f"  start i\n  i -> a when go earliest 60 ps\n    set B on\n    wait {length} ps\n    set B off"
    return leg("i on off\na on off", moves, parts=parts, paths="A through p\nB through p, q")


@pytest.mark.parametrize(("length", "right"), [(0, SAFE), (1, 1), (3, 3), (4, 4)])
def test_short_pulse_survives_the_difference(length: int, right: Answer) -> None:
    """Refutes: B cannot conduct before 20 + 5 = 25 ps. Prolonged by 21, a pulse of up to 4 ps would vanish then."""
    assert answer(pulsed(length)) == right
    assert judged(pulsed(length)) == right


# A margin is not a longer turn-off


def between(off: int) -> str:
    """A is on for 4 ps, off for 4 and on for 4; it takes 5 ps to turn on. B is on from 8 to 11, at once both ways."""
    moves = (
        "  start i\n  i -> j when go\n    set A on\n    wait 4 ps\n    set A off\n    wait 4 ps\n    set A on, B on\n"
        "    wait 3 ps\n    set B off\n    wait 1 ps"
    )
    parts = f"p on 5 ps off {off} ps\nq on 0 ps off 0 ps"
    return leg("i off off\nj off off", moves, parts=parts, paths="A through p\nB through q")


def prolonged(spans: list[tuple[int, int | None]], margin: int) -> list[tuple[int, int]]:
    """Each end later by the margin, afterwards."""
    return [(start, end + margin) for start, end in spans if end is not None]


def test_margin_is_not_a_longer_turn_off() -> None:
    """Refutes: the margin is how much longer the turn-offs could be, within which the drive is still proven.

    With a turn-off of 2 ps A can conduct in (5, 6) and (13, 14). A margin of 2 ps ends these at 8 and 16: B, on from 8
    to 11, is not met. A turn-off of 4 ps joins both commands, so that A can conduct from 5 to 16 and meets B for 3 ps.
    """
    commands: list[tuple[int, int | None]] = [(0, 4), (8, 12)]
    assert prolonged(stretches(commands, Delays(5, 2)), 2) == [(5, 8), (13, 16)]
    assert stretches(commands, Delays(5, 4)) == [(5, 16)]
    for off, right in ((2, SAFE), (3, SAFE), (4, 3)):
        assert answer(between(off)) == right
        assert judged(between(off)) == right


# Longer is not always safer


def refreshed(pause: int) -> str:
    """One time in two places: how long B is refreshed while A is on, and the pause before A comes on after B.

    B turns on in 9 ps and off in 3: of a refresh of D there are D + 3 - 9 left, none up to D = 6. A turns on in 2 ps:
    after B went off 3 - 2 = 1 must pass.
    """
    moves = (
        f"  start a\n  a -> a when tick earliest 30 ps\n    set B on\n    wait {pause} ps\n    set B off\n"
        f"  a -> b when swap earliest 30 ps\n    set A off\n    wait 30 ps\n"
        f"  b -> a when back earliest 30 ps\n    set B off\n    wait {pause} ps"
    )
    parts = "p on 2 ps off 7 ps\nq on 9 ps off 3 ps"
    return leg("a on off\nb off on", moves, parts=parts, paths="A through p\nB through q")


@pytest.mark.parametrize(("pause", "right"), [(0, 1), (1, SAFE), (4, SAFE), (6, SAFE), (7, 1), (9, 3)])
def test_longer_is_not_always_safer(pause: int, right: Answer) -> None:
    """Refutes: whatever is safe stays safe with a longer wait. Both ends of what is safe are ends."""
    assert answer(refreshed(pause)) == right
    assert judged(refreshed(pause)) == right


# The screen's third condition, strict


def slotted(before: int, after: int) -> str:
    """A off, then a pulse of B of no length, then A on again.

    A: in 2, out 7; B: in 3, out 4. First condition: `before` ≥ 7 - 3 = 4. Second: `after` ≥ 4 - 2 = 2. Third: their sum
    > 7; else A's stretches touch or overlap once prolonged, A can conduct throughout, and B can for 1 ps.
    """
    steps = f"    set A off\n    wait {before} ps\n    set B on\n    set B off\n    wait {after} ps"
    parts = "p on 2 ps to 3 ps off 5 ps to 7 ps\nq on 3 ps off 4 ps"
    moves = f"  start a\n  a -> a when tick earliest 30 ps\n{steps}"
    return leg("a on off", moves, parts=parts, paths="A through p\nB through q")


@pytest.mark.parametrize(
    ("before", "after", "right", "by_screen"),
    [
        (4, 4, SAFE, True),
        (5, 3, SAFE, True),
        (4, 3, 1, False),  # the sum is 7: equality
        (5, 2, 1, False),
        (4, 2, 1, False),  # the sum is less
    ],
)
def test_third_condition_is_strict(before: int, after: int, right: Answer, by_screen: bool) -> None:
    """Refutes: two conditions, each for one order, are enough; and: the third one holds with equality as well."""
    assert settled_by_screen(slotted(before, after)) is by_screen
    assert answer(slotted(before, after)) == right
    assert judged(slotted(before, after)) == right


# Long dwells are cut neither short nor where time and carrier belong together


def locked(dwell: int, *, quiet: int = 200) -> str:
    """A dwell whose length stands in an exact relation to the carrier's period.

    In w a write waits for the next rise to put A on k. If a break input comes after that rise, A is on k for good
    (`keep`), and since w lasts 4 ps the reference is then high for 0 to 4 ps; if it comes before, the write is
    cancelled and A stays off. So when z is left, A is off or the reference is `dwell` + (0 to 4) ps into its cycle of
    20, high for 10. B comes on at that instant: A must have been low for 8 - 3 = 5 ps, and not rise at the instant.
    """
    rows = "i off off\nw k off\nz keep off\nn off on"
    moves = f"  start i\n  i -> w when go earliest {quiet} ps\n  w -> i after 4 ps\n  z -> n after {dwell} ps"
    carrier = "carriers\n  k 50 GHz duty 50 % updates at rise"
    return leg(rows, moves, parts="p on 3 ps off 8 ps", more=carrier, trips="  stop from w -> z at once")


@pytest.mark.parametrize(
    ("dwell", "right"),
    [
        (214, 1),  # low for 4 to 8 ps
        (215, SAFE),  # low for 5 to 9 ps
        (216, 15),  # low for 10: A may rise first, is on for 10 more, so in (3, 18), and B can conduct from 3
        (234, 1),
        (235, SAFE),
        (236, 15),
    ],
)
def test_timed_dwell_keeps_the_phase(dwell: int, right: Answer) -> None:
    """Refutes: every dwell may be cut to a fixed length, timed ones too.

    Cut to 2 · (8 + 20) + 1 + 2 · 20 = 97 ps, A were low for 7 to 11 ps or on: an alarm for 215, and no difference
    between the three.
    """
    assert answer(locked(dwell)) == right
    assert judged(locked(dwell)) == right


def test_timed_dwell_is_not_cut() -> None:
    """The cut leaves the timed stay alone, and shortens the one that ends by an event without a bound."""
    drive = drive_of(locked(215))
    looking = looking_at(drive)
    firmware = Firmware(drive, frozenset("k"), looking.held, punctual=True)
    cutting = Cutting(looking, [Reference(one) for one in drive.carriers.values()])
    start = firmware.start()
    dwelling = start._replace(mode="z")
    kept = cutting.cut(firmware.edges(dwelling), firmware.deadline(dwelling))
    assert [(edge.lo, edge.hi) for edge in kept[0]] == [(215, 215)]
    assert kept[1] == 215
    (first,), deadline = cutting.cut(firmware.edges(start), firmware.deadline(start))
    assert (first.hi, deadline) == (None, None)
    assert 8 + 1 + 2 * 20 <= first.lo < 200, "not shorter than the longest delay, 1 and two longest periods"


@pytest.mark.parametrize(("quiet", "right"), [(5, 15), (10, 10), (15, 5), (19, 1), (20, SAFE), (21, SAFE), (60, SAFE)])
def test_long_dwell_is_not_cut_too_short(quiet: int, right: Answer) -> None:
    """Refutes: a dwell may be cut to the longest delay and 1 (9 ps), or to anything short of a period.

    The write that takes A off k waits for a rise, up to 20 ps. Is w entered again Q < 20 ps later, A is still on k, and
    the reference may be only Q ps into its cycle: when z is left, 20 - Q ps less far than it should be. Low for
    5 - (20 - Q) ps, it meets B for 20 - Q; as of Q = 5 it may just rise, and A is on for all its 10 ps.
    """
    assert answer(locked(215, quiet=quiet)) == right
    assert judged(locked(215, quiet=quiet)) == right


def test_only_exact_zones_tell() -> None:
    """What the phase decides is proven by zones, not by the screen."""
    assert proved_by(locked(215)) == "zones"


@pytest.mark.parametrize(("within", "overlap"), [("", "safe"), (" within 0 ps", 3)])
def test_without_within_arrival_and_first_write_are_one_event(within: str, overlap: Answer) -> None:
    """`within 0` lets the interrupted move make its last write in the same instant, between arrival and taking.

    The trip cannot arrive at rest in `md`. With `within 0` it arrives just before A is written on and `md` entered, and
    writes B on in that instant: A and B are then on together for the 2 ps of the trip's wait, and 1 ps more, until both
    have turned off. Without `within` nothing comes between arrival and B's write, and B off again comes before A on.
    """
    text = f"""drive "t"
writes one at a time, 0 ps apart
stage
  rails P N
  leg U A B
parts
  p on 0 ps to 0 ps off 1 ps to 1 ps
paths
  A B through p
modes A B
  ma off off
  mb on off
  md on off
moves
  start ma
  ma -> md when go
    set all off
    wait 1 ps
trips
  t from any but md -> mb{within}
    set B on
    wait 1 ps to 2 ps
    set B off
    wait 1 ps
"""
    assert answer(text) == judged(text) == overlap

"""At the exact boundary a time that leaves margin 0 is safe, and one picosecond less is an overlap of 1 ps.

All answers are derived in the comments, and the judge has to find the same. The default path of `leg` turns on in 2 to
3 ps and off in 4 to 7 ps, so that from one command's going off to the other's coming on 7 - 2 = 5 ps must lie.
"""

from typing import NamedTuple

import pytest
from proofs import SAFE, Answer, answer, judged, leg

from seqcheck.quantities import PICOSECONDS


class Case(NamedTuple):
    """A drive and what must come out."""

    name: str
    text: str
    right: Answer


CASES: list[Case] = []


def case(name: str, text: str, right: Answer) -> None:
    """One more case."""
    CASES.append(Case(name, text, right))


SWAP = "a on off\nb off on"
PAUSE = "a on off\nz off off\nb off on"

# Together with a wait: A goes off at 0 and can conduct until 7; B comes on at W and can conduct from W + 2.
for wait, right in ((6, SAFE), (5, SAFE), (4, 1), (0, 5)):
    steps = f"  start a\n  a -> b when go\n    set A off\n    wait {wait} ps"
    case(f"together, wait {wait}", leg(SWAP, steps), right)

# Two waits in a row add up: 2 + 3 are enough, 2 + 2 are not. So does a step between them that changes nothing.
for first, second, right in ((2, 3, SAFE), (2, 2, 1)):
    steps = f"  start a\n  a -> b when go\n    set A off\n    wait {first} ps\n    set B off\n    wait {second} ps"
    case(f"waits {first} and {second}", leg(SWAP, steps), right)

# A wait before the first write is no time between the two: the row's writes come in one instant.
case("a wait in the wrong place", leg(SWAP, "  start a\n  a -> b when go\n    wait 9 ps"), 5)

# One at a time: the gap is what lies between A's turn-off and B's turn-on.
GO = "  start a\n  a -> b when go"
for gap, right in ((5, SAFE), (4, 1)):
    head = f"writes one at a time, {gap} ps to {gap + 3} ps apart, turn-offs first"
    case(f"turn-offs first, {gap} apart", leg(SWAP, GO, head=head), right)
    # In the table's order too, as long as A's column is the first.
    head = f"writes one at a time, {gap} ps to {gap + 3} ps apart, in table order"
    case(f"table A B, {gap} apart", leg(SWAP, GO, head=head), right)

# With B's column first, B comes on up to 5 + 3 = 8 ps before A goes off: 8 + 7 - 2.
head = "writes one at a time, 5 ps to 8 ps apart, in table order"
case("table B A", leg("a off on\nb on off", GO, head=head, columns="B A"), 13)
# In any order: that is one of the orders. Not said: any order is what counts.
case("any order", leg(SWAP, GO, head="writes one at a time, 5 ps to 8 ps apart, in any order"), 13)
case("no order", leg(SWAP, GO, head="writes one at a time, 5 ps to 8 ps apart"), 13)

# Turn-ons first is right for paths that turn on later than off: B on at 0 can conduct from 7; A off at G can until
# G + 2. Here the longest gap counts, and how late firmware can be is added to it.
LATE_ON = "p on 7 ps to 8 ps off 1 ps to 2 ps"
for gap, late, right in ((5, 0, SAFE), (6, 0, 1), (3, 2, SAFE), (3, 3, 1)):
    for order in ("turn-ons first", "in any order"):
        head = f"clock 1 GHz, late by at most {late} ps\nwrites one at a time, up to {gap} ps apart, {order}"
        case(f"{order}, up to {gap}, {late} late", leg(SWAP, GO, head=head, parts=LATE_ON), right)

# By port: pins of two ports are one gap apart; on one port they change in one instant, 7 - 2 = 5 ps too soon.
PINS = "pins\n  A G0 active high rests low{}\n  B G1 active high rests low{}"
for gap, ports, right in ((5, "XY", SAFE), (4, "XY", 1), (9, "XX", 5)):
    named = [f" port {port}" for port in ports]
    head = f"writes by port, {gap} ps to {gap + 1} ps apart, turn-offs first"
    case(f"by port {ports}, {gap} apart", leg(SWAP, GO, head=head, more=PINS.format(*named)), right)
# A pin without a port is alone.
head = "writes by port, 4 ps apart, turn-offs first"
case("by port, no ports", leg(SWAP, GO, head=head, more=PINS.format("", "")), 1)

# The dead time of a carrier: ~k comes on that long after k went off. 20 ps of period, high for 6 to 14 ps.
CARRIED = "i off off\nm k ~k"
TURNS = "  start i\n  i -> m when go\n  m -> i when stop"
UPDATES = ("at once", "at rise", "within a period")
for update in UPDATES:
    for dead, right in ((5, SAFE), (4, 1)):
        carrier = f"carriers\n  k 50 GHz duty 30 % to 70 % dead time {dead} ps to {dead + 1} ps updates {update}"
        case(f"dead time {dead}, {update}", leg(CARRIED, TURNS, more=carrier), right)

# How long A can stay on a carrier after it was taken off. 20 ps, high for exactly 10 ps, no dead time. B comes on
# (constant, so at once) W after A was written off.
# At once: A goes off as written, W = 5.
# At rise: a write that comes just after a rise finds 10 ps of high left; then A is low until the rise that takes it
#   off without a glitch: W = 10 + 5.
# Within a period: A may follow for 20 ps more, and be high at the end of them: W = 20 + 5.
for update, needed in (("at once", 5), ("at rise", 15), ("within a period", 25)):
    carrier = f"carriers\n  k 50 GHz duty 50 % updates {update}"
    for wait, right in ((needed, SAFE), (needed - 1, 1)):
        steps = f"  start i\n  i -> m when go\n  m -> b when swap\n    set A off\n    wait {wait} ps"
        case(f"leaving, {update}, wait {wait}", leg("i off off\nm k off\nb off on", steps, more=carrier), right)

# A change from k to ~k is held too: A and B change places. k and ~k are exact complements without a dead time of
# their own; whoever leaves at a rise was low (A, k: low before) or goes off with the edge (B, ~k), and the other one
# comes on with it. With a dead time D the output that starts with the rise comes D later: D = 5 is just enough.
for dead, right in ((5, SAFE), (4, 1)):
    carrier = f"carriers\n  k 50 GHz duty 50 % dead time {dead} ps updates at rise"
    moves = "  start i\n  i -> m when go\n  m -> n when swap"
    case(f"swap at rise, dead time {dead}", leg("i off off\nm k ~k\nn ~k k", moves, more=carrier), right)

# `difference at most 3 ps`: one sample's turn-off exceeds another's turn-on by 3 ps at most, not by 7 - 2 = 5.
BOUNDED = "p on 2 ps to 3 ps off 4 ps to 7 ps difference at most 3 ps"
for wait, right in ((3, SAFE), (2, 1)):
    steps = f"  start a\n  a -> b when go\n    set A off\n    wait {wait} ps"
    case(f"difference, wait {wait}", leg(SWAP, steps, parts=BOUNDED), right)
# Only what stands on both paths counts so. A: p, then f (off up to 2); B: p, then g (on from 3).
# Excess: 3 + 2 - 3 = 2. B can follow A's going off (9 after its command) at 9 - 2 = 7 at the soonest, which is less
# than B's own longest turn-off 7 + 1 = 8: 9 - 7 = 2 must lie between. Without `difference`: 9 - 5 = 4.
MIXED = "\nf on 1 ps off 1 ps to 2 ps\ng on 3 ps off 1 ps"
for kind, needed in ((BOUNDED, 2), (BOUNDED.partition(" difference")[0], 4)):
    for wait, right in ((needed, SAFE), (needed - 1, 1)):
        steps = f"  start a\n  a -> b when go\n    set A off\n    wait {wait} ps"
        text = leg(SWAP, steps, parts=kind + MIXED, paths="A through p, f\nB through p, g")
        case(f"parts on one path, need {needed}, wait {wait}", text, right)

# A released pin stays as it was for up to 6 ps: 6 + 5 must lie before B comes on. It adds to the path of A only.
RESTING = "pins\n  A G0 active high rests low after 3 ps to 6 ps\n  B G1 active high rests low after 3 ps to 6 ps"
for wait, right in ((11, SAFE), (10, 1)):
    steps = f"  start a\n  a -> b when go\n    set A free\n    wait {wait} ps"
    case(f"released, wait {wait}", leg("a on off\nb free on", steps, more=RESTING), right)
# Written off again before it has come to rest, it is off at that moment.
for wait, right in ((5, SAFE), (4, 1)):
    steps = f"  start a\n  a -> b when go\n    set A free\n    wait 2 ps\n    set A off\n    wait {wait} ps"
    case(f"released and written, wait {wait}", leg(SWAP, steps, more=RESTING), right)

# The time of a trip. It may arrive in a only; a is left 8 ps before A comes on in b, with the trip in hand for W ps
# (and as late as firmware can be). Taken before, it stops the move; taken at 8, A has a pulse of no length, can
# conduct from 6 to 7 after it, and B, turned on by the trip, from 2 on: 1 ps. Each ps later is one more.
SLOW_A = "p on 6 ps off 7 ps\nq on 2 ps off 2 ps"
for within, late, right in ((7, 0, SAFE), (8, 0, 1), (9, 0, 2), (5, 2, SAFE), (5, 3, 1)):
    head = f"clock 1 GHz, late by at most {late} ps\nwrites together"
    rows = "a off off\nm off off\nb on off\nt off on"
    moves = "  start a\n  a -> m when go\n  m -> b after 8 ps"
    trip = f"  x from a -> t within {within} ps"
    text = leg(rows, moves, head=head, parts=SLOW_A, paths="A through p\nB through q", trips=trip)
    case(f"trip within {within}, {late} late", text, right)

# Trips write like moves. At once: what stands before the wait in one instant, the rest as `writes` says.
for kind in ("at once", "within 3 ps", ""):
    for wait, right in ((5, SAFE), (4, 1)):
        trip = f"  x from a -> b {kind}\n    set A off\n    wait {wait} ps"
        case(f"trip '{kind}', wait {wait}", leg(PAUSE, "  start a\n  a -> z when go", trips=trip), right)
case("trip at once, no wait", leg(PAUSE, "  start a\n  a -> z when go", trips="  x from a -> b at once"), 5)
# One at a time, a trip `at once` makes its first writes in one instant all the same; any other keeps the gap.
for kind, right in (("at once", 5), ("within 3 ps", SAFE)):
    head = "writes one at a time, 5 ps apart, turn-offs first"
    text = leg(PAUSE, "  start a\n  z -> a when go", head=head, trips=f"  x from a -> b {kind}")
    case(f"one at a time, trip {kind}", text, right)
# But the gap is one between writes of one run: a trip in hand turns B on as soon as a move has turned A off.
case("trip after a move", leg(PAUSE, "  start a\n  a -> z when go", head=head, trips="  x from a -> b within 3 ps"), 5)

# How long a mode lasts: A goes off on entering z, B comes on when z is left.
for time, right in ((5, SAFE), (4, 1)):
    moves = "  start a\n  a -> z when go\n  z -> b "
    case(f"loop {time}", leg(PAUSE, moves + "when go_on", head=f"writes together\nloop at least {time} ps"), right)
    case(f"earliest {time}", leg(PAUSE, f"{moves}when go_on earliest {time} ps"), right)
    case(f"after {time}", leg(PAUSE, f"{moves}after {time} ps to 9 ps"), right)
    head = "writes together\nloop at least 3 ps"
    case(f"loop 3, earliest {time}", leg(PAUSE, f"{moves}when go_on earliest {time} ps", head=head), right)
    # A wait at the end of a move belongs to it: z is entered after it, and counts from there.
    moves = f"  start a\n  a -> z when go\n    set A off\n    wait 2 ps\n  z -> b when go_on earliest {time - 2} ps"
    case(f"trailing wait and earliest {time - 2}", leg(PAUSE, moves), right)
# `loop` does not hold timed moves back.
head = "writes together\nloop at least 9 ps"
case("loop and after", leg(PAUSE, "  start a\n  a -> z when go\n  z -> b after 4 ps", head=head), 1)

# The longest stay: both are commanded on for up to D before A goes off, which these paths bear for 5 ps.
for most, right in ((5, SAFE), (6, 1)):
    moves = f"  start a\n  a -> ab when go\n  ab -> b after up to {most} ps"
    case(f"after up to {most}", leg("a on off\nab on on\nb off on", moves, parts=LATE_ON), right)

# A clock that is right within 20 %: of 6 ps 6 / 1.2 = 5 ps are left, of 5 ps 4.17, which is 4 whole ones.
for wait, right in ((6, SAFE), (5, 1)):
    head = "clock 1 GHz within 20 %\nwrites together"
    steps = f"  start a\n  a -> b when go\n    set A off\n    wait {wait} ps"
    case(f"tolerance, wait {wait}", leg(SWAP, steps, head=head), right)
    moves = f"  start a\n  a -> z when go\n  z -> b when go_on earliest {wait} ps"
    case(f"tolerance, earliest {wait}", leg(PAUSE, moves, head=head), right)
# The other end: up to 4 ps become 4 / 0.8 = 5, up to 4.1 ps 5.125, which 6 whole ones hold.
for longest, right in (("4", SAFE), ("4.1", 1)):
    head = f"clock 1 GHz within 20 %\nwrites one at a time, up to {longest} ps apart, turn-ons first"
    case(f"tolerance, up to {longest}", leg(SWAP, GO, head=head, parts=LATE_ON), right)
# A carrier's dead time is kept by the clock as well.
for pause, right in (("5 ps", 1), ("6 ps", SAFE)):
    carrier = f"carriers\n  k 10 GHz duty 30 % to 70 % dead time {pause}"
    text = leg(CARRIED, TURNS, head="clock 1000 GHz within 20 %\nwrites together", more=carrier)
    case(f"tolerance, carrier's dead time {pause}", text, right)

# An interlock with a dead time of its own: B passes when A has been commanded off for D.
for pause, right in (("5 ps", SAFE), ("4 ps", 1), ("4 ps to 9 ps", 1), ("0 ps", 5)):
    text = leg(SWAP, GO, paths=f"A B through p\ninterlock A B dead time {pause}", head="writes together")
    case(f"interlock {pause}", text, right)
# Hardware times are as they are: 5 ps of dead time in a driver are 5 ps whatever the clock does.
locked = "A B through p\ninterlock A B dead time 5 ps"
text = leg(SWAP, GO, paths=locked, head="clock 1 GHz within 20 %\nwrites together")
case("tolerance, interlock", text, SAFE)


@pytest.mark.parametrize(("text", "right"), [one[1:] for one in CASES], ids=[one.name for one in CASES])
def test_boundary(text: str, right: Answer) -> None:
    """The prover and the judge give the answer that was derived."""
    assert answer(text) == right
    assert judged(text) == right


def test_every_case_once() -> None:
    """A name that is there twice would hide that a case is missing."""
    assert len({one.name for one in CASES}) == len(CASES)


@pytest.mark.parametrize("unit", ["ps", "ns", "us", "ms", "s"])
def test_boundary_in_every_unit(unit: str) -> None:
    """The boundary is one picosecond wide in whatever unit a file is written."""
    size = int(PICOSECONDS[unit])
    parts = f"p on 2 {unit} to 3 {unit} off 4 {unit} to 7 {unit}"
    steps = "  start a\n  a -> b when go\n    set A off\n    wait {} ps"
    assert answer(leg(SWAP, steps.format(5 * size), parts=parts)) == SAFE
    assert answer(leg(SWAP, steps.format(5 * size - 1), parts=parts)) == 1

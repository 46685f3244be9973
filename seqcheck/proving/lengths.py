"""The automata of rules about lengths: whether a command lasts too short a time, a mode follows another too soon.

What is timed is YOUNG until its age is such that nothing asks for it any more, one picosecond below the limit: what
ends then or before is HIT, with the clock still telling how long it has lasted. What ends later finds it LONG. At the
age itself both are gone through, so that nothing is missed and what is HIT is too short.

And that of a trip: WATCHED from its arrival on, LATE when its time is over, until its target or `reset`
is left.
"""

from seqcheck.drive import RESET, Drive, Move, Trip
from seqcheck.firmware import Deed, State
from seqcheck.hazards import Clearing, Following
from seqcheck.proving.conduction import HIT, IDLE, LATE, LONG, WATCHED, YOUNG, Turn
from seqcheck.verdict import Act


def settled(wanted: bool, unknown: bool) -> int:
    """The automaton of a command at time 0; what began before is not timed."""
    return HIT if unknown else LONG if wanted else IDLE


def pulsed(state: int, wanted: bool, unknown: bool) -> Turn:
    """The automaton after the command may have changed; one that is unknown may be a pulse of no length."""
    if state == HIT:
        return Turn(HIT, False, False)
    if unknown:
        return Turn(HIT, True, False)
    if wanted:
        return Turn(YOUNG, True, False) if state == IDLE else Turn(state, False, False)
    return Turn(HIT if state == YOUNG else IDLE, False, False)


def followed(drive: Drive, asks: Following, state: int, before: State, deeds: tuple[Deed, ...]) -> Turn:
    """The automaton after deeds of the firmware, which stood as `before`."""
    runs: tuple[Move | Trip, ...] = (*drive.moves, *drive.trips)
    anew = False
    for deed in deeds:
        if deed.act is Act.BEGINS and before.run < 0 and before.mode == asks.left:
            state, anew = YOUNG, True
        elif deed.act is Act.ENTERS and runs[deed.number].target == asks.entered and state == YOUNG:
            return Turn(HIT, anew, False)
    return Turn(state, anew, False)


def watched(drive: Drive, asks: Clearing, state: int, before: State, deeds: tuple[Deed, ...]) -> Turn:
    """The automaton of a trip after deeds of the firmware, which stood as `before`.

    Of several arrivals the first is watched: its time is over before that of the others, and they all cease to be
    watched together.
    """
    anew = False
    number = next(number for number, trip in enumerate(drive.trips) if trip.name == asks.trip)
    trip = drive.trips[number]
    arrival = (Act.BEGINS, len(drive.moves) + number) if trip.at_once else (Act.ARRIVES, number)
    for deed in deeds:
        if deed.act is Act.BEGINS and before.run < 0 and before.mode in (trip.target, RESET):
            state = IDLE
        if (deed.act, deed.number) == arrival and state == IDLE:
            state, anew = (WATCHED if asks.limit else LATE), True
    return Turn(state, anew, False)

"""The timer automaton of one literal: from its command to the possibility that it is so.

OUT and ENTERING and BLIP are not possible, IN and LEAVING are. `rise` and `fall` are the literal's delays. A step that
takes no time is taken at once where nothing can come between.

IDLE to HIT are the states of a question about a length that must not be too short (see lengths): what is asked is
so, at once, in HIT. IDLE, WATCHED and LATE are those of a question about a trip: in LATE its time is over.
"""

from typing import NamedTuple

from seqcheck.hazards import Delays

OUT, ENTERING, IN, LEAVING, BLIP, IDLE, YOUNG, LONG, HIT, WATCHED, LATE = range(11)
WANTED = (False, True, True, False, False)
POSSIBLE = (False, False, True, True, False, False, False, False, True, False, True)


class Turn(NamedTuple):
    """What a change of the command does: the state after it, and which of the two ages starts anew."""

    state: int
    resets_rise: bool
    resets_fall: bool


def turned(state: int, wanted: bool, delays: Delays) -> Turn:
    """The command has become as wanted, or no longer is."""
    if wanted == WANTED[state]:
        return Turn(state, False, False)
    if wanted:
        if state == LEAVING:
            return Turn(IN, False, False)
        if delays.rise == 0:
            return Turn(IN, False, False)
        return Turn(ENTERING, state == OUT, False)
    return Turn(BLIP if state == ENTERING else LEAVING, False, True)


def ages(state: int) -> tuple[bool, bool]:
    """Which ages run in a state: since the command came, and since it went."""
    return state in (ENTERING, BLIP, YOUNG, HIT, WATCHED), state in (LEAVING, BLIP)


def timeouts(state: int) -> tuple[tuple[bool, int], ...]:
    """What time alone does: (whether the age since the command came decides, the state after it)."""
    if state == ENTERING:
        return ((True, IN),)
    if state == LEAVING:
        return ((False, OUT),)
    if state == BLIP:
        return ((True, LEAVING), (False, OUT))
    if state == YOUNG:
        return ((True, LONG),)
    if state == WATCHED:
        return ((True, LATE),)
    return ()

"""When a switch can conduct, twice: the automaton over its command, and the definition by stretches of time.

The automaton is what the judge runs; the definition is here so that a test can hold the one against the other.
"""

from seqcheck.hazards import Delays

OUT, ENTERING, IN, LEAVING, BLIP = "out", "entering", "in", "leaving", "blip"

Monitor = tuple[str, int, int]
"""State, time since it became wanted, time since it ceased to be; a time that the state does not look at is 0."""

Stretch = tuple[int, int | None]
"""A stretch of time in ps with both ends; None: without end."""


def settled(wanted: bool) -> Monitor:
    """The automaton of a command that has been so for ever."""
    return (IN, 0, 0) if wanted else (OUT, 0, 0)


def heard(monitor: Monitor, wanted: bool) -> Monitor:
    """The automaton after the command has become `wanted`, or has ceased to be; nothing changes if it was so."""
    state, since_in, _ = monitor
    if wanted:
        after = {OUT: (ENTERING, 0, 0), LEAVING: (IN, 0, 0), BLIP: (ENTERING, since_in, 0)}
    else:
        after = {ENTERING: (BLIP, since_in, 0), IN: (LEAVING, 0, 0)}
    return after.get(state, monitor)


def due(monitor: Monitor, delays: Delays) -> Monitor:
    """The automaton once nothing more happens at this instant.

    Its own moves come last, after all changes of the command at the instant. That gives the most possibility: stretches
    that touch are joined, and joining is what the definition says.
    """
    state, since_in, since_out = monitor
    if state == ENTERING and since_in == delays.rise:
        return (IN, 0, 0)
    if state == BLIP and since_out == delays.fall:
        return (OUT, 0, 0)
    if state == BLIP and since_in == delays.rise:
        return (LEAVING, 0, since_out)
    if state == LEAVING and since_out == delays.fall:
        return (OUT, 0, 0)
    return monitor


def aged(monitor: Monitor) -> Monitor:
    """The automaton 1 ps later; only what its state looks at grows, so no age passes the delay it is compared with."""
    state, since_in, since_out = monitor
    if state == ENTERING:
        return (state, since_in + 1, 0)
    if state == LEAVING:
        return (state, 0, since_out + 1)
    if state == BLIP:
        return (state, since_in + 1, since_out + 1)
    return monitor


def can(monitor: Monitor) -> bool:
    """Whether the literal is possible."""
    return monitor[0] in (IN, LEAVING)


def stretches(wanted: list[Stretch], delays: Delays) -> list[Stretch]:
    """The definition: prolong each stretch, join those that touch, take the first `rise` off each that is left.

    `wanted` are the stretches of the command in order; one of no length counts. Stretches of no length that are left
    over are dropped, since nothing happens in them.
    """
    joined: list[Stretch] = []
    for start, end in wanted:
        longer = None if end is None else end + delays.fall
        if joined and (joined[-1][1] is None or joined[-1][1] >= start):
            joined[-1] = (joined[-1][0], longer)
        else:
            joined.append((start, longer))
    cut = [(start + delays.rise, end) for start, end in joined]
    return [(start, end) for start, end in cut if end is None or start < end]

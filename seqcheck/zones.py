"""Difference-bound matrices over whole picoseconds (Dill 1989).

A zone is a flat list of (n+1)² numbers: entry [i][j] bounds x_i − x_j from above, where x_0 is always 0. All
constraints are closed, and over whole numbers a strict `x > c` is `x ≥ c + 1`. Every zone here is in its canonical
(closed) form unless a function says otherwise; an empty zone is None.
"""

from collections.abc import Sequence

Zone = list[int]

INFINITE = 1 << 5000
"""Stands for no bound; above every sum of times that a file can hold, since the reader takes none of over 4096 bits."""

FRESH = -1
"""In a renaming: a clock of which nothing is known, but that it is not negative."""


def closed(zone: Zone, size: int) -> Zone | None:
    """The canonical form of any matrix (Floyd and Warshall), or None if it is empty."""
    for mid in range(size):
        row = zone[mid * size : mid * size + size]
        for start in range(0, size * size, size):
            first = zone[start + mid]
            if first >= INFINITE:
                continue
            for end in range(size):
                if row[end] < INFINITE and first + row[end] < zone[start + end]:
                    zone[start + end] = first + row[end]
    return None if any(zone[place] < 0 for place in range(0, size * size, size + 1)) else zone


def limited(zone: Zone, size: int, upper: int, lower: int, bound: int) -> Zone | None:
    """The zone with x_upper − x_lower ≤ bound as well, canonical again; a new list if anything changed."""
    if zone[upper * size + lower] <= bound:
        return zone
    if zone[lower * size + upper] + bound < 0:
        return None
    zone = zone[:]
    tail = zone[lower * size : lower * size + size]
    for start in range(0, size * size, size):
        first = zone[start + upper]
        if first >= INFINITE:
            continue
        first += bound
        if first >= zone[start + lower]:
            continue  # no bound of this row follows more closely than the one that it has
        for end in range(size):
            if tail[end] < INFINITE and first + tail[end] < zone[start + end]:
                zone[start + end] = first + tail[end]
    return zone


def renamed(zone: Zone, size: int, sources: Sequence[int]) -> Zone:
    """The zone over other clocks: each is an old one (its number), 0 if it was reset just now, or FRESH."""
    picks = (0, *sources)
    if FRESH not in picks:
        return [zone[row * size + column] for row in picks for column in picks]
    result: Zone = []
    for new, row in enumerate(picks):
        for place, column in enumerate(picks):
            if new == place:
                result.append(0)
            elif row == FRESH:
                result.append(INFINITE)
            else:
                result.append(zone[row * size + (0 if column == FRESH else column)])
    return result


def delayed(zone: Zone, size: int, bounds: Sequence[tuple[int, int]]) -> Zone | None:
    """All that the zone becomes as time passes while each clock stays within its bound; in place.

    Bounds are (clock, most). The greatest value of every clock follows from the bounded ones in one step, since their
    differences do not change as time passes.
    """
    if not bounds:
        for start in range(size, size * size, size):
            zone[start] = INFINITE
        return zone
    first_row = zone[:size]
    for start in range(size, size * size, size):
        most = INFINITE
        for clock, bound in bounds:
            apart = zone[start + clock]
            if apart < INFINITE and apart + bound < most:
                most = apart + bound
        zone[start] = most
        if most >= INFINITE:
            continue
        for end in range(1, size):
            if most + first_row[end] < zone[start + end]:
                zone[start + end] = most + first_row[end]
        if zone[start + start // size] < 0:
            return None
    return zone


def includes(large: Zone, small: Zone) -> bool:
    """Whether every point of `small` is one of `large`."""
    return all(map(int.__ge__, large, small))


def extrapolated(zone: Zone, size: int, lower: Sequence[int], upper: Sequence[int]) -> Zone:
    """The zone widened by lower and upper bounds (Behrmann, Bouyer, Larsen and Pelánek 2006, Extra_LU+).

    `lower[i]` is the greatest constant that clock i is compared with from below, `upper[i]` from above, place 0
    unused; INFINITE keeps a clock exact. What can be reached stays the same, as no guard compares two clocks.
    """
    first_row = zone[:size]
    far = [-least > most for least, most in zip(first_row, lower, strict=True)]
    high = [-least > most for least, most in zip(first_row, upper, strict=True)]
    high[0] = False
    widened: list[tuple[int, list[int]]] = []
    for clock in range(1, size):
        start = clock * size
        loose = far[clock]
        limit = lower[clock]
        gone = []
        for end in range(size):
            value = zone[start + end]
            if value < INFINITE and (loose or value > limit or high[end]) and end != clock:
                gone.append(end)
        if gone:
            widened.append((start, gone))
        if high[clock]:
            zone[clock] = -upper[clock] - 1  # nothing else is tied to it now, so that this alone needs no closing
    for start, gone in widened:
        for end in gone:
            zone[start + end] = INFINITE
    if widened:
        _close(zone, size, widened)
    return zone


def _close(zone: Zone, size: int, widened: Sequence[tuple[int, list[int]]]) -> None:
    """The canonical form again, where only these entries (the start of a row, and places in it) have become wider.

    No other can follow from them, since none is as small as before; so only they are worked out, as `closed` does.
    """
    for mid in range(size):
        row = zone[mid * size : mid * size + size]
        for start, gone in widened:
            first = zone[start + mid]
            if first >= INFINITE:
                continue
            for end in gone:
                if row[end] < INFINITE and first + row[end] < zone[start + end]:
                    zone[start + end] = first + row[end]

"""The checker's own arithmetic of zones: rows of bounds on differences of clocks.

`rows[i][j]` bounds clock i minus clock j from above; clock 0 is always 0. A zone that the checker goes on from is tight
(no bound follows from others that is smaller); one that it compares with may be any table, since a tight zone lies in
it exactly if each bound does. Bounds are whole numbers, never rounded, or NO_BOUND.
"""

from collections.abc import Iterable, Sequence
from itertools import chain
from math import inf
from operator import le

Row = list[float]
Rows = list[Row]

NO_BOUND = inf
"""Above every bound, also with any number added."""
UNKNOWN = -1
"""As the origin of a clock: nothing is known of it, but that it is not negative."""


def table(size: int, bounds: Iterable[tuple[int, int, int]]) -> Rows:
    """The table of the given bounds (upper clock, lower clock, most); clocks are never negative."""
    rows: Rows = [[NO_BOUND] * size for _ in range(size)]
    rows[0] = [0] * size
    for clock in range(size):
        rows[clock][clock] = 0
    for upper, lower, most in bounds:
        if most < rows[upper][lower]:
            rows[upper][lower] = most
    return rows


def tight(rows: Rows) -> Rows | None:
    """The same zone with every bound as small as the others make it; None if it is empty."""
    rows = rows[:]
    for middle, via in enumerate(rows):
        for place, row in enumerate(rows):
            way = row[middle]
            if way != NO_BOUND and place != middle:
                rows[place] = [old if old <= way + end else way + end for old, end in zip(row, via, strict=True)]
    return None if any(row[clock] < 0 for clock, row in enumerate(rows)) else rows


def cut(rows: Rows, upper: int, lower: int, most: int) -> Rows | None:
    """A tight zone with one more bound, tight again; None if nothing is left."""
    if rows[upper][lower] <= most:
        return rows
    ahead = rows[lower]
    if ahead[upper] + most < 0:
        return None
    result = []
    for row in rows:
        way = row[upper] + most
        if way < row[lower]:
            row = [old if old <= way + end else way + end for old, end in zip(row, ahead, strict=True)]
        result.append(row)
    return result


def moved(rows: Rows, origins: Sequence[int]) -> Rows:
    """The zone over new clocks: each was an old one (its number), is 0 now (0), or is UNKNOWN."""
    picks = (0, *origins)
    known = UNKNOWN not in picks
    result = []
    for place, origin in enumerate(picks):
        if origin == UNKNOWN:
            row = [NO_BOUND] * len(picks)
            row[place] = 0
        else:
            old = rows[origin]
            row = [old[other] for other in picks] if known else [old[0 if one == UNKNOWN else one] for one in picks]
            row[place] = 0
        result.append(row)
    return result


def later(rows: Rows, limits: Sequence[tuple[int, int]]) -> Rows | None:
    """All that a tight zone becomes while time passes, as long as each limited clock is at most its limit.

    None where a limit is overrun to begin with. Bounds of differences stay, upper bounds of clocks go, limits are put.
    """
    result: Rows | None = rows
    for clock, most in limits:
        if result is not None:
            result = cut(result, clock, 0, most)
    if result is None:
        return None
    least = [result[0]]
    for row in result[1:]:
        bound = NO_BOUND
        for clock, most in limits:
            if row[clock] + most < bound:
                bound = row[clock] + most
        least.append([bound, *row[1:]])
    return least


def within(small: Rows, large: Rows) -> bool:
    """Whether a tight zone lies in a table."""
    return all(map(le, chain.from_iterable(small), chain.from_iterable(large)))

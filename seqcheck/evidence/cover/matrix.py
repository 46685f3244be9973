"""The checker's own arithmetic of zones: rows of bounds on differences of clocks.

`rows[i][j]` bounds clock i minus clock j from above; clock 0 is always 0. A zone that the checker goes on from is tight
(no bound follows from others that is smaller); one that it compares with may be any table, since a tight zone lies in
it exactly if each bound does.
"""

from collections.abc import Iterable, Sequence
from operator import le

Rows = list[list[int]]

NO_BOUND = 1 << 62
"""Above every sum of times that a file can hold."""
UNKNOWN = -1
"""As the origin of a clock: nothing is known of it, but that it is not negative."""


def table(size: int, bounds: Iterable[tuple[int, int, int]]) -> Rows:
    """The table of the given bounds (upper clock, lower clock, most); clocks are never negative."""
    rows = [[NO_BOUND] * size for _ in range(size)]
    rows[0] = [0] * size
    for clock in range(size):
        rows[clock][clock] = 0
    for upper, lower, most in bounds:
        rows[upper][lower] = min(rows[upper][lower], most)
    return rows


def tight(rows: Rows) -> Rows | None:
    """The same zone with every bound as small as the others make it; None if it is empty."""
    rows = [row[:] for row in rows]
    everyone = range(len(rows))
    for middle in everyone:
        via = rows[middle]
        for row in rows:
            first = row[middle]
            if first == NO_BOUND:
                continue
            for last in everyone:
                if via[last] != NO_BOUND and first + via[last] < row[last]:
                    row[last] = first + via[last]
    return None if any(rows[clock][clock] < 0 for clock in everyone) else rows


def cut(rows: Rows, upper: int, lower: int, most: int) -> Rows | None:
    """A tight zone with one more bound, tight again; None if nothing is left."""
    if rows[upper][lower] <= most:
        return rows
    if rows[lower][upper] + most < 0:
        return None
    ahead = rows[lower]
    result = []
    for row in rows:
        way = row[upper]
        if way == NO_BOUND:
            result.append(row)
            continue
        way += most
        result.append(
            [old if end == NO_BOUND or old <= way + end else way + end for old, end in zip(row, ahead, strict=True)]
        )
    return result


def moved(rows: Rows, origins: Sequence[int]) -> Rows:
    """The zone over new clocks: each was an old one (its number), is 0 now (0), or is UNKNOWN."""
    picks = (0, *origins)
    result = []
    for place, origin in enumerate(picks):
        if origin == UNKNOWN:
            row = [NO_BOUND] * len(picks)
        else:
            old = rows[origin]
            row = [old[0] if other == UNKNOWN else old[other] for other in picks]
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
    result = [row[:] for row in result]
    for row in result[1:]:
        row[0] = NO_BOUND
    for row in result[1:]:
        for clock, most in limits:
            if row[clock] != NO_BOUND and row[clock] + most < row[0]:
                row[0] = row[clock] + most
    return result


def within(small: Rows, large: Rows) -> bool:
    """Whether a tight zone lies in a table."""
    return all(all(map(le, row, wide)) for row, wide in zip(small, large, strict=True))

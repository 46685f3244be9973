"""Zones against sets of points: every operation does to a small zone what its words say of each whole point."""

from collections.abc import Callable, Iterator
from itertools import product
from random import Random

import pytest

from seqcheck.zones import FRESH, INFINITE, Zone, closed, delayed, extrapolated, includes, limited, renamed

MOST = 5
"""Drawn zones reach no further than this in any clock."""
GRID = 14
"""Points are looked at up to here: far beyond every constant, so that what is not bounded shows."""
SEEDS = range(300)

Point = tuple[int, ...]
Draw = Callable[[int], tuple[Random, int, Zone]]


def points(zone: Zone, size: int, most: int = GRID) -> set[Point]:
    """All whole points of a zone with no clock beyond `most`."""
    return {one for one in product(range(most + 1), repeat=size - 1) if _inside(zone, size, one)}


def _inside(zone: Zone, size: int, point: Point) -> bool:
    values = (0, *point)
    return all(values[i] - values[j] <= zone[i * size + j] for i in range(size) for j in range(size))


def raw(rng: Random, size: int) -> Zone:
    """Any matrix in which each clock is from 0 to MOST; mostly not canonical, and sometimes empty."""
    zone = [0] * (size * size)
    for i, j in product(range(size), repeat=2):
        if i == j:
            continue
        if i == 0:
            zone[j] = -rng.randint(0, MOST) if rng.random() < 0.5 else 0
        elif j == 0:
            zone[i * size] = rng.randint(0, MOST)
        else:
            zone[i * size + j] = rng.randint(-3, MOST) if rng.random() < 0.6 else INFINITE
    return zone


def drawn(seed: int) -> tuple[Random, int, Zone]:
    """A canonical zone that is not empty, with one or two clocks (three now and then)."""
    rng = Random(seed)
    size = rng.choice((2, 3, 3, 3, 4)) if seed % 10 == 0 else rng.choice((2, 3))
    while True:
        zone = closed(raw(rng, size), size)
        if zone is not None:
            return rng, size, zone


def wide(seed: int) -> tuple[Random, int, Zone]:
    """The same, but half of the clocks have no upper bound, nor have many differences."""
    rng, size, _ = drawn(seed)
    while True:
        zone = raw(rng, size)
        for clock in range(1, size):
            if rng.random() < 0.5:
                zone[clock * size] = INFINITE
        done = closed(zone, size)
        if done is not None:
            return rng, size, done


def tight(zone: Zone, size: int, inside: set[Point]) -> bool:
    """Whether every finite bound is reached by a point, and no bound is missing that the points keep."""
    rows = [(0, *one) for one in inside]
    for i, j in product(range(size), repeat=2):
        most = max(row[i] - row[j] for row in rows)
        if zone[i * size + j] < INFINITE and zone[i * size + j] != most:
            return False
        if zone[i * size + j] >= INFINITE and most < GRID - MOST:
            return False
    return True


@pytest.mark.parametrize("seed", SEEDS)
def test_closed(seed: int) -> None:
    """Closing changes no point, says which matrices are empty, and makes every bound tight; twice is once."""
    rng = Random(seed)
    size = rng.choice((2, 3, 3, 4))
    zone = raw(rng, size)
    inside = points(zone, size, MOST)
    done = closed(zone[:], size)
    assert (done is None) == (not inside)
    if done is not None:
        assert points(done, size, MOST) == inside
        assert tight(done, size, inside)
        assert closed(done[:], size) == done


def test_closing_sees_long_ways_round() -> None:
    """x1 − x2 ≤ −1 and x2 − x1 ≤ −1 have no solution, though no single bound is below 0 on the diagonal."""
    zone = [0, 0, 0, INFINITE, 0, -1, INFINITE, -1, 0]
    assert closed(zone, 3) is None


def test_worked_example() -> None:
    """x < 20, y ≤ 20, y − x ≤ 10, x − y ≤ −10 is 10 ≤ y ≤ 20, 0 ≤ x ≤ 10.

    From memory: Bengtsson and Yi, "Timed Automata: Semantics, Algorithms and Tools", 2004.
    """
    assert closed([0, 0, 0, 19, 0, -10, 20, 10, 0], 3) == [0, 0, -10, 10, 0, -10, 20, 10, 0]


@pytest.mark.parametrize("draw", [drawn, wide])
@pytest.mark.parametrize("seed", SEEDS)
def test_limited(seed: int, draw: Draw) -> None:
    """One more bound leaves exactly the points that keep it, in canonical form, and does not change the old zone."""
    rng, size, zone = draw(seed)
    upper, lower = rng.sample(range(size), 2)
    bound = rng.randint(-MOST, MOST)
    before = zone[:]
    kept = {one for one in points(zone, size) if (0, *one)[upper] - (0, *one)[lower] <= bound}
    done = limited(zone, size, upper, lower, bound)
    assert zone == before
    assert (done is None) == (not kept)
    if done is not None:
        assert points(done, size) == kept
        assert tight(done, size, kept)


def later(inside: set[Point], bounds: list[tuple[int, int]]) -> set[Point]:
    """All points that come of these as time passes, within the bounds and the grid."""
    found = set()
    for one in inside:
        for time in range(GRID + 1):
            after = tuple(value + time for value in one)
            if max(after, default=0) <= GRID and all(after[clock - 1] <= most for clock, most in bounds):
                found.add(after)
    return found


@pytest.mark.parametrize("draw", [drawn, wide])
@pytest.mark.parametrize("seed", SEEDS)
def test_delayed(seed: int, draw: Draw) -> None:
    """Time passes for all clocks alike, as long as each bounded one stays within its bound."""
    rng, size, zone = draw(seed)
    clocks = rng.sample(range(1, size), rng.randint(0, size - 1))
    bounds = [(clock, rng.randint(0, MOST + 2)) for clock in clocks]
    right = later(points(zone, size), bounds)
    done = delayed(zone[:], size, bounds)
    assert (done is None) == (not right)
    if done is not None:
        assert points(done, size) == right
        assert closed(done[:], size) == done
        assert all(one == INFINITE or one < 10 * MOST for one in done), "a bound out of none"


@pytest.mark.parametrize("seed", SEEDS)
def test_renamed(seed: int) -> None:
    """Each new clock is an old one, 0, or anything not negative; new ones may share an old one."""
    rng, size, zone = drawn(seed)
    sources = [rng.choice((FRESH, *range(size))) for _ in range(rng.randint(0, 3))]
    right: set[Point] = set()
    for one in points(zone, size, MOST):
        values = (0, *one)
        choices = [range(MOST + 1) if source == FRESH else (values[source],) for source in sources]
        right |= set(product(*choices))
    done = renamed(zone, size, sources)
    assert points(done, len(sources) + 1, MOST) == right
    assert closed(done[:], len(sources) + 1) == done


@pytest.mark.parametrize("seed", SEEDS)
def test_includes(seed: int) -> None:
    """Canonical forms are compared bound by bound: that is inclusion of their points."""
    rng, size, zone = drawn(seed)
    other = zone[:]
    for _ in range(2):
        i, j = rng.sample(range(size), 2)
        changed = other[i * size + j] + (rng.choice((-1, 1)) if other[i * size + j] < INFINITE else 0)
        other[i * size + j] = changed if i else min(0, changed)
    done = closed(other, size)
    if done is None:
        return
    assert includes(zone, done) == (points(done, size) <= points(zone, size))
    assert includes(done, zone) == (points(zone, size) <= points(done, size))


def like(point: Point, lower: list[int], upper: list[int], inside: set[Point]) -> bool:
    """Whether some point of the zone can do whatever this one can.

    It can where each clock is the same, or less but beyond what is compared from below, or more where already this
    one is beyond what is compared from above (Behrmann, Bouyer, Larsen and Pelánek 2006, definition 4).
    """
    return any(
        all(
            mine == other or lower[clock] < other < mine or upper[clock] < mine < other
            for clock, (mine, other) in enumerate(zip(point, one, strict=True), 1)
        )
        for one in inside
    )


def constants(rng: Random, size: int) -> list[int]:
    """A constant for each clock; place 0 is not used."""
    return [0, *(rng.choice((0, 1, 2, 3, MOST, INFINITE)) for _ in range(size - 1))]


@pytest.mark.parametrize("seed", SEEDS)
def test_extrapolated(seed: int) -> None:
    """Widening adds only points that an old one simulates, and is canonical."""
    rng, size, zone = drawn(seed)
    if rng.random() < 0.5:
        zone = delayed(zone, size, []) or zone
    lower, upper = constants(rng, size), constants(rng, size)
    done = extrapolated(zone[:], size, lower, upper)
    assert includes(done, zone)
    assert closed(done[:], size) == done
    inside = points(zone, size, 2 * GRID)  # what simulates a point may lie beyond it
    for point in points(done, size) - inside:
        assert like(point, lower, upper, inside), point


def widened(zone: Zone, size: int, lower: list[int], upper: list[int]) -> Zone:
    """Extra_LU+ by its four cases, over whole numbers (Behrmann, Bouyer, Larsen and Pelánek 2006, section 4)."""

    def bound(i: int, j: int) -> int:
        far_above = j > 0 and -zone[j] > upper[j]
        if i == j or i == 0:
            return -upper[j] - 1 if far_above and i == 0 else zone[i * size + j]
        return INFINITE if zone[i * size + j] > lower[i] or -zone[i] > lower[i] or far_above else zone[i * size + j]

    done = closed([bound(i, j) for i, j in product(range(size), repeat=2)], size)
    assert done is not None
    return done


@pytest.mark.parametrize("draw", [drawn, wide])
@pytest.mark.parametrize("seed", SEEDS)
def test_extrapolated_as_far_as_defined(seed: int, draw: Draw) -> None:
    """It is as coarse as its definition lets it be, whatever stands in the places of no clock."""
    rng, size, zone = draw(seed)
    lower, upper = constants(rng, size), constants(rng, size)
    right = widened(zone, size, lower, upper)
    lower[0], upper[0] = rng.choice((-1, MOST)), rng.choice((-1, MOST))
    assert extrapolated(zone[:], size, lower, upper) == right


def chains() -> Iterator[Zone]:
    """Zones x = t, y = t + n of two clocks that run on, with y ahead by any n."""
    for ahead in range(200):
        zone = delayed([0, 0, -ahead, 0, 0, -ahead, ahead, ahead, 0], 3, [])
        assert zone is not None
        yield zone


def test_extrapolation_makes_few_zones_of_many() -> None:
    """Without it a search would never end: of 200 zones only those below the greatest constant are told apart."""
    for constant, most in ((3, 6), (INFINITE, 200)):
        bounds = [0, constant, constant]
        assert len({tuple(extrapolated(zone[:], 3, bounds, bounds)) for zone in chains()}) <= most
    assert len({tuple(zone) for zone in chains()}) == 200


@pytest.mark.parametrize(
    ("least", "most", "lower", "upper", "right"),
    [
        (3, 5, 2, 10, (3, INFINITE)),
        (12, 15, 10, 10, (11, INFINITE)),
        (3, 5, 5, 10, (3, 5)),
        (3, 5, 4, 2, (3, INFINITE)),
    ],
)
def test_extrapolation_of_one_clock(least: int, most: int, lower: int, upper: int, right: tuple[int, int]) -> None:
    """3 ≤ x ≤ 5 with L = 2 is x ≥ 3; 12 ≤ x ≤ 15 with both 10 is x > 10 (derived from the definitions)."""
    zone = extrapolated([0, -least, most, 0], 2, [0, lower], [0, upper])
    assert (-zone[1], zone[2]) == right

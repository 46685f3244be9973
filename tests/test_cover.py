"""The checker's arithmetic against the prover's, which is held against points, and its ways against shorting sets."""

from random import Random

import pytest
import test_circuit
from test_circuit import polarities, shorted, stage
from test_zones import MOST, wide

from seqcheck.circuit import shorting_sets
from seqcheck.drive import Above, Stage
from seqcheck.evidence.cover import shorts as walked
from seqcheck.evidence.cover.matrix import NO_BOUND, UNKNOWN, Rows, cut, later, moved, table, tight, within
from seqcheck.evidence.cover.shorts import TooLarge, first_uncovered, shorts
from seqcheck.hazards import Hazard, Literal
from seqcheck.messages import Problems
from seqcheck.zones import FRESH, INFINITE, Zone, closed, delayed, includes, limited, renamed

SEEDS = range(200)


def rows_of(zone: Zone | None, size: int) -> Rows | None:
    """A zone of the prover as the checker would write it."""
    if zone is None:
        return None
    bounds = [NO_BOUND if one >= INFINITE else one for one in zone]
    return [bounds[start : start + size] for start in range(0, size * size, size)]


def drawn(seed: int) -> tuple[Random, int, Zone, Rows]:
    """A zone in both forms."""
    rng, size, zone = wide(seed)
    rows = rows_of(zone, size)
    assert rows is not None
    return rng, size, zone, rows


@pytest.mark.parametrize("seed", SEEDS)
def test_tables_are_made_tight(seed: int) -> None:
    """Of several bounds on one difference the least counts, and clocks are not negative."""
    rng = Random(seed)
    size = rng.choice((2, 3, 4))
    bounds = [(*rng.sample(range(size), 2), rng.randint(-MOST, MOST)) for _ in range(rng.randint(0, 5))]
    zone = [0 if row in (0, column) else INFINITE for row in range(size) for column in range(size)]
    for upper, lower, most in bounds:
        zone[upper * size + lower] = min(zone[upper * size + lower], most)
    rows = table(size, bounds)
    assert rows == rows_of(zone, size)
    before = [row[:] for row in rows]
    assert tight(rows) == rows_of(closed(zone, size), size)
    assert rows == before


@pytest.mark.parametrize("seed", SEEDS)
def test_one_more_bound(seed: int) -> None:
    """The same points are left, with every bound as small."""
    rng, size, zone, rows = drawn(seed)
    upper, lower = rng.sample(range(size), 2)
    most = rng.randint(-MOST, MOST)
    assert cut(rows, upper, lower, most) == rows_of(limited(zone, size, upper, lower, most), size)


@pytest.mark.parametrize("seed", SEEDS)
def test_other_clocks(seed: int) -> None:
    """Old ones, 0, or such of which nothing is known."""
    rng, size, zone, rows = drawn(seed)
    sources = [rng.choice((FRESH, *range(size))) for _ in range(rng.randint(0, 3))]
    origins = [UNKNOWN if one == FRESH else one for one in sources]
    assert moved(rows, origins) == rows_of(renamed(zone, size, sources), len(sources) + 1)


@pytest.mark.parametrize("seed", SEEDS)
def test_time_passes(seed: int) -> None:
    """For all clocks alike, within the limits, which hold at the beginning too."""
    rng, size, zone, rows = drawn(seed)
    clocks = rng.sample(range(1, size), rng.randint(0, size - 1))
    limits = [(clock, rng.randint(0, MOST + 2)) for clock in clocks]
    done = later(rows, limits)
    assert (None if done is None else tight(done)) == rows_of(delayed(zone[:], size, limits), size)
    assert rows == rows_of(zone, size)


@pytest.mark.parametrize("seed", SEEDS)
def test_lying_within(seed: int) -> None:
    """Bound by bound, as for the prover's zones."""
    rng, size, zone, rows = drawn(seed)
    other = limited(zone, size, *rng.sample(range(size), 2), rng.randint(0, MOST))
    smaller = rows_of(other, size)
    if other is not None and smaller is not None:
        assert within(smaller, rows)
        assert within(rows, smaller) == includes(other, zone)


# Shorts


def sets_of(seed: int) -> tuple[Random, Stage, tuple[Hazard, ...]]:
    """A random stage that is not shorted whatever its switches do, and its shorting sets."""
    rng = Random(seed)
    while True:
        one = test_circuit.drawn(rng)
        try:
            return rng, one, shorting_sets(one)
        except Problems:
            continue


@pytest.mark.parametrize("seed", SEEDS)
def test_the_shorting_sets_cover_all_shorts_and_none_can_be_left_out(seed: int) -> None:
    """Each is one, and without it a way is found that does short."""
    _, one, hazards = sets_of(seed)
    assert first_uncovered(one, hazards) is None
    for left_out in hazards:
        assert shorts(one, left_out)
        way = first_uncovered(one, tuple(hazard for hazard in hazards if hazard is not left_out))
        assert way is not None
        assert any(shorted(one, way.switches, orders) for orders in polarities(one))


@pytest.mark.parametrize("seed", SEEDS)
def test_a_set_shorts_or_does_not(seed: int) -> None:
    """Any set of switches, asked for always: it shorts if it does so under every polarity."""
    rng, one, _ = sets_of(seed)
    names = [switch.name for switch in one.switches]
    some = frozenset(rng.sample(names, rng.randint(1, len(names))))
    if any(len(line.nodes) > 2 for line in one.sources) or len(one.sources) > 1:
        return  # no one fact and its opposite are all polarities then
    right = all(shorted(one, some, orders) for orders in polarities(one))
    assert shorts(one, Hazard(tuple(Literal(name) for name in sorted(some)), ())) == right


def test_a_hazard_that_is_asked_for_under_conditions_covers_no_more() -> None:
    """A short of two sources that conduct one way; a literal of an open switch covers no short."""
    one = stage("", "a b", "", "A a-x one way, B x-b one way")
    literals = (Literal("A"), Literal("B"))
    down, up = frozenset({Above("a", "b")}), frozenset({Above("b", "a")})
    assert first_uncovered(one, (Hazard(literals, (), (down,)),)) is None
    assert first_uncovered(one, (Hazard(literals, (), (up,)),)) is not None
    assert first_uncovered(one, (Hazard((Literal("A"), Literal("B", False)), (), ()),)) is not None
    assert shorts(one, Hazard(literals, (), (down,)))
    assert not shorts(one, Hazard(literals, (), (down, up)))
    assert not shorts(one, Hazard(literals, ()))


def test_a_stage_with_very_many_ways_is_not_walked(monkeypatch: pytest.MonkeyPatch) -> None:
    """It is said instead."""
    one = stage("P N", switches="A P-x one way, B x-N one way")
    for most, fits in ((3, True), (2, False)):
        monkeypatch.setattr(walked, "MOST_STEPS", most)
        if fits:
            assert first_uncovered(one, shorting_sets(one)) is None
        else:
            with pytest.raises(TooLarge):
                first_uncovered(one, ())

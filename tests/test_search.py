"""The search of zones, its circles and its times, against small timed automata gone through by whole picoseconds."""

from dataclasses import replace

import pytest
from automata import CLOCKS, MEASURE, MOST, Automaton, Place, State, Way, drawn, number_of
from proofs import at_most

from seqcheck.proving import search
from seqcheck.proving.circles import goes_on, idle
from seqcheck.proving.location import Bound, Hop, Location
from seqcheck.proving.schedule import Difference, Path, constraints_of, potentials, scheduled
from seqcheck.proving.search import (
    LimitReached,
    endless_circle,
    first_hazard,
    first_held,
    hops_out,
    longest_overlap,
    successor,
    ticks,
)
from seqcheck.zones import FRESH, INFINITE, delayed

SEEDS = range(200)
LONG = 40
"""An overlap that can last so long here lasts without end: no automaton has so many states and so long stays."""
PATIENCE = 50


def overlapping(one: Automaton, *, held: bool = False) -> dict[State, int]:
    """The states of an overlap in which time may pass, with the fewest moves to each."""
    return {
        state: moves
        for state, moves in one.reached(0).items()
        if one.places[state[0]].hot and (one.places[state[0]].held or not held) and may_stay(one, state)
    }


def may_stay(one: Automaton, state: State) -> bool:
    """Whether 1 ps may pass in a state."""
    return one.later(state) is not None


def fewest(states: dict[State, int]) -> int | None:
    """The fewest moves to any of some states."""
    return min(states.values(), default=None)


@pytest.mark.parametrize("seed", SEEDS)
def test_first_hazard_and_first_held(seed: int) -> None:
    """They are found if and only if there are any, after the fewest moves."""
    one = drawn(seed)
    hot, held = (find(one.initial(measured=False), at_most(3000)) for find in (first_hazard, first_held))
    assert (None if hot is None else hot.moves) == fewest(overlapping(one))
    assert (None if held is None else held.moves) == fewest(overlapping(one, held=True))
    for node in (hot, held):
        if node is not None:
            hops = [step.hop for step in node.path()]
            for origin in {0, len(hops) - 1}:
                lived_through(one, hops, origin)


def lived_through(one: Automaton, hops: list[Hop], at: int) -> int:
    """Asserts that a path's times are a run of the automaton; how long it lasts after its hop numbered `at`."""
    path = constraints_of(hops)
    times = scheduled(path, at, PATIENCE)
    assert times is not None
    assert times[0] == 0
    unknown = iter(times[path.end + 1 :])
    began = dict.fromkeys(CLOCKS, 0)
    for event, hop in enumerate(hops):
        way, now = hop.event, times[event]
        assert isinstance(way, Way)
        if event:
            assert all(now - began[clock] >= least for clock, least in way.least)
            assert all(now - began[clock] <= most for clock, most in way.most)
        before = {0: now, **began}
        new = [next(unknown) if source == FRESH else before[source] for source in way.sources]
        began = dict(zip(CLOCKS, new, strict=True))
        assert all(now - began[clock] >= max(0, least) for clock, least in [*way.after, *((one, 0) for one in CLOCKS)])
        until = times[event + 1] if event + 1 < len(hops) else times[path.end]
        assert until >= now
        assert all(until - began[clock] <= bound for clock, bound in one.places[way.to].bounds)
        if not event:
            assert path.births == {clock: path.end + 1 + at for at, clock in enumerate(_fresh(way))}
    assert next(unknown, None) is None
    return times[path.end] - times[at]


def lasting_until(one: Automaton, hops: list[Hop], first: int) -> int:
    """How long after the hop numbered `first` the last hop can come."""
    path = constraints_of(hops)
    times = scheduled(replace(path, constraints=(*path.constraints, Difference(path.end, len(hops) - 1, 0))), first, 50)
    assert times is not None
    return times[len(hops) - 1] - times[first]


def _fresh(way: Way) -> list[int]:
    return [clock for clock, source in zip(CLOCKS, way.sources, strict=True) if source == FRESH]


@pytest.mark.parametrize("seed", SEEDS)
def test_longest_overlap(seed: int) -> None:
    """It is as long as whole picoseconds say, and a run shows it; one without end goes round a circle."""
    one = drawn(seed)
    lasting = [state[3] for state in one.reached(LONG) if one.places[state[0]].hot]
    right = max(lasting, default=0)
    try:
        found = longest_overlap(one.initial(), at_most(3000), None)
    except LimitReached:
        assert not right
        return
    assert (found is None) == (right == 0)
    if found is None:
        return
    if not found.greatest:
        assert found.time is not None
        assert found.time <= right
        return
    assert found.time == (None if right >= LONG else right)
    nodes = found.node.path()
    first = len(nodes) - 1
    while first > 0 and nodes[first - 1].location.overlapping:
        first -= 1
    holding = [step for step in nodes[first:] if step.location.held and ticks(step.location, step.zone)]
    assert found.held is (holding[-1] if holding else None)
    hops = [step.hop for step in nodes]
    if found.time is not None:
        assert lived_through(one, hops, first) == found.time
        assert endless_circle(found.node) == []
        ending = hops_out(found.node)
        if ending:
            assert not ending[-1].target.hot
            assert all(hop.target.hot for hop in ending[:-1])
            assert lasting_until(one, [*hops, *ending], first) == found.time
        return
    lived_through(one, hops, first)
    circle = endless_circle(found.node)
    if circle:
        assert all(hop.target.hot for hop in circle)
        rounds = [lasting_until(one, [*hops, *circle * count], first) for count in (3, 20, 40)]
        assert rounds[0] + 16 < rounds[1] + 8 < rounds[2]


def test_searches_come_to_all_kinds_of_ends() -> None:
    """Else the two tests above would say little."""
    times = []
    for seed in SEEDS:
        found = longest_overlap(drawn(seed).initial(), at_most(3000), None)
        times.append("none" if found is None else "endless" if found.time is None else "ends")
    assert min(times.count(kind) for kind in ("none", "endless", "ends")) >= 10


# Circles


def ring(*hops: tuple[tuple[Bound, ...], tuple[Bound, ...], tuple[int, int]], bounds: tuple[Bound, ...]) -> bool:
    """Whether an overlap goes on growing through locations with the same bounds, hop by hop in a circle.

    A hop has least and most and the sources of clocks 1 and 2; all clocks are 0 at the beginning.
    """
    constants = [0, *[200] * 2, INFINITE]
    count = len(hops)
    here = [Location(at, 4, bounds, constants, constants, True, False, MEASURE, lambda _: ()) for at in range(count)]
    circle = [
        Hop(least, most, (*sources, MEASURE), (), here[(at + 1) % count], 0, None)
        for at, (least, most, sources) in enumerate(hops)
    ]
    zone = delayed([0] * 16, 4, bounds)
    assert zone is not None
    return goes_on(here[0], zone, circle, successor)


ONE = (Bound(2, 1),)
"""A bound, or a guard, of 1 ps on clock 2."""
FAR = (Bound(1, 100),)


def test_a_circle_that_takes_time_goes_on() -> None:
    """Each round takes 1 ps; clock 1 is started anew, or it runs through without any bound."""
    assert ring((ONE, (), (0, 0)), bounds=ONE)
    assert ring((ONE, (), (1, 0)), bounds=ONE)
    assert ring((ONE, (), (FRESH, 0)), bounds=ONE)
    assert ring((ONE, FAR, (0, 0)), bounds=ONE)
    assert ring((ONE, (), (0, 0)), bounds=(*ONE, *FAR))


def test_a_bound_on_a_clock_that_runs_through_ends_a_circle() -> None:
    """In sight of the first rounds it grows; after a hundred it is over."""
    assert not ring((ONE, FAR, (1, 0)), bounds=ONE)
    assert not ring((ONE, (), (1, 0)), bounds=(*ONE, *FAR))
    assert not ring((ONE, (), (1, 0)), (ONE, FAR, (1, 0)), bounds=ONE)


def test_a_bound_on_a_clock_that_the_circle_starts_ends_nothing() -> None:
    """It is over before the next round."""
    assert ring((ONE, (), (0, 0)), (ONE, FAR, (1, 0)), bounds=ONE)
    assert ring((ONE, (), (0, 0)), (ONE, FAR, (1, 0)), (ONE, (), (0, 0)), bounds=ONE)


def test_a_circle_that_takes_no_time_or_cannot_be_taken_does_not_go_on() -> None:
    """Nothing grows on it."""
    assert not ring(((), (), (0, 0)), bounds=(Bound(2, 0),))
    assert not ring(((Bound(2, 5),), (), (0, 0)), bounds=ONE)
    assert not ring((ONE, (), (0, 0)), ((Bound(2, 5),), (), (0, 0)), bounds=ONE)


Turn = tuple[tuple[Bound, ...], tuple[Bound, ...], tuple[int, int], tuple[Bound, ...], tuple[Bound, ...]]


@pytest.mark.parametrize(
    ("turns", "right"),
    [
        ([((), (), (1, 0), (), ())], {1, MEASURE}),
        ([((), (), (1, 2), (), ())], {1, 2, MEASURE}),
        ([((), (), (FRESH, 0), (), ())], {MEASURE}),
        ([((), (), (2, 1), (), ())], {MEASURE}),  # each comes back as the other
        ([((), (), (2, 1), (), ())] * 2, {1, 2, MEASURE}),
        ([(FAR, (), (1, 2), (), ())], {2, MEASURE}),
        ([((), FAR, (1, 2), (), ())], {2, MEASURE}),
        ([((), (), (1, 2), FAR, ())], {2, MEASURE}),
        ([((), (), (1, 2), (), FAR)], {2, MEASURE}),
        ([((), (), (2, 1), (), ()), (FAR, (), (2, 1), (), ())], {1, MEASURE}),  # clock 2 under another number
        ([((), (), (2, 0), (), ()), ((), (), (1, 2), (), FAR)], {MEASURE}),
    ],
)
def test_clocks_that_nothing_on_a_circle_looks_at(turns: list[Turn], right: set[int]) -> None:
    """They run through all of it and are compared with nothing, by no guard and no bound."""
    constants = [0, MOST, MOST, INFINITE]
    where = [Location(0, 4, turn[4], constants, constants, True, False, MEASURE, lambda _: ()) for turn in turns]
    circle = [
        Hop(turn[0], turn[1], (*turn[2], MEASURE), turn[3], at, 0, None) for turn, at in zip(turns, where, strict=True)
    ]
    assert idle(where[-1], circle) == right


def test_a_circle_is_found_though_an_idle_clock_runs_on() -> None:
    """Were it asked to come back as it was, the search would never end, its age being told exactly."""
    round_again = Way(0, (Bound(2, 1),), sources=(1, 0))
    starts = Automaton((Place(True, False, ONE, (round_again,)),), CHAIN.starts).initial()
    starts[0].target.lower = starts[0].target.upper = [0, INFINITE, MOST, INFINITE]
    found = longest_overlap(starts, at_most(20), None)
    assert found is not None
    assert (found.time, found.greatest) == (None, True)


# How an overlap ends


def ending(one: Automaton) -> list[int]:
    """The places to which the longest overlap's last hops lead."""
    found = longest_overlap(one.initial(), at_most(50), None)
    assert found is not None
    return [number_of(hop.target) for hop in hops_out(found.node)]


def test_the_longest_overlap_ends_by_a_hop_that_is_there_then() -> None:
    """The first way out comes too soon, the second cannot be taken, the third is one of two steps."""
    soon = Way(3, most=(Bound(1, 2),))
    barred = Way(3, (Bound(2, 9),))
    places = (
        Place(True, False, (Bound(1, 3),), (soon, barred, Way(1, sources=(0, 2)))),
        Place(True, False, (Bound(1, 0),), (Way(2, (Bound(1, 1),)), Way(3))),
        Place(True, False, (), ()),
        Place(False, False, (), ()),
    )
    assert ending(Automaton(places, CHAIN.starts)) == [1, 3]
    assert ending(Automaton((replace(places[0], ways=(soon, barred)), *places[1:]), CHAIN.starts)) == []


def test_an_ending_that_is_far_is_not_looked_for(monkeypatch: pytest.MonkeyPatch) -> None:
    """Of four steps that take no time; each is looked at with all before it."""
    still = [Place(True, False, (Bound(1, 0),), (Way(to),)) for to in (3, 4, 1)]
    first = Place(True, False, (Bound(1, 3),), (Way(2, sources=(0, 2)),))
    one = Automaton((first, Place(False, False, (), ()), *still), CHAIN.starts)
    assert ending(one) == [2, 3, 4, 1]
    monkeypatch.setattr(search, "_MOST_ENDINGS", 4)
    assert ending(one) == [2, 3, 4, 1]
    monkeypatch.setattr(search, "_MOST_ENDINGS", 3)
    assert ending(one) == []


# Limits

LINKS = [Place(True, False, (Bound(1, stay),), (Way(stay, sources=(0, 2)),)) for stay in (1, 2, 3)]
CHAIN = Automaton((*LINKS, Place(True, False, (Bound(1, 1),), ())), (Way(0, sources=(0, 0), cost=0),))
"""Overlaps of 1, 3, 6 and 7 ps, a zone each."""


@pytest.mark.parametrize("cost", [0, 1])
def test_every_zone_is_told(cost: int) -> None:
    """The observer hears of each stored zone once, in order."""
    told: list[int] = []
    links = tuple(replace(place, ways=tuple(replace(way, cost=cost) for way in place.ways)) for place in CHAIN.places)
    found = longest_overlap(replace(CHAIN, places=links).initial(), told.append, None)
    assert found is not None
    assert (found.time, found.greatest, found.node.moves) == (7, True, 3 * cost)
    assert told == [1, 2, 3, 4]


@pytest.mark.parametrize("cost", [0, 1])
def test_what_a_later_zone_includes_is_not_searched_further(cost: int) -> None:
    """Two ways to a place, the later one with more of clock 1: from there on it is gone through once."""
    late, any_time = Way(1, (Bound(1, 1),), sources=(1, 0)), Way(1, sources=(1, 0))
    for ways, zones in (((late, any_time), 4), ((any_time, late), 3)):
        places = [
            Place(False, False, (Bound(1, 2),), tuple(replace(way, cost=cost) for way in ways)),
            Place(False, False, (), (Way(2, (Bound(2, 1),), sources=(1, 0)),)),
            Place(False, False, (), ()),
        ]
        told: list[int] = []
        assert first_hazard(Automaton(tuple(places), CHAIN.starts).initial(), told.append) is None
        assert len(told) == zones


def test_a_pause_is_no_overlap() -> None:
    """It counts where the overlap goes on after it for a while, not where it only comes back for no time."""
    for stay, right in ((0, 1), (1, 7)):
        places = (
            Place(True, False, (Bound(1, 1),), (Way(1, sources=(0, 0)),)),
            Place(False, False, (Bound(1, 5),), (Way(2, sources=(0, 0)),), paused=True),
            Place(True, False, (Bound(1, stay),), ()),
        )
        found = longest_overlap(Automaton(places, CHAIN.starts).initial(), at_most(9), None)
        assert found is not None
        assert found.time == right


def test_without_a_measuring_clock_there_is_no_circle_and_no_ending() -> None:
    """Nothing tells how long the overlap has lasted."""
    node = first_hazard(CHAIN.initial(measured=False), at_most(9))
    assert node is not None
    assert endless_circle(node) == []
    assert hops_out(node) == []


def test_a_limit_ends_a_search() -> None:
    """With what it has found, or, where that is nothing, as the limit itself."""
    found = longest_overlap(CHAIN.initial(), at_most(2), None)
    assert found is not None
    assert (found.time, found.greatest) == (3, False)
    with pytest.raises(LimitReached):
        longest_overlap(CHAIN.initial(), at_most(0), None)


def test_a_known_ceiling_ends_a_search() -> None:
    """No run brings more, so that the rest need not be looked at."""
    told: list[int] = []
    for ceiling, time, zones in ((3, 3, 2), (4, 6, 3), (100, 7, 4)):
        told.clear()
        found = longest_overlap(CHAIN.initial(), told.append, ceiling)
        assert found is not None
        assert (found.time, found.greatest, len(told)) == (time, True, zones)


def test_a_search_rests_content_after_many_zones(monkeypatch: pytest.MonkeyPatch) -> None:
    """With an overlap in hand it looks at so many more at most, and does not call its answer the greatest."""
    monkeypatch.setattr(search, "MOST_MEASURED", 1)
    found = longest_overlap(CHAIN.initial(), at_most(100), None)
    assert found is not None
    assert (found.time, found.greatest) == (6, False)


# Times


def test_potentials_of_variables_without_a_bound() -> None:
    """What is only before or after something without a bound has none either."""
    assert potentials(3, [Difference(1, 2, -5)], 0) == [0, INFINITE, INFINITE]
    assert potentials(3, [Difference(2, 1, 4), Difference(1, 0, -3)], 0) == [0, -3, 1]


def test_an_end_that_can_be_put_off_for_ever_comes_a_while_after_the_rest() -> None:
    """30 ps after the start comes the last event that is bound, 5 ps later the end."""
    path = Path((Difference(1, 0, 30), Difference(0, 1, -30), Difference(1, 2, 0)), 2, 3, {})
    assert scheduled(path, 0, 5) == [0, 30, 35]
    assert scheduled(path, 1, 5) == [0, 30, 35]
    sooner = Path((*path.constraints, Difference(0, 2, -100)), 2, 3, {})
    assert scheduled(sooner, 0, 5) is None
    assert scheduled(Path((Difference(1, 0, -1), Difference(0, 1, 0)), 1, 2, {}), 0, 5) is None

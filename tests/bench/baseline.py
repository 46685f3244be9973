"""Bounded model checking of one hazard in z3: the same automaton, unrolled hop by hop.

It reads the locations and hops that the search of the program reads, and shares nothing else with it: no zones, no
order, no inclusion. Depth 0, 1, 2, ... is asked in turn of one incremental solver. A step only knows the locations
that some path of that many hops leads to, and of those only what can still lead to the hazard.
"""

import time
from collections.abc import Iterator
from typing import Any, NamedTuple

import z3  # type: ignore[import-untyped]

from seqcheck.proving.location import Hop, Location
from seqcheck.proving.projection import Projection
from seqcheck.zones import FRESH


class Checked(NamedTuple):
    """What came of it: the depth of the run found, or None, the greatest depth asked, and the processor time (s)."""

    found: int | None
    depth: int
    seconds: float


class _Step(NamedTuple):
    """The unknowns of one step: where, the clocks on coming there, and how long is stayed."""

    where: Any
    clocks: list[Any]
    stay: Any


def bounded(projection: Projection, most: int, seconds: float) -> Checked:
    """Look for a run that brings the hazard, of at most `most` hops, for so much processor time (s)."""
    begun = time.process_time()
    initial = projection.initial()
    numbers = _numbers(initial)
    useful = _leading_to_hazard(numbers)
    width = max(location.size for location in numbers) - 1
    solver = z3.Solver()
    step = _step(0, width)
    layer = {hop.target for hop in initial} & useful
    solver.add(z3.Or([_comes(hop, [], step, numbers) for hop in initial if hop.target in layer]))
    for depth in range(most + 1):
        solver.add(step.stay >= 0, *(_stays(location, step, numbers) for location in layer))
        left = seconds - (time.process_time() - begun)
        if left <= 0:
            return Checked(None, depth - 1, time.process_time() - begun)
        solver.set("timeout", max(1, int(left * 1000)))
        hot = [numbers[location] for location in layer if location.hot]
        if hot:
            solver.push()
            solver.add(step.stay >= 1, z3.Or([step.where == number for number in hot]))
            answer = solver.check()
            if answer == z3.sat:
                return Checked(depth, depth, time.process_time() - begun)
            if answer == z3.unknown:
                return Checked(None, depth - 1, time.process_time() - begun)
            solver.pop()
        following = _step(depth + 1, width)
        hops = [(location, hop) for location in layer for hop in location.out() if hop.target in useful]
        solver.add(z3.Or([_goes(location, hop, step, following, numbers) for location, hop in hops]))
        layer, step = {hop.target for _, hop in hops}, following
    return Checked(None, most, time.process_time() - begun)


def _numbers(initial: tuple[Hop, ...]) -> dict[Location, int]:
    """All locations, whatever the times, each with its number."""
    numbers: dict[Location, int] = {}
    waiting = [hop.target for hop in initial]
    while waiting:
        location = waiting.pop()
        if location not in numbers:
            numbers[location] = len(numbers)
            waiting += [hop.target for hop in location.out()]
    return numbers


def _leading_to_hazard(numbers: dict[Location, int]) -> set[Location]:
    before: dict[Location, list[Location]] = {}
    for location in numbers:
        for hop in location.out():
            before.setdefault(hop.target, []).append(location)
    waiting = [location for location in numbers if location.hot]
    found = set(waiting)
    while waiting:
        new = [one for one in before.get(waiting.pop(), ()) if one not in found]
        found.update(new)
        waiting += new
    return found


def _step(number: int, width: int) -> _Step:
    clocks = [z3.Int(f"x{number}_{clock}") for clock in range(width)]
    return _Step(z3.Int(f"at{number}"), clocks, z3.Int(f"stay{number}"))


def _stays(location: Location, step: _Step, numbers: dict[Location, int]) -> Any:
    bounds = [step.clocks[clock - 1] + step.stay <= value for clock, value in location.bounds]
    return z3.Implies(step.where == numbers[location], z3.And(bounds))


def _goes(location: Location, hop: Hop, step: _Step, following: _Step, numbers: dict[Location, int]) -> Any:
    ends = [clock + step.stay for clock in step.clocks]
    asked = [step.where == numbers[location]]
    asked += [ends[clock - 1] >= value for clock, value in hop.least]
    asked += [ends[clock - 1] <= value for clock, value in hop.most]
    return z3.And(*asked, _comes(hop, ends, following, numbers))


def _comes(hop: Hop, ends: list[Any], following: _Step, numbers: dict[Location, int]) -> Any:
    return z3.And([following.where == numbers[hop.target], *_clocks(hop, ends, following)])


def _clocks(hop: Hop, ends: list[Any], following: _Step) -> Iterator[Any]:
    for clock, source in zip(following.clocks, hop.sources, strict=False):
        if source == FRESH:
            yield clock >= 0
        else:
            yield clock == (ends[source - 1] if source else 0)
    for clock, value in hop.after:
        yield following.clocks[clock - 1] >= value

"""Rows in which carriers only run on, folded into one."""

from collections.abc import Sequence
from itertools import groupby

from seqcheck.records import replace
from seqcheck.reports.acts import Note
from seqcheck.reports.instants import Instant
from seqcheck.reports.pieces import counted, listed
from seqcheck.verdict import Act, Event

_EDGES = (Act.RISES, Act.FALLS)
_CARRIER = (*_EDGES, Act.OUTPUT, Act.CYCLES)
_FEW = 3  # so many quiet rows in a row are still shown one by one


def folded(instants: Sequence[Instant], events: Sequence[Event]) -> list[Instant]:
    """The instants, with stretches in which nothing but unheard carriers happens made one row each.

    The row stands at the last of the instants that it takes the place of, and counts the edges.
    """
    acts: dict[int, list[Event]] = {}
    for event in events:
        acts.setdefault(event.time, []).append(event)
    quiet = [index > 0 and _quiet(instants[index - 1], one, acts) for index, one in enumerate(instants)]
    found: list[Instant] = []
    for is_quiet, group in groupby(zip(quiet, instants, strict=True), key=lambda one: one[0]):
        members = [one for _, one in group]
        if is_quiet and len(members) > _FEW:
            members = [_one(members, acts)]
        found += members
    return [replace(one, number=number) for number, one in enumerate(found, 1)]


def _quiet(before: Instant, now: Instant, acts: dict[int, list[Event]]) -> bool:
    """Whether an instant holds only carrier events that none of the switches hears."""
    if now.time is None or now.overlap != before.overlap:
        return False
    heard = any(len(state.commands) > 1 for state in now.states)
    same = [state.conduct for state in now.states] == [state.conduct for state in before.states]
    same = same and [state.command for state in now.states] == [state.command for state in before.states]
    happened = acts.get(now.time, [])
    return same and not heard and bool(happened) and all(event.act in _CARRIER for event in happened)


def _one(members: list[Instant], acts: dict[int, list[Event]]) -> Instant:
    edges: dict[str, int] = {}
    for one in members:
        for event in acts[one.time or 0]:
            edges[event.name] = edges.get(event.name, 0) + _edges(event)
    said = [f"{name} runs on, {counted(count, 'edge')}" for name, count in edges.items()]
    return replace(members[-1], notes=(Note(f"{listed(said)}, heard by none of these switches"),))


def _edges(event: Event) -> int:
    return 2 * event.cycles.count if event.cycles is not None else int(event.act in _EDGES)

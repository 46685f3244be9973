"""The prover against the judge on rules about lengths: verdicts, lateness, the lengths told, and that runs replay.

Here a fixed slice; the campaign takes any range of seeds.
"""

import os
from collections import Counter
from collections.abc import Iterator
from typing import NamedTuple

import pytest
from judge.delays import delays_of
from judge.draws import draw, flowing
from judge.ruled import ruled
from judge.rules import Clear, Long, Short, Soon, Watch, broken, world_of
from judge.stretched import stretched
from proofs import at_most
from reading import drive_of

from seqcheck.drive import Drive
from seqcheck.evidence.replay import NotPermitted, from_its_beginning, replay
from seqcheck.hazards import Clearing, Following, Hazard, Lasting
from seqcheck.messages import Problems
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.search import LimitReached
from seqcheck.rules import asked_by

SEEDS = (1, 2, 3, 4, 5, 7, 9, 11, 12, 13, 14, 15, 16, 17, 19, 20, 21, 22, 23, 26, 27, 29)
"""Drawn drives quick for the judge, which keep and break each kind of rule."""
ZONES, STATES = 800, 2_500


class Compared(NamedTuple):
    """One question: its kind, how it ended for both (None: one gave up), and words for a disagreement."""

    kind: str
    safe: bool | None
    differs: str = ""


def compared(text: str, zones: int, states: int) -> Iterator[Compared]:
    """Every question of a drive's rules, proven and judged."""
    drive = drive_of(text)
    prover = Prover(drive)
    for hazard in (one for rule in drive.rules for one in asked_by(rule)):
        kind = kind_of(hazard)
        try:
            proof = prover.prove(hazard, True, at_most(zones))
        except LimitReached:
            yield Compared(kind, None)
            continue
        right = rule_broken(drive, hazard, 0, states)
        if right is None:
            yield Compared(kind, None)
        elif right is isinstance(proof, Proven):
            yield Compared(kind, None, f"{kind}: the prover says {'safe' if right else 'unsafe'}, the judge not")
        else:
            why = _lateness(drive, hazard, proof, states) if isinstance(proof, Proven) else ""
            yield Compared(kind, not right, why or _figure(drive, hazard, proof, states))


def kind_of(hazard: Hazard) -> str:
    """Which rule asks."""
    if isinstance(hazard.asks, Clearing):
        return "clears"
    if isinstance(hazard.asks, Lasting):
        return f"{'on' if hazard.literals[0].on else 'off'} at {'most' if hazard.asks.longer else 'least'}"
    return "apart"


def _watch(drive: Drive, hazard: Hazard, more: int, *, bounded: bool) -> tuple[object, Watch]:
    """The judge's rule with its limit changed."""
    asks = hazard.asks
    if isinstance(asks, Following):
        return world_of(drive, None, bounded=bounded), Soon(asks.left, asks.entered, asks.limit + more)
    if isinstance(asks, Clearing):
        literal = hazard.literals[0]
        world = world_of(drive, literal.switch, bounded=bounded)
        trip = next(trip for trip in drive.trips if trip.name == asks.trip)
        return world, Clear(world, delays_of(drive, (literal,))[literal], trip, asks.limit)
    assert isinstance(asks, Lasting)
    world = world_of(drive, hazard.literals[0].switch, bounded=bounded)
    if asks.longer:
        return world, Long(world, asks.limit + more)
    return world, Short(world, hazard.literals[0].on, asks.limit + more)


def rule_broken(drive: Drive, hazard: Hazard, more: int, states: int, *, bounded: bool = True) -> bool | None:
    """Whether some run breaks a rule whose limit is `more` than it says; None where that takes too many states."""
    world, watch = _watch(drive, hazard, more, bounded=bounded)
    return broken(world, watch, states)  # type: ignore[arg-type]


def _lateness(drive: Drive, hazard: Hazard, proof: Proven, states: int) -> str:
    late = rule_broken(drive, hazard, 0, states, bounded=False)
    if late is None or late is not proof.however_late:
        return ""
    return f"{kind_of(hazard)}, however late: the prover says {proof.however_late}, the judge {not late}"


def _figure(drive: Drive, hazard: Hazard, proof: Proven | Refuted, states: int) -> str:
    """The run replays, and the judge finds the length told, to the picosecond: just broken, and just kept."""
    if isinstance(proof, Proven):
        return ""
    try:
        replay(drive, proof.trace if proof.held is None else from_its_beginning(drive, proof.trace))
    except NotPermitted as refusal:
        return f"{kind_of(hazard)}: does not replay: {refusal}"
    if not proof.greatest or isinstance(hazard.asks, Clearing):
        return ""
    assert hazard.asks is not None
    longer = isinstance(hazard.asks, Lasting) and hazard.asks.longer
    if proof.overlap is None:
        kept, just = False, 25
    else:
        kept, just = True, proof.overlap - 1
    if rule_broken(drive, hazard, just if longer else -just, states) is False:
        return f"{kind_of(hazard)}: the prover tells {proof.overlap}, the judge finds less"
    kept = kept and (longer or just + 1 < hazard.asks.limit)
    if kept and rule_broken(drive, hazard, just + 1 if longer else -just - 1, states):
        return f"{kind_of(hazard)}: the prover tells {proof.overlap}, the judge finds more"
    return ""


def drawn(seed: int) -> Iterator[str]:
    """The drives of a seed, with rules."""
    for text in (draw(seed), flowing(seed), stretched(seed)):
        if text is not None:
            yield ruled(text, seed)


@pytest.mark.parametrize("seed", SEEDS)
def test_rules_of_a_drawn_drive(seed: int) -> None:
    """Prover and judge agree wherever both decide."""
    held = list(compared(ruled(draw(seed), seed), ZONES, STATES))
    assert [one.differs for one in held if one.differs] == []


def test_rules_of_drawn_drives_end_both_ways() -> None:
    """Each kind is kept by some of these drives and broken by others."""
    found = [one for seed in SEEDS for one in compared(ruled(draw(seed), seed), ZONES, STATES)]
    ends = Counter((one.kind, one.safe) for one in found if one.safe is not None)
    kinds = ("on at most", "on at least", "off at least", "apart", "clears")
    assert [(kind, safe) for kind in kinds for safe in (True, False) if ends[kind, safe] < 3] == []


def seeds() -> range:
    """The seeds of a campaign, SEQCHECK_SEEDS=FIRST-LAST."""
    first, _, last = os.environ.get("SEQCHECK_SEEDS", "0-200").partition("-")
    return range(int(first), int(last))


@pytest.mark.campaign
@pytest.mark.parametrize("seed", seeds())
def test_campaign_of_rules(seed: int) -> None:
    """The same over drawn drives of all kinds."""
    for text in drawn(seed):
        try:
            held = list(compared(text, 4_000, 15_000))
        except Problems:
            continue
        assert [one.differs for one in held if one.differs] == [], text

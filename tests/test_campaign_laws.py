"""Laws of the meaning that need no judge: how the verdicts of a drive and of a changed one must compare.

Changes are made in the checked model, where whole picoseconds are all there is: so every time scales, a carrier's least
edge distance too. That reading scales as well is a law of its own, over texts. Here a fixed slice; the campaign takes
`SEQCHECK_SEEDS=0-2000 pytest -m campaign tests/test_campaign_laws.py`.
"""

import re
from collections.abc import Callable, Iterator
from dataclasses import fields, is_dataclass, replace
from enum import Enum
from random import Random
from typing import Any, NamedTuple

import pytest
from judge.draws import draw
from proofs import ENDLESS, SAFE, Answer, at_most, leg
from reading import drive_of
from test_campaign_judged import LIMITS, chunks, named
from test_judged import rank

from seqcheck.circuit import shorting_sets
from seqcheck.drive import After, Carrier, Drive, How, Order, Part, SetStep, Step, WaitStep, When
from seqcheck.hazards import Hazard
from seqcheck.proving.prove import Proven, Prover
from seqcheck.proving.search import LimitReached
from seqcheck.quantities import Interval

SEEDS = range(16)
"""The slice of the normal suite."""

ZONES = 600


class Answers(NamedTuple):
    """What is proven of one shorting set: the verdict or overlap, and whether it holds however late."""

    said: Answer
    however_late: bool


Proofs = dict[tuple[frozenset[str], bool], Answers]
"""By the names of the switches, and whether with interlocks; what reached its limit has no entry."""


def proofs_of(drive: Drive, zones: int, only: Proofs | None = None) -> Proofs:
    """What is proven of every shorting set, or of those that `only` has."""
    prover, found = Prover(drive), Proofs()
    for hazard in shorting_sets(drive.stage):
        for interlocks in (True, False) if drive.interlocks else (True,):
            key = frozenset(one.switch for one in hazard.literals), interlocks
            answer = answer_of(prover, hazard, interlocks, zones) if only is None or key in only else None
            if answer:
                found[key] = answer
    return found


def answer_of(prover: Prover, hazard: Hazard, interlocks: bool, zones: int) -> Answers | None:
    """One proof's answer, None where it reached its limit, or did while looking for a longer overlap."""
    try:
        proof = prover.prove(hazard, interlocks, at_most(zones))
    except LimitReached:
        return None
    if isinstance(proof, Proven):
        return Answers(SAFE, proof.however_late)
    if not proof.greatest:
        return None
    return Answers(ENDLESS if proof.overlap is None else proof.overlap, False)


def times(answers: Answers, factor: int) -> Answers:
    """The answer with its overlap multiplied."""
    said = answers.said
    return answers if isinstance(said, str) else Answers(said * factor, False)


def at_least(wider: Answer, answer: Answer) -> bool:
    """Whether an answer is no better than another: unsafe stays unsafe, and the overlap does not shrink."""
    return rank(wider) >= rank(answer)


# Changes of a drive


Changed = Callable[[Any], Any]


def everywhere(drive: Any, change: Changed) -> Any:
    """A model with `change` applied to every object in it, inside first."""
    if isinstance(drive, tuple):
        return tuple(everywhere(one, change) for one in drive)
    if isinstance(drive, dict):
        return {name: everywhere(one, change) for name, one in drive.items()}
    if is_dataclass(drive) and not isinstance(drive, (type, Enum)) and type(drive).__name__ != "Place":
        news = {one.name: everywhere(getattr(drive, one.name), change) for one in fields(drive)}
        return change(replace(drive, **news))
    return drive


def scaled(drive: Drive, factor: int) -> Drive:
    """Every time multiplied."""

    def more(time: int | None) -> int | None:
        return None if time is None else time * factor

    def change(one: Any) -> Any:
        match one:
            case Interval():
                return Interval(one.lo * factor, more(one.hi))
            case When():
                return replace(one, earliest=one.earliest * factor, latest=more(one.latest))
            case Part():
                return replace(one, difference=more(one.difference))
        if type(one).__name__ == "Trip":
            return replace(one, within=more(one.within))
        if type(one).__name__ == "Clock":
            return replace(one, late=more(one.late))
        return one

    return everywhere(drive, change)  # type: ignore[no-any-return]


NAMES = {"UH": "zz", "UL": "a", "VH": "Q9", "VL": "_v", "C": "b_", "SA": "y", "SB": "x"}
MODES = {"ma": "n4", "mb": "n3", "mc": "n2", "md": "n1"}


def renamed(text: str) -> str:
    """The text with other names of switches and modes, in another order of the alphabet."""
    for old, new in (*NAMES.items(), *MODES.items(), ("k", "carrier_k"), ("j", "a_j")):
        text = replaced(text, old, new)
    return text


def replaced(text: str, old: str, new: str) -> str:
    """A name replaced where it stands as a word."""
    return re.sub(rf"\b{old}\b", new, text)


def mirrored(drive: Drive) -> Drive | None:
    """The table's columns the other way round; None where the order of the table is an order of writes."""
    if drive.writes and drive.writes.order is Order.TABLE:
        return None
    modes = {name: replace(mode, cells=mode.cells[::-1]) for name, mode in drive.modes.items()}
    return replace(drive, columns=drive.columns[::-1], modes=modes)


def with_a_lost_mode(text: str, seed: int) -> str:
    """The text with a mode that nothing leads to, with a move to every other mode; `any` covers it too."""
    rng, lines = Random(seed), []
    modes, width = sorted(drive_of(text).modes), len(drive_of(text).columns)
    for line in text.splitlines():
        if line == "moves":
            lines.append(f"  lost {' '.join(rng.choice(('on', 'off')) for _ in range(width))}")
        lines.append(line)
        if line.startswith("  start "):
            lines += [f"  lost -> {mode} when ghost_{mode}" for mode in modes if mode != "reset"]
    return "\n".join(lines) + "\n"


def with_waits_cut(drive: Drive, seed: int) -> Drive:
    """Every wait as two, whose lengths add up to it."""
    rng = Random(seed)

    def cut(one: Step) -> tuple[Step, ...]:
        if isinstance(one, SetStep):
            return (one,)
        lo = rng.randint(0, one.time.lo)
        hi = None if one.time.hi is None else rng.randint(lo, one.time.hi - one.time.lo + lo)
        rest = None if one.time.hi is None or hi is None else one.time.hi - hi
        return replace(one, time=Interval(lo, hi)), replace(one, time=Interval(one.time.lo - lo, rest))

    def change(one: Any) -> Any:
        if type(one).__name__ not in ("Move", "Trip"):
            return one
        return replace(one, steps=tuple(piece for step in one.steps for piece in cut(step)))

    return everywhere(drive, change)  # type: ignore[no-any-return]


# Bounds made wider


def wider(span: Interval, least: int = 0) -> Iterator[Interval]:
    """A span with its lower bound lower, and with its upper bound higher."""
    if span.lo > least:
        yield Interval(max(least, span.lo - 2), span.hi)
    if span.hi is not None:
        yield Interval(span.lo, span.hi + 2)


def widenings(one: Any) -> Iterator[Any]:
    """Ways to let one object of a drive do more than it does."""
    match one:
        case Part(difference=None):
            yield from (replace(one, on=on) for on in wider(one.on))
            yield from (replace(one, off=off) for off in wider(one.off))
        case Part(difference=int(most)):
            # With its bounds the raise would move, which is no widening; the difference itself is one.
            yield replace(one, difference=most + 2)
        case WaitStep():
            yield from (replace(one, time=time) for time in wider(one.time))
        case After():
            yield from (After(span) for span in wider(one.span))
        case When(latest=int(latest)):
            yield replace(one, latest=latest + 2)
        case When(earliest=earliest) if earliest > 0:
            yield replace(one, earliest=0)
        case Carrier():
            yield from _wider_carrier(one)
    yield from _wider_by_name(one)


def _wider_carrier(one: Carrier) -> Iterator[Carrier]:
    if one.high:
        yield from (replace(one, high=high) for high in wider(one.high, least=1))
    if one.low:
        yield from (replace(one, low=low) for low in wider(one.low, least=1))
    yield from (replace(one, dead=dead) for dead in wider(one.dead))


def _wider_by_name(one: Any) -> Iterator[Any]:
    kind = type(one).__name__
    if kind in ("Pin", "Interlock"):
        name = {"Pin": "after", "Interlock": "dead"}[kind]
        yield from (replace(one, **{name: span}) for span in wider(getattr(one, name)))
    if kind == "Trip" and one.within is not None:
        yield replace(one, within=one.within + 2)
    if kind == "Clock" and one.late is not None:
        yield replace(one, late=one.late + 2)
    if kind == "Writes" and one.how is not How.TOGETHER:
        yield from (replace(one, gap=gap) for gap in wider(one.gap))
        yield replace(one, order=Order.ANY)
    if kind == "Drive" and one.loop:
        yield replace(one, loop=None)


def widened(drive: Drive, seed: int) -> Drive | None:
    """The drive with one bound made wider; None where it has none."""
    ways: list[tuple[int, int]] = []
    seen = 0

    def note(one: Any) -> Any:
        nonlocal seen
        ways.extend((seen, way) for way in range(len(list(widenings(one)))))
        seen += 1
        return one

    everywhere(drive, note)
    if not ways:
        return None
    chosen, which = Random(seed).choice(ways)
    at = 0

    def change(one: Any) -> Any:
        nonlocal at
        at += 1
        return list(widenings(one))[which] if at == chosen + 1 else one

    return everywhere(drive, change)  # type: ignore[no-any-return]


# Laws: each says what is wrong with a drive, in words


def broken(seed: int, zones: int) -> Iterator[str]:
    """Every law that one draw breaks."""
    text = draw(seed)
    drive = drive_of(text)
    proofs = proofs_of(drive, zones)
    late = drive.clock is not None and bool(drive.clock.late)
    yield from unequal("scaled", {key: times(one, 7) for key, one in proofs.items()}, scaled(drive, 7), zones)
    yield from unequal("with a lost mode", proofs, drive_of(with_a_lost_mode(text, seed)), zones)
    other_names = {(frozenset(NAMES[one] for one in key[0]), key[1]): found for key, found in proofs.items()}
    yield from unequal("renamed", other_names, drive_of(renamed(text)), zones)
    if other := mirrored(drive):
        yield from unequal("mirrored", proofs, other, zones)
    cut = with_waits_cut(drive, seed)
    # Each wait can be late, two waits twice.
    yield from worse("with waits cut", proofs, cut, zones) if late else unequal("with waits cut", proofs, cut, zones)
    for number in range(3):
        if other := widened(drive, 3 * seed + number):
            yield from worse(f"widened {number}", proofs, other, zones)


def unequal(what: str, expected: Proofs, drive: Drive, zones: int) -> Iterator[str]:
    """Where the proofs of a drive are not what is expected."""
    for key, found in proofs_of(drive, zones, expected).items():
        if found != expected[key]:
            yield f"{what}: {sorted(key[0])} {key[1]} was {expected[key]}, is {found}"


def worse(what: str, before: Proofs, drive: Drive, zones: int) -> Iterator[str]:
    """Where a drive that can do more is proven to do less harm."""
    for key, found in proofs_of(drive, zones, before).items():
        if not at_least(found.said, before[key].said):
            yield f"{what}: {sorted(key[0])} {key[1]} was {before[key]}, is {found}"


@pytest.mark.parametrize("seed", SEEDS)
def test_laws(seed: int) -> None:
    """Every law holds of a draw."""
    assert list(broken(seed, ZONES)) == []


def test_widening_is_no_empty_law() -> None:
    """Where times just suffice, one wider bound makes a drive unsafe; else it makes the overlap longer."""
    said = {pause: [_widened_leg(pause, seed) for seed in range(12)] for pause in (5, 4)}
    assert {SAFE, 2} <= set(said[5])
    assert {1, 3} <= set(said[4])


def _widened_leg(pause: int, seed: int) -> Answer:
    move = (
        f"start ma\nma -> mb when go\n  set all off\n  wait {pause} ps\nmb -> ma when back\n  set all off\n  wait 9 ps"
    )
    other = widened(drive_of(leg("ma off on\nmb on off", move)), seed)
    assert other is not None
    (answers,) = proofs_of(other, ZONES).values()
    return answers.said


@pytest.mark.parametrize("seed", SEEDS)
def test_reading_scales(seed: int) -> None:
    """A text in ns and MHz in place of ps and GHz gives the same drive with every time a thousandfold.

    Only where nothing is rounded, and with a clock if a carrier has edges that come a tick apart.
    """
    text = draw(seed)
    rounded = " within " in text.partition("stage")[0] or re.search(r"GHz within|\d\.\d+ GHz", text)
    if not rounded and ("\nclock" in text or "carriers" not in text):
        larger = text.replace(" ps", " ns").replace("GHz", "MHz")
        assert scaled(drive_of(text), 1000).moves == drive_of(larger).moves


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_laws_of_many(seeds: range) -> None:
    """Every law holds of every draw."""
    assert [f"draw({seed}) {one}" for seed in seeds for one in broken(seed, LIMITS.zones)] == []

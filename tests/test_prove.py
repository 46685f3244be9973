"""The proof of one hazard: what its answer says besides safe and unsafe, and laws that hold between proofs."""

import re
from dataclasses import replace

import pytest
from judge.draws import draw
from proofs import at_most, leg, silent
from reading import drive_of

from seqcheck.checking import check
from seqcheck.circuit import shorting_sets
from seqcheck.drive import Drive
from seqcheck.evidence.replay import replay
from seqcheck.proving.prove import Proven, Prover, Refuted
from seqcheck.proving.search import LimitReached
from seqcheck.quantities import Interval
from seqcheck.verdict import Check, Safe, Undecided, Unsafe

SWAP = "a on off\nb off on"
STEPS = "  start a\n  a -> b when go\n    set A off\n    wait {}"
INVERTED = "p on 7 ps to 8 ps off 1 ps to 2 ps"
"""Paths that bear both commands for 5 ps."""


def only(drive: Drive, *, interlocks: bool = True) -> Proven | Refuted:
    """The proof of a drive's only hazard."""
    (hazard,) = shorting_sets(drive.stage)
    return Prover(drive).prove(hazard, interlocks, silent)


def proof(text: str, *, interlocks: bool = True) -> Proven | Refuted:
    """The same of a text."""
    return only(drive_of(text), interlocks=interlocks)


# What an answer says


def test_screen_settles_what_least_times_settle() -> None:
    """No zone is stored, and lateness does not matter."""
    assert proof(leg(SWAP, STEPS.format("5 ps"))) == Proven("screen", 0, True)


def test_zones_settle_the_rest() -> None:
    """Upper bounds of firmware decide: zones, and the word that it rests on them."""
    moves = "  start a\n  a -> ab when go\n  ab -> b after up to 5 ps"
    found = proof(leg("a on off\nab on on\nb off on", moves, parts=INVERTED))
    assert isinstance(found, Proven)
    assert (found.method, found.however_late) == ("zones", False)
    assert found.zones > 0


def test_however_late_by_zones() -> None:
    """Zones may show it as well: B comes and goes in one instant, and vanishes on its path (7 ps on, 5 ps off), if
    that does not happen again within 5 ps."""
    moves = "  start a\n  a -> a when go earliest 6 ps\n    set B on\n    set B off"
    found = proof(leg("a on off", moves, parts="p on 7 ps off 5 ps"))
    assert isinstance(found, Proven)
    assert (found.method, found.however_late) == ("zones", True)


@pytest.mark.parametrize(
    ("rows", "held", "overlap"),
    [("a on off\nb on on", True, None), ("a on off\nb off on", False, 5), ("a on on\nb off on", True, None)],
)
def test_held_or_in_passing(rows: str, held: bool, overlap: int | None) -> None:
    """A row that commands both is told apart from a change that brings both together."""
    found = proof(leg(rows, "  start a\n  a -> b when go"))
    assert isinstance(found, Refuted)
    assert (found.held is not None, found.overlap) == (held, overlap)
    assert found.trace.interlocked


def test_held_for_a_while() -> None:
    """A timed row ends: the overlap is as long as the row and the delays."""
    moves = "  start i\n  i -> ab when go earliest 9 ps\n  ab -> i after 20 ps to 30 ps"
    found = proof(leg("i off off\nab on on", moves))
    assert isinstance(found, Refuted)
    assert (found.held, found.overlap) == ("ab", 30 + 7 - 2)


def test_with_and_without_interlock() -> None:
    """The same hazard, judged as if the drive had no interlock."""
    text = leg(SWAP, "  start a\n  a -> b when go", paths="A B through p\ninterlock A B dead time 5 ps")
    assert isinstance(proof(text), Proven)
    found = proof(text, interlocks=False)
    assert isinstance(found, Refuted)
    assert (found.overlap, found.trace.interlocked) == (5, False)
    (verdict,) = check(drive_of(text), "x", frozenset(), silent).verdicts
    assert isinstance(verdict, Safe)
    warnings = [one.check for one in check(drive_of(text), "x", frozenset(), silent).findings]
    assert Check.HELD_BY_INTERLOCK in warnings


def test_punctual_is_said_where_the_file_is_silent() -> None:
    """Only where the proof rests on upper bounds and no lateness is given."""
    moves = "  start a\n  a -> ab when go\n  ab -> b after up to {} ps"
    rows = "a on off\nab on on\nb off on"
    heads = {"writes together": True, "clock 1 GHz\nwrites together": True}
    heads["clock 1 GHz, late by at most 0 ps\nwrites together"] = False
    for head, said in heads.items():
        outcome = check(drive_of(leg(rows, moves.format(5), head=head, parts=INVERTED)), "x", frozenset(), silent)
        assert (Check.PUNCTUAL in [one.check for one in outcome.findings]) is said
    late = leg(rows, moves.format(3), head="clock 1 GHz, late by at most 3 ps\nwrites together", parts=INVERTED)
    found = proof(late)
    assert isinstance(found, Refuted)
    assert found.overlap == 1


# Limits


CARRIED = leg(
    "i off off\nm k ~k",
    "  start i\n  i -> m when go\n  m -> i when stop",
    more="carriers\n  k 50 GHz duty 30 % to 70 % dead time 4 ps",
)


def test_the_observer_stops_a_proof() -> None:
    """Its exception passes through, and in the pipeline it is an answer of its own kind."""
    drive = drive_of(CARRIED)
    (hazard,) = shorting_sets(drive.stage)
    with pytest.raises(LimitReached, match="3 zones"):
        Prover(drive).prove(hazard, True, at_most(3))
    (verdict,) = check(drive, "x", frozenset(), at_most(3)).verdicts
    assert isinstance(verdict, Undecided)
    assert verdict.zones == 4


def test_every_limit_is_undecided_or_the_answer() -> None:
    """Whatever the limit, never another answer."""
    drive = drive_of(CARRIED)
    (hazard,) = shorting_sets(drive.stage)
    right = Prover(drive).prove(hazard, True, silent)
    assert isinstance(right, Refuted)
    for zones in range(1, right.zones + 2, max(1, right.zones // 9)):
        try:
            found = Prover(drive).prove(hazard, True, at_most(zones))
        except LimitReached:
            continue
        assert isinstance(found, Refuted)
        assert found.overlap == right.overlap


def test_zones_count_up_over_all_searches() -> None:
    """The observer sees every number once, so that a limit is one on the whole proof; before, 0 for each state."""
    seen: list[int] = []
    drive = drive_of(CARRIED)
    (hazard,) = shorting_sets(drive.stage)
    found = Prover(drive).prove(hazard, True, seen.append)
    seen = seen[seen.count(0) :]
    assert seen == list(range(1, len(seen) + 1))
    assert found.zones == len(seen)


# Laws


SEEDS = (11, 17, 23, 30, 39, 45, 52, 68, 76, 79, 92, 102, 119, 120, 137, 149, 166, 198)


def answers(drive: Drive, *, shared: bool = True) -> dict[str, tuple[bool, int | None]]:
    """For each hazard whether it is safe, and its overlap; with one prover for all or one for each."""
    prover, found = Prover(drive), {}
    for hazard in shorting_sets(drive.stage):
        one = (prover if shared else Prover(drive)).prove(hazard, True, at_most(20_000))
        name = " ".join(literal.switch for literal in hazard.literals)
        found[name] = (isinstance(one, Proven), None if isinstance(one, Proven) else one.overlap)
    return found


@pytest.mark.parametrize("seed", SEEDS)
def test_hazards_do_not_disturb_each_other(seed: int) -> None:
    """Sharing firmwares and maps between hazards changes no answer; nor does asking again."""
    drive = drive_of(draw(seed))
    assert answers(drive) == answers(drive) == answers(drive, shared=False)


def later(drive: Drive) -> Drive:
    """The drive with every turn-off 1 ps later at worst."""

    def slower(off: Interval) -> Interval:
        return Interval(off.lo, None if off.hi is None else off.hi + 1)

    parts = {name: replace(part, off=slower(part.off), difference=None) for name, part in drive.parts.items()}
    paths = {switch: tuple(parts[part.name] for part in path) for switch, path in drive.paths.items()}
    return replace(drive, parts=parts, paths=paths)


def without_differences(drive: Drive) -> Drive:
    """The drive with no `difference`, so that `later` changes one thing."""
    parts = {name: replace(part, difference=None) for name, part in drive.parts.items()}
    paths = {switch: tuple(parts[part.name] for part in path) for switch, path in drive.paths.items()}
    return replace(drive, parts=parts, paths=paths)


@pytest.mark.parametrize("seed", SEEDS)
def test_slower_turn_offs_are_never_safer(seed: int) -> None:
    """Possibility is monotone in `out`: no hazard goes away, no overlap gets shorter."""
    drive = without_differences(drive_of(draw(seed)))
    after = answers(later(drive))
    for name, (safe, overlap) in answers(drive).items():
        safe_after, overlap_after = after[name]
        assert safe or not safe_after
        if not safe:
            assert overlap_after is None or (overlap is not None and overlap_after >= overlap)


def scaled(text: str, factor: int) -> str:
    """All times longer by a factor, frequencies lower."""
    longer = re.sub(r"\b(\d+) ps", lambda one: f"{int(one[1]) * factor} ps", text)
    return re.sub(r"\b(\d+) GHz", lambda one: f"{int(one[1]) * 1000 // factor} MHz", longer)


def scalable(seed: int) -> bool:
    """Whether nothing in a drawn text is rounded: no tolerance, and no carrier with levels of parts of 1 ps or none."""
    text = draw(seed)
    return not re.search(r"within \d+ (ppm|%)|GHz duty", text)


@pytest.mark.parametrize("seed", [seed for seed in range(60) if scalable(seed)])
def test_time_has_no_scale(seed: int) -> None:
    """Ten times slower everything overlaps ten times as long: whole picoseconds lose nothing."""
    for name, (safe, overlap) in answers(drive_of(scaled(draw(seed), 10))).items():
        was_safe, was = answers(drive_of(draw(seed)))[name]
        assert (safe, overlap) == (was_safe, None if was is None else was * 10)


# Evidence


@pytest.mark.parametrize("seed", SEEDS)
def test_evidence_replays(seed: int) -> None:
    """Every counterexample is a run that the drive permits, and its overlap is the one that was found.

    The run to a row that commands all at once need not be the one with the longest overlap, and of an overlap that
    goes on by going round again and again one round is shown.
    """
    drive = drive_of(draw(seed))
    for verdict in check(drive, "x", frozenset(), at_most(20_000)).verdicts:
        if isinstance(verdict, Unsafe):
            span = replay(drive, verdict.trace).overlap
            if verdict.overlap is None:
                continue
            assert span.end is not None
            length = span.end - span.start
            assert length == verdict.overlap or (verdict.check is Check.SHORT and length < verdict.overlap)


def test_shortest_run_first() -> None:
    """Of all runs one with the fewest moves is shown."""
    rows = "a on off\nb off off\nc off on\nd off off"
    moves = (
        "  start a\n  a -> b when e1\n    set A off\n    wait 9 ps\n  b -> c when e2\n  c -> d when e3\n"
        "    set B off\n    wait 9 ps\n  d -> a when e4\n  c -> a when e5"
    )
    found = proof(leg(rows, moves))
    assert isinstance(found, Refuted)
    begun = [event.index for event in found.trace.events if event.act.value == "begins"]
    assert begun == [0, 1, 4]

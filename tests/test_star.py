"""Windings that are driven by way of each other: in star, in series. None of their far ends is held by a supply."""

import pytest
from outside import at_rest
from reading import drive_of

from seqcheck.circuit.reading import read_back
from seqcheck.effects import Kind, Level, Row
from seqcheck.reports.does import does
from seqcheck.reports.drawing.kinds import Does, said

STARTER = (
    "sources L1 L2 L3",
    "switch KM from L1 to U1, L2 to V1, L3 to W1 two way",
    "switch KY from U2 to Y, V2 to Y, W2 to Y two way",
    "winding U1 U2",
    "winding V1 V2",
    "winding W1 W2",
)
SERIES = (
    "rails P N",
    "switch A from P to U two way",
    "switch B from P to V two way",
    "switch C from V to N two way",
    "switch J from X to Z two way",
    "winding U X",
    "winding V Z",
)


def row(stage: tuple[str, ...], switches: str, bits: str) -> Row:
    """The row of one word."""
    (found,) = read_back(drive_of(at_rest(stage, switches.split(), bits)), "t.dseq").rows
    return found


def test_a_star_point_makes_three_windings_one_circuit() -> None:
    """Star connection: each winding between a phase and the common point of all three [common practice]."""
    star = row(STARTER, "KM KY", "11")
    (word,) = star.words
    assert [(one.kind, one.nodes, one.levels) for one in word.windings] == [
        (Kind.STAR, ("U1",), (Level("L1"),)),
        (Kind.STAR, ("V1",), (Level("L2"),)),
        (Kind.STAR, ("W1",), (Level("L3"),)),
    ]
    assert does(star) == "U1 U2, V1 V2 and W1 W2 driven in star, U1 at L1, V1 at L2, W1 at L3"
    assert said(star).does is Does.DRIVE


@pytest.mark.parametrize(("bits", "kind"), [("10", Kind.HELD), ("01", Kind.FREE), ("00", Kind.FREE)])
def test_without_the_star_point_or_the_supply_nothing_is_driven(bits: str, kind: Kind) -> None:
    (word,) = row(STARTER, "KM KY", bits).words
    assert {one.kind for one in word.windings} == {kind}


@pytest.mark.parametrize(
    ("bits", "kinds", "words"),
    [
        ("1011", {Kind.STAR}, "U X and V Z driven in series, U at P, V at N"),
        ("1010", {Kind.HELD}, "U X one end held, U at P, V Z one end held, V at N"),
        ("1101", {Kind.HELD}, "U X one end held, U at P, V Z one end held, V at P"),
        ("1001", {Kind.HELD, Kind.FREE}, "U X one end held, U at P, V Z free"),
    ],
)
def test_two_windings_in_series(bits: str, kinds: set[Kind], words: str) -> None:
    """Driven only where both far ends are held, at two levels, and the near ones are joined."""
    found = row(SERIES, "A B C J", bits)
    assert {one.kind for one in found.words[0].windings} == kinds
    assert does(found).removesuffix(", no way for current between U and X or between V and Z") == words


def test_what_joins_must_conduct_both_ways() -> None:
    one_way = tuple(line.replace("X to Z two way", "X to Z one way") for line in SERIES)
    assert {one.kind for one in row(one_way, "A B C J", "1011").words[0].windings} == {Kind.HELD}


def test_a_row_that_drives_in_series_by_turns_does_not_brake() -> None:
    stage = (*SERIES, "switch Q from U to X two way", "switch R from V to Z two way")
    text = at_rest(stage, ["A", "B", "C", "J", "Q", "R"], "110111")
    text = text.replace("modes", "carriers\n  k 9 kHz duty 50 %\nmodes")
    for cells, amiss in (("on on off on on on", ""), ("on k ~k on k k", "it drives a winding by turns")):
        rows = f"idle {'off ' * 6}\n  only {cells} means brake"
        asked = text.replace("only on on off on on on", rows).replace("start only", "start idle")
        assert read_back(drive_of(asked), "t.dseq").rows[1].amiss == amiss

"""Opening sets against every subset of the switches of random small stages, and on stages that are known."""

from itertools import combinations
from random import Random

import pytest
from test_circuit import HERE, drawn, stage, subsets

from seqcheck.circuit import contradicted, graph, opening_sets
from seqcheck.drive import Conducts, CurrentInto, CurrentOut, Stage, Winding
from seqcheck.evidence.cover.openings import first_unclaimed, opens
from seqcheck.hazards import Current, Hazard
from seqcheck.messages import Problems


def wound(one: Stage, *windings: str) -> Stage:
    """The stage with windings that must flow: `"X"`, `"U V"`."""
    lines = tuple(Winding(HERE, tuple(ends.split()), True) for ends in windings)
    return Stage(HERE, one.rails, one.sources, one.capacitors, one.switches, one.diodes, lines, ())


def sets(one: Stage) -> list[str]:
    """The opening sets in words: switches, and the currents that they stop."""
    return [
        f"{' '.join(lit.switch for lit in hazard.literals)}: "
        + ", ".join(f"{current.out_of or '*'}>{current.into or '*'}" for current in hazard.currents)
        for hazard in opening_sets(one)
    ]


# The definition: is there a way round


def flows(one: Stage, off: frozenset[str], current: Current) -> bool:
    """Whether a current comes round while these switches do not conduct, by going over all edges again and again."""
    edges = {(diode.start, diode.end) for diode in one.diodes}
    for switch in one.switches:
        for start, end in switch.poles:
            on = switch.name not in off
            edges |= {(start, end)} if on else set()
            back = switch.conducts is Conducts.DIODE or (switch.conducts is Conducts.TWO_WAY and on)
            edges |= {(end, start)} if back else set()
    supplies = [line.nodes for line in (*one.rails, *one.sources)]
    for nodes in (*supplies, *((cap.positive, cap.negative) for cap in one.capacitors)):
        edges |= {(a, b) for a in nodes for b in nodes}
    anywhere = {node for nodes in supplies for node in nodes}
    reached = {current.into} if current.into else set(anywhere)
    for _ in range(len(edges) + 1):
        reached |= {end for start, end in edges if start in reached}
    return bool(reached & ({current.out_of} if current.out_of else anywhere))


def said(hazards: tuple[Hazard, ...], off: frozenset[str], current: Current) -> bool:
    """Whether the hazards say that this current has no way."""
    out, into = current.out_of, current.into
    facts = [*([CurrentOut(out)] if out else []), *([CurrentInto(into)] if into else [])]
    return any(
        {literal.switch for literal in hazard.literals} <= off and not contradicted(hazard, facts) for hazard in hazards
    )


def with_winding(rng: Random) -> tuple[Stage, tuple[Current, Current]]:
    """A random stage with a winding at one or two of the nodes of its switches."""
    one = drawn(rng)
    nodes = sorted({node for switch in one.switches for pole in switch.poles for node in pole})
    if rng.random() < 0.5:
        (node,) = rng.sample(nodes, 1)
        return wound(one, node), (Current(node, None), Current(None, node))
    first, second = rng.sample(nodes, 2)
    return wound(one, f"{first} {second}"), (Current(first, second), Current(second, first))


@pytest.mark.parametrize("block", range(12))
def test_sets_by_brute_force(block: int) -> None:
    """Switches that are off stop a current if and only if they hold an opening set of that current."""
    rng, compared = Random(block), 0
    for _ in range(40):
        one, both = with_winding(rng)
        able = [current for current in both if flows(one, frozenset(), current)]
        if not able:
            with pytest.raises(Problems) as caught:
                opening_sets(one)
            assert [problem.kind for problem in caught.value.found] == ["always-open"]
            continue
        hazards = opening_sets(one)
        for off in subsets(one):
            for current in able:
                assert said(hazards, off, current) == (not flows(one, off, current)), (one, off, current)
        compared += bool(hazards)
    assert compared >= 3


@pytest.mark.parametrize("block", range(12))
def test_the_checker_asks_for_just_these(block: int) -> None:
    """The audit's own walk is content with all opening sets, misses each that is left out, and finds each to open."""
    rng = Random(100 + block)
    for _ in range(30):
        one, _ = with_winding(rng)
        try:
            hazards = opening_sets(one)
        except Problems:
            continue
        assert first_unclaimed(one, hazards) is None
        for hazard in hazards:
            assert opens(one, hazard)
            assert first_unclaimed(one, tuple(other for other in hazards if other != hazard)) is not None
            fewer = [Hazard(part, (), hazard.needs, hazard.currents) for part in combinations(hazard.literals, 1)]
            assert len(hazard.literals) == 1 or not any(opens(one, other) for other in fewer)


# Known stages; common practice where no source is named


@pytest.mark.parametrize(
    ("one", "right"),
    [
        # the diodes of a bridge always lead its current on
        (wound(stage("P N", switches="UH P-U, UL U-N, VH P-V, VL V-N"), "U V"), []),
        (wound(stage("P N", switches="UH P-U, UL U-N"), "U"), []),
        # a buck converter: its current has one direction, and the diode takes it over
        (wound(stage("P N", switches="S P-X one way", diodes="N-X"), "X"), []),
        # without the diode the switch must not open
        (wound(stage("P N", switches="S P-X one way"), "X"), ["S: X>*"]),
        # a magnet between two switches: the diode across it is a way round past both
        (wound(stage("P N", switches="A P-U one way, B V-N one way", diodes="V-U"), "U V"), []),
        (wound(stage("P N", switches="A P-U one way, B V-N one way"), "U V"), ["A: U>V", "B: U>V"]),
        # a current-source inverter: one of the upper and one of the lower three must conduct
        (
            wound(
                stage(
                    "P N",
                    "A B C",
                    "",
                    "S1 K-A one way, S3 K-B one way, S5 K-C one way, S4 A-N one way, S6 B-N one way, S2 C-N one way",
                ),
                "P K",
            ),
            ["S1 S3 S5: P>K", "S4 S6 S2: P>K"],
        ),
        # two inputs onto one load, by switches that conduct both ways, and by pairs that conduct one way
        (wound(stage("", "a b", "", "A a-X two way, B b-X two way"), "X"), ["A B: X>*, *>X"]),
        (
            wound(stage("", "a b", "", "Af a-X one way, Ar X-a one way, Bf b-X one way, Br X-b one way"), "X"),
            ["Af Bf: X>*", "Ar Br: *>X"],
        ),
        # supplies without a common node do not close a circuit
        (wound(stage("P N, Q M", switches="A P-U one way, B V-N one way, C V-M one way"), "U V"), ["A: U>V", "B: U>V"]),
        # a flying capacitor is passed either way, and is no supply
        (wound(stage("P N", "", "C D", "A P-C one way, B C-X one way, E N-D one way"), "X"), ["B: X>*", "A E: X>*"]),
    ],
)
def test_known_stages(one: Stage, right: list[str]) -> None:
    assert sets(one) == right


def test_a_star_point_is_no_end_of_its_own() -> None:
    """What flows into it flows out through the other windings."""
    switches = "AU a-U two way, BU b-U two way, AV a-V two way, BV b-V two way"
    found = sets(wound(stage("", "a b", "", switches), "U S", "V S"))
    assert found == ["AU BU: U>*, *>U", "AV BV: V>*, *>V"]


def test_a_fact_about_a_node_of_two_windings_tells_nothing_of_one() -> None:
    """It is about their sum, so that no direction of either is ruled out by it."""
    one = wound(stage("", "a b", "", "A a-X one way, B b-X one way"), "X", "X")
    assert [hazard.needs for hazard in opening_sets(one)] == [()]


def test_known_directions() -> None:
    """A hazard that needs the opposite direction is not asked for."""
    one = wound(stage("", "a b", "", "Af a-X one way, Ar X-a one way"), "X")
    out, into = opening_sets(one)
    assert not contradicted(out, [CurrentOut("X")])
    assert contradicted(out, [CurrentInto("X")])
    assert contradicted(into, [CurrentOut("X")])
    assert not contradicted(into, [])


@pytest.mark.parametrize("ends", ["Z", "U Z", "P Z"])
def test_a_winding_that_stands_alone_at_its_end_is_refused(ends: str) -> None:
    one = wound(stage("P N", switches="UH P-U"), ends)
    with pytest.raises(Problems) as caught:
        opening_sets(one)
    (problem,) = caught.value.found
    assert problem.kind == "always-open"
    assert "at 'Z'" in problem.text
    assert first_unclaimed(one, ()) is not None


def test_a_winding_between_supplies_that_nothing_joins_is_refused() -> None:
    one = wound(stage("P N, Q M", switches="A P-U one way, B V-M one way"), "U V")
    with pytest.raises(Problems) as caught:
        opening_sets(one)
    (problem,) = caught.value.found
    assert problem.kind == "always-open"
    assert first_unclaimed(one, ()) is not None


def test_too_many_sets_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    """Never cut short: one of two switches on each of three ways, 2³ sets, listed or refused."""
    rows = ", ".join(f"A{k} P-x{k} one way, B{k} x{k}-X one way" for k in range(3))
    one = wound(stage("P N", switches=rows), "X")
    assert len(opening_sets(one)) == 8
    monkeypatch.setattr(graph, "MOST_SETS", 7)
    with pytest.raises(Problems) as caught:
        opening_sets(one)
    (problem,) = caught.value.found
    assert problem.kind == "too-many-sets"
    assert "more than 7" in problem.text

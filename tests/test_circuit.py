"""Shorting sets against every subset of the switches of random small stages: is there a closed way, or not."""

import re
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations, permutations, product
from random import Random

import pytest
from reading import drive_of

from seqcheck.circuit import contradicted, graph, shorting_sets
from seqcheck.circuit.facts import circular
from seqcheck.drive import Above, Capacitor, Conducts, Diode, Rails, Sources, Stage, Switch
from seqcheck.evidence.cover.shorts import first_uncovered, shorts
from seqcheck.hazards import Hazard
from seqcheck.messages import Problems
from seqcheck.source import Place

HERE = Place("stage", 1, 1, 1, 1)
Edge = tuple[str, str, int]
"""From, to, and the stiff element passed (-1: none)."""
Orders = tuple[tuple[str, ...], ...]
"""For each line of sources its nodes, highest first."""


def stage(
    rails: str = "",
    sources: str = "",
    capacitors: str = "",
    switches: str = "",
    diodes: str = "",
) -> Stage:
    """A stage from words: `"P N, Q M"`, `"a b"`, `"S P-U"` (`S P-U/U-N one way`), `"U-P"`."""
    return Stage(
        HERE,
        tuple(Rails(HERE, tuple(one.split())) for one in _parts(rails)),
        tuple(Sources(HERE, tuple(one.split())) for one in _parts(sources)),
        tuple(Capacitor(HERE, *one.split()) for one in _parts(capacitors)),
        tuple(_switch(one) for one in _parts(switches)),
        tuple(Diode(HERE, *one.split("-")) for one in _parts(diodes)),
        (),
        (),
    )


def _parts(text: str) -> list[str]:
    return [one.strip() for one in text.split(",") if one.strip()]


def _switch(text: str) -> Switch:
    name, poles, *way = text.split()
    pairs = tuple((pole.split("-")[0], pole.split("-")[1]) for pole in poles.split("/"))
    return Switch(HERE, name, pairs, Conducts(" ".join(way) or "diode"))


def sets(one: Stage) -> list[str]:
    """The shorting sets in words, in order."""
    return [" ".join(literal.switch for literal in hazard.literals) for hazard in shorting_sets(one)]


# The definition: a closed way


def edges(one: Stage, on: frozenset[str], orders: Orders) -> list[Edge]:
    """Each way in which current can pass, with the polarity of every source given.

    A supply is passed from its lower to its upper node, so that the way leaves it at its positive end.
    """
    found = [(diode.start, diode.end, -1) for diode in one.diodes]
    for switch in one.switches:
        for start, end in switch.poles:
            if switch.name in on:
                found.append((start, end, -1))
            if switch.conducts is Conducts.DIODE or (switch.conducts is Conducts.TWO_WAY and switch.name in on):
                found.append((end, start, -1))
    number = 0
    for nodes in (*(line.nodes for line in one.rails), *orders):
        found += [(lower, upper, number) for upper, lower in combinations(nodes, 2)]
        number += 1
    for line in one.capacitors:
        found += [(line.positive, line.negative, number), (line.negative, line.positive, number)]
        number += 1
    return found


def closed_ways(ways: list[Edge]) -> Iterator[list[Edge]]:
    """All closed ways that pass no node twice, each from its alphabetically first node."""
    for start in sorted({edge[0] for edge in ways}):
        waiting: list[list[Edge]] = [[edge] for edge in ways if edge[0] == start]
        while waiting:
            way = waiting.pop()
            here = way[-1][1]
            if here == start:
                yield way
                continue
            seen = {edge[0] for edge in way}
            if here not in seen and here > start:
                waiting += [[*way, edge] for edge in ways if edge[0] == here]


def shorted(one: Stage, on: frozenset[str], orders: Orders) -> bool:
    """Whether these switches short the stage: by a closed way through at least one stiff element.

    A way whose only stiff elements are capacitors leaves at least one of them at its positive end; none is passed
    there and back.
    """
    supplies = len(one.rails) + len(one.sources)
    for way in closed_ways(edges(one, on, orders)):
        stiff = [edge for edge in way if edge[2] >= 0]
        caps = [edge for edge in stiff if edge[2] >= supplies]
        if not stiff or len({edge[2] for edge in caps}) < len(caps):
            continue
        if len(caps) < len(stiff) or any(edge[1] == one.capacitors[edge[2] - supplies].positive for edge in caps):
            return True
    return False


def polarities(one: Stage) -> list[Orders]:
    """Every polarity of every line of sources."""
    return list(product(*(permutations(line.nodes) for line in one.sources)))


def facts(orders: Orders) -> list[Above]:
    """The polarity as a file would say it."""
    return [Above(upper, lower) for nodes in orders for upper, lower in combinations(nodes, 2)]


def subsets(one: Stage) -> list[frozenset[str]]:
    """Every set of switches."""
    names = [switch.name for switch in one.switches]
    return [frozenset(some) for size in range(len(names) + 1) for some in combinations(names, size)]


def said(hazards: tuple[Hazard, ...], on: frozenset[str], orders: Orders) -> bool:
    """Whether the hazards say that these switches short the stage under this polarity."""
    return any(
        {literal.switch for literal in hazard.literals} <= on and not contradicted(hazard, facts(orders))
        for hazard in hazards
    )


# Random stages


def drawn(rng: Random) -> Stage:
    """A stage with up to four switches, any supplies, now and then capacitors, diodes and contactors of two poles."""
    kinds = (
        "rails",
        "rails",
        "three rails",
        "two supplies",
        "sources",
        "sources",
        "three sources",
        "two lines",
        "both",
    )
    kind = rng.choice(kinds)
    rails = {"rails": "P N", "three rails": "P O N", "two supplies": "P N, Q M", "both": "P N"}.get(kind, "")
    sources = {"sources": "a b", "three sources": "a b c", "two lines": "a b, c d", "both": "a b"}.get(kind, "")
    stiff = f"{rails} {sources}".replace(",", " ").split()
    nodes = [*stiff, *("x", "y", "z")[: rng.randint(1, 3)]]
    caps = [" ".join(rng.sample(nodes, 2)) for _ in range(rng.choice((0, 0, 1, 1, 2)))]
    diodes = ["-".join(rng.sample(nodes, 2)) for _ in range(rng.choice((0, 0, 0, 1)))]
    switches = []
    for number in range(rng.randint(2, 4)):
        poles = "/".join("-".join(rng.sample(nodes, 2)) for _ in range(rng.choice((1, 1, 1, 1, 2))))
        switches.append(f"S{number} {poles} {rng.choice(('', '', 'one way', 'two way'))}")
    return stage(rails, sources, ", ".join(caps), ", ".join(switches), ", ".join(diodes))


def chained(rng: Random) -> Stage:
    """Switches between the three or four nodes of one line of sources, directly or by another node."""
    nodes = ["a", "b", "c", "d"][: rng.choice((3, 3, 4))]
    switches = []
    for number in range(rng.randint(2, 5)):
        poles = "/".join("-".join(rng.sample([*nodes, "x"], 2)) for _ in range(rng.choice((1, 1, 1, 2))))
        switches.append(f"S{number} {poles} {rng.choice(('one way', 'one way', 'two way'))}")
    return stage("", " ".join(nodes), "", ", ".join(switches))


@pytest.mark.parametrize("block", range(20))
def test_sets_by_brute_force(block: int) -> None:
    """A set of switches shorts if and only if it holds a shorting set that the polarity does not rule out."""
    rng, compared = Random(block), 0
    for number in range(30):
        one = drawn(rng) if number % 3 else chained(rng)
        always = any(shorted(one, frozenset(), orders) for orders in polarities(one))
        if always:
            with pytest.raises(Problems) as caught:
                shorting_sets(one)
            assert {problem.kind for problem in caught.value.found} == {"always-shorted"}
            continue
        hazards = shorting_sets(one)
        for on, orders in product(subsets(one), polarities(one)):
            assert said(hazards, on, orders) == shorted(one, on, orders), (one, on, orders)
        compared += 1
    assert compared > 5


@pytest.mark.parametrize("block", range(10))
def test_sets_are_minimal(block: int) -> None:
    """Without one of its switches a set does not short under a polarity for which it is there."""
    rng = Random(1000 + block)
    for number in range(25):
        one = drawn(rng) if number % 2 else chained(rng)
        try:
            hazards = shorting_sets(one)
        except Problems:
            continue
        for hazard in hazards:
            on = frozenset(literal.switch for literal in hazard.literals)
            needed = [orders for orders in polarities(one) if not contradicted(hazard, facts(orders))]
            assert any(
                shorted(one, on, orders) and not any(shorted(one, on - {name}, orders) for name in on)
                for orders in needed
            ), (one, hazard)


@pytest.mark.parametrize("block", range(10))
def test_the_checker_of_evidence_finds_all_shorts_in_the_sets(block: int) -> None:
    """Each closed way is one of a set that is asked for then, and no set could be left out."""
    rng = Random(2000 + block)
    for number in range(25):
        one = drawn(rng) if number % 2 else chained(rng)
        try:
            hazards = shorting_sets(one)
        except Problems:
            continue
        assert first_uncovered(one, hazards) is None, one
        assert all(shorts(one, hazard) for hazard in hazards), one
        for place in range(len(hazards)):
            assert first_uncovered(one, hazards[:place] + hazards[place + 1 :]) is not None, (one, hazards[place])


# Known stages


@pytest.mark.parametrize(
    ("one", "right"),
    [
        (stage("P N", switches="H P-U, L U-N"), ["H L"]),
        (stage("P N", switches="UH P-U, UL U-N, VH P-V, VL V-N"), ["UH UL", "VH VL"]),
        # diode-clamped, Nabae, Takahashi, Akagi 1981: from memory; sets derived
        (stage("P O N", switches="S1 P-a, S2 a-X, S3 X-b, S4 b-N", diodes="O-a, b-O"), ["S1 S2 S3", "S2 S3 S4"]),
        # without its diodes all four are needed
        (stage("P O N", switches="S1 P-a, S2 a-X, S3 X-b, S4 b-N"), ["S1 S2 S3 S4"]),
        # flying capacitor: the outer pair shorts the supply through it, the inner one itself
        (stage("P N", "", "a b", "S1 P-a, S2 a-X, S3 X-b, S4 b-N"), ["S1 S4", "S2 S3"]),
        # isolated supplies have no common node: no way leads back
        (stage("P N, Q M", switches="S1 P-M"), []),
        (stage("P N, Q M", switches="S1 P-M, S2 Q-N"), ["S1 S2"]),
        # a pole of its own for each way of a contactor; alone it reverses nothing
        (stage("P N", switches="S P-x/x-N"), ["S"]),
        (stage("P N", switches="S P-x/y-N, T x-y"), ["S T"]),
        # two way switches block both ways while off
        (stage("", "a b", "", "A a-X two way, B b-X two way"), ["A B"]),
        # bidirectional by two of them: each pair that points the same way
        (stage("", "a b", "", "Af a-m one way, Ar m-a one way, Bf m-b one way, Br b-m one way"), ["Af Bf", "Ar Br"]),
    ],
)
def test_known_stages(one: Stage, right: list[str]) -> None:
    """Common practice where no source is named."""
    assert sets(one) == right


def test_sources_pass_each_other_one_way() -> None:
    """Two supplies of their own in a ring of one-way switches: it is closed where both drive it."""
    (hazard,) = shorting_sets(stage("", "a b, c d", "", "A a-c one way, B d-b one way"))
    assert not contradicted(hazard, [Above("a", "b"), Above("d", "c")])
    assert contradicted(hazard, [Above("b", "a")])
    assert contradicted(hazard, [Above("c", "d")])
    (hazard,) = shorting_sets(stage("", "a b, c d", "", "A b-d one way, B c-a one way"))
    assert not contradicted(hazard, [Above("b", "a"), Above("c", "d")])
    assert contradicted(hazard, [Above("a", "b")])


def test_no_more_is_needed_than_the_least() -> None:
    """The way through the second supply as well asks for more, so that it tells nothing new."""
    (hazard,) = shorting_sets(stage("", "a b, c d", "", "S a-b/a-c/d-b one way"))
    assert hazard.needs == (frozenset({Above("a", "b")}),)


def test_a_larger_set_is_kept_for_the_polarity_that_a_smaller_one_leaves() -> None:
    """A alone shorts with a above b; with B so it does through the second supply, and with b above a by way of y."""
    one = stage("", "a b, c d", "", "A a-b/b-y/a-c one way, B y-a/d-b one way")
    alone, both = shorting_sets(one)
    assert alone.needs == (frozenset({Above("a", "b")}),)
    assert not contradicted(both, [Above("b", "a")])


def test_a_short_of_either_supply_is_ruled_out_only_by_both_polarities() -> None:
    """What is known of one supply says nothing about the other."""
    (hazard,) = shorting_sets(stage("", "a b, c d", "", "S a-b/c-d one way"))
    assert not contradicted(hazard, [Above("b", "a")])
    assert not contradicted(hazard, [Above("d", "c")])
    assert contradicted(hazard, [Above("b", "a"), Above("d", "c")])


def test_a_larger_set_goes_where_a_smaller_one_shorts_already() -> None:
    """With as much known: by one of two polarities, or by the same one at other supplies."""
    assert sets(stage("", "a b, c d, e f", "", "S a-b/c-d/a-e one way, T f-b one way")) == ["S"]
    assert sets(stage("P N", "a b", "", "S a-b/P-b one way, T a-N one way")) == ["S"]


def test_needs_of_a_matrix_leg() -> None:
    """Af with Br back to back: each way shorts under one polarity only, and both together under any."""
    one = stage("", "a b", "", "Af a-x one way, Ar x-a one way, Bf b-x one way, Br x-b one way")
    found = {" ".join(lit.switch for lit in hazard.literals): hazard for hazard in shorting_sets(one)}
    assert set(found) == {"Af Br", "Ar Bf"}
    assert found["Af Br"].needs == (frozenset({Above("a", "b")}),)
    assert contradicted(found["Af Br"], [Above("b", "a")])
    assert not contradicted(found["Af Br"], [Above("a", "b")])
    assert not contradicted(found["Af Br"], [])
    assert contradicted(found["Ar Bf"], [Above("a", "b")])


def test_facts_follow_from_each_other() -> None:
    """a above b and b above c is a above c."""
    (hazard,) = shorting_sets(stage("", "a b c", "", "S a-c one way"))
    assert contradicted(hazard, [Above("c", "b"), Above("b", "a")])
    assert not contradicted(hazard, [Above("c", "b"), Above("a", "b")])


def test_facts_do_not_forbid_shorts_of_rails() -> None:
    """What shorts a rail as well is asked for whatever is known of sources."""
    (hazard,) = shorting_sets(stage("P N", "a b", "", "S P-N/a-b one way"))
    assert hazard.needs == ()
    assert not contradicted(hazard, [Above("b", "a")])


def test_either_polarity_is_enough() -> None:
    """A short that either of two opposite polarities carries is asked for whatever is known."""
    (hazard,) = shorting_sets(stage("", "a b", "", "S a-b two way"))
    assert hazard.needs == ()
    for fact in (Above("a", "b"), Above("b", "a")):
        assert not contradicted(hazard, [fact])


def test_joins_names_the_positive_node_first() -> None:
    """For people: what a short would join."""
    hazards = shorting_sets(stage("P N", "", "a b", "S1 P-a, S2 a-X, S3 X-b, S4 b-N"))
    assert [hazard.joins for hazard in hazards] == [("P", "N"), ("a", "b")]


def test_always_shorted() -> None:
    """A diode across the rails conducts whatever the switches do."""
    with pytest.raises(Problems) as caught:
        shorting_sets(stage("P N", switches="S P-N", diodes="P-N"))
    (problem,) = caught.value.found
    assert problem.kind == "always-shorted"
    assert "'P' and 'N'" in problem.text


def test_a_set_that_others_make_needless_is_left_out() -> None:
    """One-way switches along three sources: if a is above c, a is above b or b above c, so one of the two shorts."""
    one = stage("", "a b c", "", "S a-b one way, T b-c one way")
    assert sets(one) == ["S", "T"]
    assert first_uncovered(one, shorting_sets(one)[:1]) is not None


def test_a_larger_set_stays_where_the_smaller_ones_do_not_short() -> None:
    """With b above a and c above b only all three switches short, from c to a."""
    one = stage("", "a b c", "", "S c-x one way, T x-a one way, U a-b one way")
    found = {hazard.literals[-1].switch: hazard for hazard in shorting_sets(one)}
    assert sets(one) == ["U", "S T"]
    assert found["T"].needs == (frozenset({Above("c", "a")}),)
    assert sets(stage("", "a b c", "", "S c-x one way, T x-a one way, U c-b one way")) == ["U", "S T"]


def test_a_matrix_of_three_phases() -> None:
    """From each of three inputs to each other one by the same output: 3 · 2 · 3 sets, and no way by a third input."""
    switches = ", ".join(f"F{i}{o} {i}-{o} one way, R{i}{o} {o}-{i} one way" for i in "abc" for o in "xyz")
    found = sets(stage("", "a b c", "", switches))
    assert len(found) == 18
    assert all(len(names.split()) == 2 and names[2] == names.split()[1][2] for names in found)


def ladder(*widths: int) -> Stage:
    """Between the rails groups of parallel switches in series: their product is the number of shorting sets."""
    nodes = ["P", *(f"x{place}" for place in range(1, len(widths))), "N"]
    groups = zip(widths, nodes, nodes[1:], strict=False)
    names = [
        f"S{place}_{number} {start}-{end}"
        for place, (width, start, end) in enumerate(groups)
        for number in range(width)
    ]
    return stage("P N", switches=", ".join(names))


def refusal(one: Stage) -> str:
    """Why a stage is refused: one message, whose kind is that there are too many sets."""
    with pytest.raises(Problems) as caught:
        shorting_sets(one)
    (problem,) = caught.value.found
    assert problem.kind == "too-many-sets"
    return problem.text


def test_too_many_sets_are_refused_with_their_number() -> None:
    """Never cut short: listed or refused."""
    assert len(shorting_sets(ladder(25, 40))) == 1000
    for widths, count in (((7, 11, 13), 1001), ((40, 40), 1600)):
        assert refusal(ladder(*widths)) == f"the stage has {count} minimal shorting sets; at most 1000 are proven"


def test_what_cannot_be_counted_is_refused_with_what_was_counted() -> None:
    """Singles are found first: they are no more than there are."""
    many = ladder(60, 60, 60)
    singles = stage("P N", switches=", ".join(f"T{place} P-N" for place in range(7)))
    found = refusal(replace(many, switches=many.switches + singles.switches))
    assert found == (
        "the stage has too many ways to count its minimal shorting sets; 7 were found when it was given up after"
        " 3000000 steps, and at most 1000 in all are proven"
    )


def test_few_steps_give_few_sets_and_never_a_wrong_list(monkeypatch: pytest.MonkeyPatch) -> None:
    """However early it is given up: all sets, or a refusal that counts no more than there are."""
    one = ladder(3, 3)
    listed = 0
    for steps in range(0, 1000, 7):
        monkeypatch.setattr(graph, "MOST_STEPS", steps)
        try:
            assert len(shorting_sets(one)) == 9
            listed += 1
        except Problems as problems:
            count = re.search(r"sets; (\d+) were found", problems.found[0].text)
            assert count
            assert int(count[1]) <= 9
    assert 0 < listed < 140


def test_many_ways_to_where_no_short_leads_are_no_hindrance() -> None:
    """A thousand ways to a node that is only a dead end."""
    many = ladder(40, 40)
    dead = [
        replace(one, poles=tuple((start, "x2" if end == "N" else end) for start, end in one.poles))
        for one in many.switches
    ]
    leg = stage("P N", switches="H P-U, L U-N").switches
    assert sets(replace(many, switches=(*(replace(one, conducts=Conducts.ONE_WAY) for one in dead), *leg))) == ["H L"]


def test_many_switches_in_reasonable_time() -> None:
    """Twelve legs, twelve sets."""
    legs = ", ".join(f"H{k} P-U{k}, L{k} U{k}-N" for k in range(12))
    assert sets(stage("P N", switches=legs)) == [f"H{k} L{k}" for k in range(12)]


def test_stage_of_a_file() -> None:
    """The same from a text, with legs between rails that are named."""
    text = (
        'drive "two"\nwrites together\nstage\n  rails P N\n  rails Q M\n  leg U A B between P and N\n'
        "  leg V C D between Q and M\nmodes A B C D\n  i off off off off\nmoves\n  start i\n"
    )
    assert sets(drive_of(text).stage) == ["A B", "C D"]


def test_sets_that_are_not_minimal_do_not_count(monkeypatch: pytest.MonkeyPatch) -> None:
    """Of three switches that a way through two diodes makes needless."""
    one = stage("P N", switches="A P-x one way, B P-x one way, C P-x one way, T x-N one way", diodes="P-d, d-x")
    monkeypatch.setattr(graph, "MOST_SETS", 3)
    assert sets(one) == ["T"]


def test_sets_are_counted_over_all_supplies(monkeypatch: pytest.MonkeyPatch) -> None:
    """No supply has more than three, but there are six."""
    bridges = ", ".join(f"A{k} P-N, B{k} Q-M" for k in range(3))
    two = stage("P N, Q M", switches=bridges)
    monkeypatch.setattr(graph, "MOST_SETS", 6)
    assert len(shorting_sets(two)) == 6
    monkeypatch.setattr(graph, "MOST_SETS", 5)
    assert "has 6 minimal shorting sets; at most 5 " in refusal(two)


@pytest.mark.parametrize(("order", "circle"), [("", False), ("ab", False), ("aa", True), ("ab bc", False),
                                               ("ab ba", True), ("ab bc ca", True), ("ab cd dc", True)])  # fmt: skip
def test_a_source_cannot_lie_above_itself(order: str, circle: bool) -> None:
    assert circular(Above(*pair) for pair in order.split()) is circle

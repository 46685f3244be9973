"""Two inputs onto one output by bidirectional switches (matrix converter), against the whole program.

Burany, IEEE IAS 1989, 1190-1194; Wheeler et al., IEEE Trans. Ind. Electron. 49(2), 2002, 276-288 [memory; paths derived
and seen in a public state machine].

A word is Af Ar Bf Br, f carrying into the load. A word is legal if it neither shorts the inputs nor opens the winding.
The program's verdict decides about shorts. Shorts and open windings are what the program says of files.
"""

from collections import deque
from itertools import permutations

import pytest
from outside import at_rest, lines, openings, overlaps, shorts, unsafe, words

from seqcheck.verdict import Check

SELECTOR = (
    "sources a b",
    "switch Af from a to X one way",
    "switch Ar from X to a one way",
    "switch Bf from b to X one way",
    "switch Br from X to b one way",
    "winding X must flow",
)
FOUR = ("Af", "Ar", "Bf", "Br")
A_TO_B = ("Af", "Br")
B_TO_A = ("Ar", "Bf")

OUTWARD, INWARD, NOTHING = "current out of X", "current into X", ""


def short_words(known: str) -> set[str]:
    """The words that short the inputs, by the program."""
    given = f"with {known}" if known else ""
    return {word for word in words(4) if shorts(at_rest(SELECTOR, FOUR, word, given))}


OUT_OPEN, IN_OPEN = ("Af", "Bf"), ("Ar", "Br")


def open_words(known: str) -> set[str]:
    """The words that leave the winding's current without a way, by the program."""
    given = f"with {known}" if known else ""
    return {word for word in words(4) if openings(at_rest(SELECTOR, FOUR, word, given))}


@pytest.mark.parametrize(
    ("known", "expected"),
    [
        (NOTHING, {word for word in words(4) if "1" not in word[0::2] or "1" not in word[1::2]}),
        (OUTWARD, {word for word in words(4) if "1" not in word[0::2]}),
        (INWARD, {word for word in words(4) if "1" not in word[1::2]}),
    ],
)
def test_words_that_open_the_winding(known: str, expected: set[str]) -> None:
    """Current out of X comes through Af or Bf, current into X goes through Ar or Br [derived]."""
    assert open_words(known) == expected
    assert "0000" in expected


def test_all_off_opens_and_all_on_shorts() -> None:
    """[derived]"""
    assert openings(at_rest(SELECTOR, FOUR, "0000")) == {OUT_OPEN: None, IN_OPEN: None}
    assert openings(at_rest(SELECTOR, FOUR, "1111")) == {}
    assert shorts(at_rest(SELECTOR, FOUR, "0000")) == set()
    assert shorts(at_rest(SELECTOR, FOUR, "1111")) == {A_TO_B, B_TO_A}


def legal_words(known: str) -> set[str]:
    """Words that neither short nor open."""
    return set(words(4)) - short_words(known) - open_words(known)


@pytest.mark.parametrize(
    ("known", "expected"),
    [
        (NOTHING, {"1100", "0011"}),
        (OUTWARD, {"1100", "0011", "1000", "1010", "0010"}),
        (INWARD, {"1100", "0011", "0100", "0101", "0001"}),
    ],
)
def test_legal_words(known: str, expected: set[str]) -> None:
    assert legal_words(known) == expected


def test_words_that_short_the_inputs() -> None:
    """Af with Br while a is above b, Bf with Ar while b is above a; 1111 is both [derived]."""
    expected = {word for word in words(4) if word[0] == word[3] == "1" or word[1] == word[2] == "1"}
    assert len(expected) == 7
    for known in (NOTHING, OUTWARD, INWARD):
        assert short_words(known) == expected
    assert shorts(at_rest(SELECTOR, FOUR, "1111")) == {A_TO_B, B_TO_A}


@pytest.mark.parametrize(
    ("known", "expected"),
    [
        ("a above b", {word for word in words(4) if word[0] == word[3] == "1"}),
        ("b above a", {word for word in words(4) if word[1] == word[2] == "1"}),
    ],
)
def test_words_that_short_where_the_voltage_is_known(known: str, expected: set[str]) -> None:
    """The other pair only blocks [derived]."""
    assert len(expected) == 4
    assert short_words(known) == expected


def shortest_paths(legal: set[str]) -> list[list[str]]:
    """All shortest ways from 1100 to 0011 that change one switch at a time, breadth first."""
    waiting, found = deque([["1100"]]), list[list[str]]()
    while waiting:
        path = waiting.popleft()
        if found and len(path) == len(found[0]):
            break
        for word in sorted(legal - set(path)):
            if sum(one != other for one, other in zip(path[-1], word, strict=True)) != 1:
                continue
            if word == "0011":
                found.append([*path, word])
            else:
                waiting.append([*path, word])
    return found


@pytest.mark.parametrize(
    ("known", "expected"),
    [
        (OUTWARD, [["1100", "1000", "1010", "0010", "0011"]]),
        (INWARD, [["1100", "0100", "0101", "0001", "0011"]]),
        (NOTHING, []),
    ],
)
def test_the_four_step_change_is_the_only_shortest_legal_path(known: str, expected: list[list[str]]) -> None:
    assert shortest_paths(legal_words(known)) == expected


# The same paths as moves, with time


def change(
    steps: list[str], known: str, pause: str, before: str = "on on off off", after: str = "off off on on"
) -> str:
    """One change from input a to input b in single steps; off 1.2 µs at most, on 0.5 µs at least."""
    between = "\n    wait pause\n".join(f"    set {step}" for step in steps)
    given = f" with {known}" if known else ""
    return f"""\
drive "selector"
let pause = {pause}
writes together
stage
{lines(SELECTOR)}
parts
  device on 0.5 us to 0.9 us off 0.6 us to 1.2 us
paths
  Af Ar Bf Br through device
modes Af Ar Bf Br
  first  {before}
  second {after}
moves
  start first
  first -> second when change{given}
{between}
    wait pause
"""


STEPS = {"Af": "Af off", "Ar": "Ar off", "Bf": "Bf on", "Br": "Br on"}


def words_of(order: tuple[str, ...]) -> list[str]:
    """The words that an order of the four changes goes through."""
    word, passed = "1100", ["1100"]
    for name in order:
        place = FOUR.index(name)
        word = word[:place] + ("0" if word[place] == "1" else "1") + word[place + 1 :]
        passed.append(word)
    return passed


@pytest.mark.parametrize("known", [OUTWARD, INWARD, NOTHING])
def test_of_all_orders_one_neither_shorts_nor_opens(known: str) -> None:
    """Of 24 orders one is proven where the direction of the current is known, and none where nothing is.

    An order that passes a word that shorts or opens does so for at least the pause less the longest delay.
    """
    short, opened = short_words(known), open_words(known)
    legal = []
    for order in permutations(FOUR):
        passed = set(words_of(order))
        text = change([STEPS[name] for name in order], known, "2 us")
        found, open_for = overlaps(text), openings(text)
        assert bool(found) == bool(short & passed), order
        assert bool(open_for) == bool(opened & passed), order
        assert all(overlap is not None and overlap >= 2_000_000 for overlap in found.values())
        assert all(time is None or time >= 2_000_000 for time in open_for.values())
        if not found and not open_for:
            legal.append(order)
    right = {OUTWARD: [("Ar", "Bf", "Af", "Br")], INWARD: [("Af", "Br", "Ar", "Bf")], NOTHING: []}
    assert legal == right[known]


FOUR_STEP = [
    (["Ar off", "Bf on", "Af off", "Br on"], OUTWARD),
    (["Af off", "Br on", "Ar off", "Bf on"], INWARD),
]


@pytest.mark.parametrize(("steps", "known"), FOUR_STEP)
def test_four_step_change_with_the_least_pause(steps: list[str], known: str) -> None:
    """Each pair needs 1.2 − 0.5 µs between its off and its on, with the pause and 1 ps less [derived]."""
    assert overlaps(change(steps, known, "700 ns")) == {}
    assert overlaps(change(steps, known, "699.999 ns")) == {A_TO_B: 1, B_TO_A: 1}


@pytest.mark.parametrize(("steps", "known"), FOUR_STEP)
def test_four_step_change_keeps_the_current_going(steps: list[str], known: str) -> None:
    """The second step turns on what the third leaves to: 0.9 − 0.6 µs must lie between. And the direction must be known
    until the last switch surely conducts, 0.9 µs after its command [derived]."""
    own, other = (OUT_OPEN, IN_OPEN) if known == OUTWARD else (IN_OPEN, OUT_OPEN)
    assert openings(change(steps, known, "900 ns")) == {}
    assert openings(change(steps, known, "899.999 ns")) == {other: 1}
    assert openings(change(steps, known, "300 ns")) == {other: 600_000}
    assert openings(change(steps, known, "299.999 ns")) == {other: 600_001, own: 1}


@pytest.mark.parametrize(("steps", "known"), FOUR_STEP)
def test_four_step_change_back(steps: list[str], known: str) -> None:
    """The same steps backwards lead back [derived]."""
    turned = {"off": "on", "on": "off"}
    back = [f"{name} {turned[cell]}" for name, cell in (step.split() for step in reversed(steps))]
    assert overlaps(change(back, known, "700 ns", "off off on on", "on on off off")) == {}
    assert overlaps(change(back, known, "699.999 ns", "off off on on", "on on off off")) == {A_TO_B: 1, B_TO_A: 1}


def test_a_word_of_the_wrong_direction_shorts_in_passing() -> None:
    """1100 with Bf on at once is 1110: Bf feeds what Ar returns [derived]."""
    found = unsafe(change(["Bf on", "Ar off", "Af off", "Br on"], OUTWARD, "2 us"))
    assert set(found) == {B_TO_A}
    assert found[B_TO_A].check is Check.OVERLAP
    assert found[B_TO_A].overlap == 2_700_000  # on from 0.5, off until 2 + 1.2 µs


@pytest.mark.parametrize(("known", "expected"), [("a above b", {}), ("b above a", {B_TO_A: 2_700_000})])
def test_change_by_voltage(known: str, expected: dict[tuple[str, str], int]) -> None:
    """Bf with Ar on shorts only while b is above a [derived]."""
    assert overlaps(change(["Bf on", "Ar off", "Af off", "Br on"], known, "2 us")) == expected

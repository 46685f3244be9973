"""Switching tables of public sources, read back: what every word of a stage does."""

from collections import Counter

import pytest
from outside import at_rest, words
from reading import drive_of

from seqcheck.circuit.reading import read_back
from seqcheck.effects import Kind, Level, Row, Swap, Table, Word

H_BRIDGE = ("rails P N", "leg U UH UL", "leg V VH VL", "winding U V")
FOUR = ("UH", "UL", "VH", "VL")
THREE_LEVEL = (
    "rails P O N",
    "switch S1 from P to a",
    "switch S2 from a to X",
    "switch S3 from X to b",
    "switch S4 from b to N",
    "diode from O to a",
    "diode from b to O",
    "winding X",
)
SERIES = ("S1", "S2", "S3", "S4")
SELECTOR = (
    "sources a b",
    "switch Af from a to X one way",
    "switch Ar from X to a one way",
    "switch Bf from b to X one way",
    "switch Br from X to b one way",
    "winding X",
)
PAIRS = ("Af", "Ar", "Bf", "Br")


def table(text: str) -> Table:
    return read_back(drive_of(text), "t.dseq")


def word_of(stage: tuple[str, ...], switches: tuple[str, ...], bits: str, known: str = "") -> Word:
    """What one word does, as a row that is constant."""
    (row,) = table(at_rest(stage, switches, bits, f"with {known}" if known else "")).rows
    ((word,),) = row.alternatives
    return word


# One bridge and its 16 words: common practice, the counts as in checks of the trade [derived]


def kind_of(bits: str) -> str:
    word = word_of(H_BRIDGE, FOUR, bits)
    return "short" if word.shorts else word.windings[0].kind.value


def test_the_sixteen_words_of_an_h_bridge() -> None:
    """1 all off, 4 with a single switch, 2 that drive, 2 that brake, 7 that short [common practice]."""
    found = {bits: kind_of(bits) for bits in words(4)}
    assert Counter(found.values()) == {"free": 1, "held at one end": 4, "driven": 2, "braked": 2, "short": 7}
    assert found["0000"] == "free"
    assert {bits for bits in found if bits.count("1") == 1} == {b for b in found if found[b] == "held at one end"}


def test_ways_of_driving_and_braking() -> None:
    """High side of one leg with low side of the other drives, both of a side brake [common practice]."""
    forward, backward = (word_of(H_BRIDGE, FOUR, bits).windings[0] for bits in ("1001", "0110"))
    assert (forward.nodes, forward.levels) == (("U", "V"), (Level("P"), Level("N")))
    assert (backward.nodes, backward.levels) == (("V", "U"), (Level("P"), Level("N")))
    above, below = (word_of(H_BRIDGE, FOUR, bits).windings[0] for bits in ("1010", "0101"))
    assert (above.levels, below.levels) == ((Level("P"),), (Level("N"),))


def test_current_of_a_bridge_always_has_a_way() -> None:
    """By its diodes [common practice]."""
    assert all(not word_of(H_BRIDGE, FOUR, bits).stuck for bits in words(4))


# Three legs and their voltage vectors: eight states of the two-level bridge, textbook table from memory [memory]

THREE_LEGS = ("rails P N", "leg A AH AL", "leg B BH BL", "leg C CH CL", "winding A S", "winding B S", "winding C S")
SIX = ("AH", "AL", "BH", "BL", "CH", "CL")


def legs(bits: str) -> str:
    """The word that holds each leg high or low, `-` neither."""
    return "".join({"1": "10", "0": "01", "-": "00"}[bit] for bit in bits)


@pytest.mark.parametrize(
    ("bits", "degrees"), [("100", 0), ("110", 60), ("010", 120), ("011", 180), ("001", 240), ("101", 300)]
)
def test_active_vectors(bits: str, degrees: int) -> None:
    vector = word_of(THREE_LEGS, SIX, legs(bits)).vector
    assert vector is not None
    assert vector.degrees == degrees
    assert vector.length == pytest.approx(2 / 3)


@pytest.mark.parametrize("bits", ["000", "111"])
def test_zero_vectors(bits: str) -> None:
    vector = word_of(THREE_LEGS, SIX, legs(bits)).vector
    assert vector is not None
    assert vector.degrees is None
    assert vector.length == 0


def test_the_64_words_of_three_legs() -> None:
    """37 short; of the 27 others 8 hold every leg, 12 two, 6 one and 1 none [derived: 2³, 3·2², 3·2, 1]."""
    found = [word_of(THREE_LEGS, SIX, bits) for bits in words(6)]
    sound = [word for word in found if not word.shorts]
    assert len(found) - len(sound) == 37
    assert Counter(sum(node.held is not None for node in word.nodes) for word in sound) == {3: 8, 2: 12, 1: 6, 0: 1}
    assert sum(word.vector is not None for word in sound) == 20


# Six-step commutation, two switches conducting; table seen in public course notes [seen], counts and angles [derived]

CODES = ("101", "100", "110", "010", "011", "001")
STEPS = ("A+ B-", "A+ C-", "B+ C-", "B+ A-", "C+ A-", "C+ B-")
ANGLES = (330, 30, 90, 150, 210, 270)
"""Each step between the neighbouring active vectors: A+ B- between 100 at 0 and 101 at 300 degrees."""


def six_step() -> Table:
    on = {"+": "H", "-": "L"}
    rows = []
    for code, step in zip(CODES, STEPS, strict=True):
        turned = {f"{name[0]}{on[name[1]]}" for name in step.split()}
        rows.append(f"  s{code} " + " ".join("on" if switch in turned else "off" for switch in SIX))
    moves = [f"  s{one} -> s{other} when h{one}" for one, other in zip(CODES, CODES[1:] + CODES[:1], strict=True)]
    stage = "\n".join(f"  {line}" for line in THREE_LEGS)
    return table(
        f'drive "six step"\nwrites together\nstage\n{stage}\nmodes {" ".join(SIX)}\n'
        + "\n".join(rows)
        + "\nmoves\n  start s101\n"
        + "\n".join(moves)
    )


def test_vectors_of_six_steps() -> None:
    """60 degrees apart, two phases driven: 1/√3 of the supply."""
    vectors = [row.words[0].vector for row in six_step().rows]
    assert [vector.degrees for vector in vectors if vector] == list(ANGLES)
    assert all(vector.length == pytest.approx(3**-0.5) for vector in vectors if vector)


def test_swaps_between_six_steps() -> None:
    """Neighbours never swap a leg (6 of 6), one step skipped swaps one, two skipped or a reversal two [derived]."""
    found = six_step()
    names = [row.mode.name for row in found.rows]
    counts = Counter((swap.first, swap.second) for swap in found.swaps)
    for one in range(6):
        for other in range(one + 1, 6):
            apart = min(other - one, 6 - other + one)
            assert counts[names[one], names[other]] == {1: 0, 2: 1, 3: 2}[apart], (one, other)
    assert not any(swap.direct for swap in found.swaps)


# A three-level diode-clamped leg: Nabae, Takahashi, Akagi 1981, sets and levels [memory], the other words [derived]


@pytest.mark.parametrize(("bits", "level"), [("1100", "P"), ("0110", "O"), ("0011", "N")])
def test_levels_of_a_three_level_leg(bits: str, level: str) -> None:
    (node,) = word_of(THREE_LEVEL, SERIES, bits).nodes
    assert node.held == Level(level)


def test_the_sixteen_words_of_a_three_level_leg() -> None:
    """3 short; with the inner switch of a half the outer one of the other makes no difference, so that two more words
    hold P and N; the rest leave X between its diodes, one inner switch alone with O on one side [derived]."""
    found = {bits: word_of(THREE_LEVEL, SERIES, bits) for bits in words(4)}
    assert {bits for bits, word in found.items() if word.shorts} == {"1110", "0111", "1111"}
    held = {bits: node.held.node for bits, word in found.items() if not word.shorts for node in word.nodes if node.held}
    assert held == {"1100": "P", "1101": "P", "0110": "O", "0011": "N", "1011": "N"}
    between = {
        bits: "".join(str(level) for side in (node.out, node.into) for level in side)
        for bits, word in found.items()
        if not word.shorts
        for node in word.nodes
        if not node.held
    }
    loose = {bits for bits, word in found.items() if any(node.loose for node in word.nodes) and not word.shorts}
    assert loose == {bits for bits, levels in between.items() if levels == "NP"}
    assert between == {
        "0000": "NP",
        "1000": "NP",
        "0001": "NP",
        "1001": "NP",
        "0100": "OP",
        "0101": "OP",
        "0010": "NO",
        "1010": "NO",
    }


def test_a_change_of_level_swaps_the_leg() -> None:
    """P to O is S1 off, S3 on; the other order passes 1110 [derived]."""
    rows = "  p on on off off\n  o off on on off\n  n off off on on"
    stage = "\n".join(f"  {line}" for line in THREE_LEVEL)
    found = table(
        f'drive "leg"\nwrites together\nstage\n{stage}\nmodes {" ".join(SERIES)}\n{rows}\nmoves\n  start p\n'
        "  p -> o when e\n  o -> p when f\n  o -> n when g\n  n -> o when h\n"
    )
    assert [swap for swap in found.swaps if swap.direct] == [
        Swap("p", "o", ("S1",), ("S3",), ("S2",), True),
        Swap("o", "n", ("S2",), ("S4",), ("S3",), True),
    ]


def test_levels_of_a_flying_capacitor_leg() -> None:
    """1010 is the supply less the capacitor, 0101 the capacitor alone; S1 with S4 and S2 with S3 short [memory]."""
    stage = (
        "rails P N",
        "switch S1 from P to a",
        "switch S2 from a to X",
        "switch S3 from X to b",
        "switch S4 from b to N",
        "capacitor a b",
        "winding X",
    )
    found = {bits: word_of(stage, SERIES, bits) for bits in words(4)}
    sound = {bits for bits, word in found.items() if not word.shorts}
    assert sound == {bits for bits in found if bits[0] + bits[3] != "11" and bits[1] + bits[2] != "11"}
    levels = {bits: str(node.held) for bits in sound for node in found[bits].nodes if node.held}
    assert levels == {"1100": "P", "0011": "N", "1010": "P less a-b", "0101": "N plus a-b"}


# Two inputs onto one output: Burany 1989, Wheeler et al. 2002 [memory]


def legal(known: str) -> set[str]:
    """The words that neither short nor leave a current without a way."""
    found = {bits: word_of(SELECTOR, PAIRS, bits, known) for bits in words(4)}
    return {bits for bits, word in found.items() if not word.shorts and not word.stuck}


@pytest.mark.parametrize(
    ("known", "expected"),
    [
        ("", {"1100", "0011"}),
        ("current out of X", {"1100", "0011", "1000", "1010", "0010"}),
        ("current into X", {"1100", "0011", "0100", "0101", "0001"}),
    ],
)
def test_words_of_a_selector(known: str, expected: set[str]) -> None:
    assert legal(known) == expected


def test_levels_of_a_selector() -> None:
    """Both switches of an input hold it, one does for its own direction of current [derived]."""
    assert word_of(SELECTOR, PAIRS, "1100").nodes[0].held == Level("a")
    single = word_of(SELECTOR, PAIRS, "1000", "current out of X").nodes[0]
    assert (single.held, single.level) == (None, Level("a"))
    both = word_of(SELECTOR, PAIRS, "1010", "current out of X").nodes[0]
    assert both.out == {Level("a"), Level("b")}
    known = word_of(SELECTOR, PAIRS, "1010", "current out of X, a above b").nodes[0]
    assert known.level == Level("a")


# Carriers: what a modulated row does by turns, and its dead times in a period [derived]


def modulated(cells: str, means: str = "") -> Row:
    stage = "\n".join(f"  {line}" for line in H_BRIDGE)
    found = table(
        f'drive "modulated"\nwrites together\nstage\n{stage}\ncarriers\n  pwm 20 kHz duty 10 % to 90 % dead time 1 us\n'
        f"modes {' '.join(FOUR)}\n  idle off off off off\n  run {cells} {means}\nmoves\n  start idle\n"
        "  idle -> run when go\n"
    )
    return found.rows[1]


@pytest.mark.parametrize(
    ("cells", "kinds", "dead_times"),
    [
        ("pwm ~pwm ~pwm pwm", [Kind.DRIVEN, Kind.DRIVEN], 4),
        ("pwm ~pwm off on", [Kind.DRIVEN, Kind.BRAKED], 2),
        ("pwm off off on", [Kind.DRIVEN, Kind.HELD], 0),
    ],
)
def test_modulated_rows(cells: str, kinds: list[Kind], dead_times: int) -> None:
    """Locked anti-phase drives both ways and has four dead times, sign-magnitude drives and brakes and has two."""
    row = modulated(cells)
    assert [word.windings[0].kind for word in row.words] == kinds
    assert row.dead_times == dead_times


@pytest.mark.parametrize(
    ("cells", "means", "amiss"),
    [
        ("pwm ~pwm off on", "drive U to V", ""),
        ("pwm ~pwm off on", "drive V to U", "it does not hold V above U"),
        ("pwm ~pwm off on", "brake", "it drives a winding by turns"),
        ("pwm ~pwm off on", "coast", "it does not leave every winding free"),
        ("pwm ~pwm ~pwm pwm", "drive U to V", "it holds V above U by turns"),
        ("off pwm off pwm", "brake", ""),
        ("off off off off", "coast", ""),
        ("off on off off", "coast", "it does not leave every winding free"),
        ("off on off off", "brake", "it does not short every winding"),
        ("on off on off", "brake", ""),
        ("off on off on", "level N", ""),
        ("off on on off", "level N", "not every winding is at N"),
        ("on on off off", "coast", "it shorts a supply"),
        ("off off off on", "drive P to V", ""),
    ],
)
def test_what_a_row_means(cells: str, means: str, amiss: str) -> None:
    """Trade words as the grammar page defines them."""
    assert modulated(cells, f"means {means}").amiss == amiss

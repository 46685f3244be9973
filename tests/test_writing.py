"""What a write does to what is written, what is in effect and what is held: against a model that keeps a list."""

from dataclasses import dataclass, field
from random import Random

import pytest
from build import carrier, cell, drive, pin, span

from seqcheck.drive import Cell, Fixed, Follow, Level, Update
from seqcheck.writing import FREE, KEEP, OFF, ON, Put, Writing, carrier_of, inverted

UPDATES = {"k": Update.AT_ONCE, "r": Update.AT_RISE, "p": Update.WITHIN_PERIOD}
WORDS = ("off", "on", "free", "k", "~k", "r", "~r", "p", "~p")
COLUMNS = "A B C"
ALL = frozenset(UPDATES)


def writing(tracked: frozenset[str] = ALL, looked_at: str = COLUMNS, updates: dict[str, Update] = UPDATES) -> Writing:
    """The cells of three switches and of the carriers."""
    built = drive(
        COLUMNS,
        {"m": "off off off"},
        pins=(pin("A"), pin("B", Level.HIGH), pin("C", Level.UNKNOWN)),
        carriers=tuple(carrier(name, span(5), span(5), update=update) for name, update in updates.items()),
    )
    return Writing(built, tracked, frozenset(looked_at.split()))


CODES = {word: writing().code(cell(word)) for word in WORDS}
START: Put = ((OFF,) * 3, (OFF,) * 3, ())


@dataclass
class Model:
    """Each switch by its words; what is held is a list of (carrier, switch), oldest instant first."""

    written: dict[int, str] = field(default_factory=lambda: dict.fromkeys(range(3), "off"))
    effective: dict[int, str] = field(default_factory=lambda: dict.fromkeys(range(3), "off"))
    held: list[tuple[str, int, int]] = field(default_factory=list)  # (carrier, switch, instant)
    instant: int = 0

    def write(self, switch: int, word: str) -> None:
        """One write, in the instant that goes on."""
        self.held = [one for one in self.held if one[1] != switch]
        self.written[switch] = word
        old = self.effective[switch]
        if word == old:
            return
        waits = [name for name in (old.lstrip("~"), word.lstrip("~")) if name in ("r", "p")]
        if waits:
            self.held.append((waits[0], switch, self.instant))
        else:
            self.effective[switch] = word

    def update(self, name: str) -> None:
        """All that is held for one carrier acts."""
        for _, switch, _ in [one for one in self.held if one[0] == name]:
            self.effective[switch] = self.written[switch]
        self.held = [one for one in self.held if one[0] != name]

    def put(self) -> Put:
        """The same as the prover keeps it: of carriers that update within a period also the instants."""
        groups: dict[tuple[int, str], int] = {}
        for name, switch, instant in self.held:
            if name == "p":
                groups[instant, name] = groups.get((instant, name), 0) | 1 << switch
        holds = tuple((list(UPDATES).index(name), bits) for (_, name), bits in sorted(groups.items()))
        vectors = [tuple(CODES[line[switch]] for switch in range(3)) for line in (self.written, self.effective)]
        return vectors[0], vectors[1], holds


@pytest.mark.parametrize("seed", range(200))
def test_random_writes(seed: int) -> None:
    """A later write replaces a held one, writing what is in effect drops it, a change of carrier waits for the old."""
    rng, model, put, rules = Random(seed), Model(), START, writing()
    for _ in range(25):
        model.instant += 1
        kind = rng.choice(("write", "write", "write", "update", "break"))
        if kind == "update":
            name = rng.choice(("r", "p"))
            model.update(name)
            put = rules.update(put, list(UPDATES).index(name))
        elif kind == "break":
            chosen = {switch: rng.choice(WORDS) for switch in rng.sample(range(3), rng.randint(0, 3))}
            model.effective |= chosen
            model.written, model.held = dict(model.effective), []
            put = rules.force(put, [(switch, CODES[word]) for switch, word in chosen.items()])
        else:
            chosen = {switch: rng.choice(WORDS) for switch in rng.sample(range(3), rng.randint(1, 3))}
            for switch, word in chosen.items():
                model.write(switch, word)
            put = rules.write(put, [(switch, CODES[word]) for switch, word in chosen.items()])
        assert put == model.put()


def written(*steps: str) -> tuple[str, str]:
    """What switch A is written and what is in effect after these writes of it; `r!` and `p!` are updates."""
    rules, put = writing(), START
    for step in steps:
        if step.endswith("!"):
            put = rules.update(put, list(UPDATES).index(step[:-1]))
        else:
            put = rules.write(put, [(0, CODES[step])])
    words = {code: word for word, code in CODES.items()}
    return words[put[0][0]], words[put[1][0]]


@pytest.mark.parametrize(
    ("steps", "right"),
    [
        ("k", "k k"),  # at once
        ("r", "r off"),  # held for the carrier that it joins
        ("r r!", "r r"),
        ("r p!", "r off"),  # not for any other
        ("r r! off", "off r"),  # held for the carrier that it leaves
        ("r r! off r!", "off off"),
        ("r r! ~r", "~r r"),  # leaves and joins the same
        ("r r! ~r r!", "~r ~r"),
        ("r r! p", "p r"),  # waits for the one that it leaves, then acts at once
        ("r r! p p!", "p r"),
        ("r r! p r!", "p p"),
        ("r off", "off off"),  # constant to constant cancels the held join
        ("r off r!", "off off"),
        ("r on r!", "on on"),
        ("r p r!", "p off"),  # a later write replaces it, and waits for another carrier
        ("r p p!", "p p"),
        ("r r! off r", "r r"),  # written back to what is in effect: nothing is held
        ("r r! off r r!", "r r"),
        ("r r! off on r!", "on on"),
        ("k r", "r k"),
        ("k r off", "off off"),
    ],
)
def test_one_switch(steps: str, right: str) -> None:
    """What is written, and what is in effect."""
    assert " ".join(written(*steps.split())) == right


def test_one_instant_is_one_hold() -> None:
    """Writes of one instant are held together; the oldest of those still held sets the time for all."""
    rules = writing()
    p = list(UPDATES).index("p")
    put = rules.write(START, [(0, CODES["p"]), (1, CODES["~p"])])
    assert put[2] == ((p, 0b011),)
    put = rules.write(put, [(2, CODES["p"])])
    assert put[2] == ((p, 0b011), (p, 0b100))
    put = rules.write(put, [(0, CODES["on"])])  # no longer held
    assert put[2] == ((p, 0b010), (p, 0b100))
    put = rules.write(put, [(1, CODES["off"])])
    assert put[2] == ((p, 0b100),)
    assert rules.update(put, p) == (put[0], put[0], ())


def test_not_tracked_acts_at_once() -> None:
    """A carrier that no literal can tell from one that acts at once is not waited for."""
    put = writing(tracked=frozenset("p")).write(START, [(0, CODES["r"]), (1, CODES["p"])])
    assert put[1] == (CODES["r"], OFF, OFF)


def test_not_looked_at_acts_at_once() -> None:
    """So is a switch that nobody looks at, unless some carrier's oldest write sets the time for all."""
    at_rise = {"k": Update.AT_ONCE, "r": Update.AT_RISE, "p": Update.AT_RISE}
    put = writing(looked_at="A", updates=at_rise).write(START, [(0, CODES["r"]), (1, CODES["r"])])
    assert put[1] == (OFF, CODES["r"], OFF)
    put = writing(looked_at="A").write(START, [(0, CODES["r"]), (1, CODES["r"])])
    assert put[1] == (OFF, OFF, OFF)


@pytest.mark.parametrize("word", [*WORDS, "keep"])
def test_codes_and_cells(word: str) -> None:
    """A cell as a number and back."""
    rules = writing()
    one: Cell = cell(word)
    code = rules.code(one)
    assert rules.cell(code) == one
    if isinstance(one, Follow):
        assert rules.carriers[carrier_of(code)] == one.carrier
        assert inverted(code) == one.inverted
    else:
        assert carrier_of(code) == -1
        assert code == {Fixed.OFF: OFF, Fixed.ON: ON, Fixed.FREE: FREE, Fixed.KEEP: KEEP}[one]


def test_turn_offs() -> None:
    """`off` is one, `free` where the pin rests off; any carrier cell, `on`, and an unknown resting level are not."""
    rules = writing()
    offs = {(switch, word) for switch in range(3) for word in WORDS if rules.turns_off((switch, CODES[word]))}
    assert offs == {(0, "off"), (1, "off"), (2, "off"), (0, "free")}

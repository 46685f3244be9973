"""Random small drives as text, small enough for the judge, with every feature of the language in some of them."""

from dataclasses import dataclass, field
from random import Random

SYSTEMS = ("leg", "leg", "leg", "leg and high", "leg and low", "two legs", "two legs", "sources")
FLOWING = ("two ways", "two ways", "current source", "one quadrant", "three levels", "flying", "chopper", "selector")
PERIODS = {4: "250", 5: "200", 8: "125", 10: "100"}
UPDATES = ("", " updates at once", " updates at rise", " updates at rise", " updates within a period")
INEXACT = {6: "166.6", 7: "142.857", 12: "83.3", 14: "71.43"}


@dataclass
class Sketch:
    """What has been settled so far of a drawn drive.

    `care` is how likely its author minds the dead times, `need` the dead time that the paths need, and `slack` the
    length of a command that vanishes on every path.
    """

    rng: Random
    care: float
    switches: list[str] = field(default_factory=list)
    pairs: list[tuple[str, str]] = field(default_factory=list)
    facts: tuple[str, ...] = ()
    means: tuple[str, ...] = ()
    need: int = 0
    slack: int = 0
    carriers: list[str] = field(default_factory=list)
    modes: list[str] = field(default_factory=list)
    free: bool = False
    reset: bool = False
    start: str = ""

    def chance(self, likely: float) -> bool:
        """True as often as `likely` says."""
        return self.rng.random() < likely

    def careful(self) -> bool:
        """Whether the author minds this time."""
        return self.chance(self.care)


def draw(seed: int) -> str:
    """The text of a random small drive; the same seed gives the same text."""
    return _drawn(seed, SYSTEMS)


def flowing(seed: int) -> str:
    """A random small drive whose winding must flow, with facts about its current, and rows that say what they mean."""
    return _drawn(seed, FLOWING)


def _drawn(seed: int, systems: tuple[str, ...]) -> str:
    rng = Random(seed)
    sketch = Sketch(rng, rng.choice((0.3, 0.5, 0.7, 0.8, 0.95, 1.0)))
    stage = _stage(sketch, systems)
    parts, paths = _paths(sketch)
    sketch.free = sketch.chance(0.2)
    sketch.reset = sketch.chance(0.25)
    if sketch.means and sketch.careful():
        sketch.free = sketch.reset = False  # pins mostly rest off, which stops a current
    carriers = _carriers(sketch)
    sketch.modes = ["ma", "mb", "mc", "md"][: rng.choice((2, 2, 3, 3, 4))]
    sketch.start = "reset" if sketch.reset and sketch.chance(0.6) else "ma"
    lines = [f'drive "draw {seed}"', *_heads(sketch), "stage", *stage]
    lines += ["parts", *parts] if parts else []
    paths += _interlocks(sketch)
    lines += ["paths", *paths] if paths else []
    lines += ["pins", *_pins(sketch)] if sketch.free or sketch.reset or sketch.chance(0.2) else []
    lines += ["carriers", *carriers] if carriers else []
    lines += [f"modes {' '.join(sketch.switches)}", *_rows(sketch), "moves", *_moves(sketch)]
    trips = _trips(sketch)
    lines += ["trips", *trips] if trips else []
    return "\n".join(lines) + "\n"


# Times


def _ps(time: int) -> str:
    return f"{time} ps"


def _range(rng: Random, least: int, most: int, spread: int = 3) -> str:
    """A duration that begins from `least` to `most`."""
    lo = rng.randint(least, most)
    hi = lo + rng.choice((0, 0, 1, rng.randint(0, spread)))
    return _ps(lo) if lo == hi else f"{lo} ps to {hi} ps"


# Sections


def _heads(sketch: Sketch) -> list[str]:
    rng, lines = sketch.rng, []
    if sketch.chance(0.35):
        within = f" within {rng.choice(('1 %', '5 %', '20 %', '500 ppm'))}" if sketch.chance(0.5) else ""
        late = f", late by at most {_ps(rng.randint(0, 4))}" if sketch.chance(0.6) else ""
        lines.append(f"clock {1000 if sketch.carriers else 500} GHz{within}{late}")
    order = rng.choice(("", ", turn-offs first", ", turn-offs first", ", turn-ons first", ", in table order"))
    gap = _range(rng, 0, 3, 2) if sketch.chance(0.9) else rng.choice(("up to 2 ps", "at least 1 ps"))
    how = rng.choice(("together", f"one at a time, {gap} apart{order}", f"by port, {gap} apart{order}"))
    lines.append(f"writes {how}")
    if sketch.chance(0.2):
        lines.append(f"loop at least {_ps(rng.randint(1, 4))}")
    return lines


def _stage(sketch: Sketch, systems: tuple[str, ...]) -> list[str]:
    system = sketch.rng.choice(systems)
    if systems is FLOWING:
        return _flowing(sketch, system)
    if system == "sources":
        sketch.switches, sketch.pairs = ["SA", "SB"], [("SA", "SB")]
        sketch.facts = ("a above b", "b above a")
        return ["  sources a b", "  switch SA from a to X one way", "  switch SB from X to b one way", "  winding X"]
    sketch.switches, sketch.pairs = ["UH", "UL"], [("UH", "UL")]
    lines = ["  rails P N", "  leg U UH UL"]
    if system == "leg and high":
        sketch.switches.append("C")
        sketch.pairs.append(("C", "UL"))
        lines.append("  switch C from P to U")
    if system == "leg and low":
        sketch.switches.append("C")
        sketch.pairs.append(("UH", "C"))
        lines.append("  switch C from U to N")
    if system == "two legs":
        sketch.switches += ["VH", "VL"]
        sketch.pairs.append(("VH", "VL"))
        lines.append("  leg V VH VL")
    sketch.rng.shuffle(sketch.switches)
    return [*lines, f"  winding U{' V' if system == 'two legs' else ''}"]


def _flowing(sketch: Sketch, system: str) -> list[str]:
    """A stage with a winding that must flow. Its pairs short, or are never both to be off, or both."""
    sketch.switches, sketch.pairs = ["SA", "SB"], [("SA", "SB")]
    sketch.facts = ("current out of X", "current into X")
    sketch.means = ("coast", "brake", "level {a}", "drive X to {a}")
    levels, ends = "N", "X"
    if system == "two ways":
        lines = ["  sources a b", "  switch SA from a to X two way", "  switch SB from b to X two way"]
        sketch.facts += ("a above b", "b above a")
        levels = "a"
    elif system == "selector":
        sketch.switches, sketch.pairs = ["Af", "Ar", "Bf", "Br"], [("Af", "Br"), ("Ar", "Bf")]
        lines = ["  sources a b", "  switch Af from a to X one way", "  switch Ar from X to a one way"]
        lines += ["  switch Bf from b to X one way", "  switch Br from X to b one way"]
        sketch.facts += ("a above b", "b above a")
        levels = "a"
    elif system == "current source":
        lines = ["  rails P N", "  switch SA from X to N one way", "  switch SB from X to N one way"]
        ends = "P X"
    elif system == "one quadrant":
        lines = ["  rails P N", "  switch SA from P to X one way", "  switch SB from X to N one way"]
    elif system == "three levels":
        sketch.switches.append("SC")
        sketch.pairs += [("SC", "SA")]
        lines = ["  rails P O N", "  switch SA from P to X", "  switch SB from X to N one way"]
        lines += ["  switch SC from X to O two way", "  diode from N to X"]
        levels = "O"
    elif system == "flying":
        lines = ["  rails P N", "  capacitor X Y", "  switch SA from P to X one way", "  switch SB from Y to N one way"]
    else:
        lines = ["  rails P N", "  switch SA from P to X one way", "  switch SB from Y to N one way"]
        lines += ["  diode from N to X"]
        ends = "X Y"
    sketch.means = tuple(one.format(a=levels) for one in sketch.means)
    sketch.rng.shuffle(sketch.switches)
    return [*lines, f"  winding {ends} must flow"]


def _paths(sketch: Sketch) -> tuple[list[str], list[str]]:
    """Parts and paths; notes the dead time that the first pair of a shared path needs."""
    rng = sketch.rng
    if sketch.chance(0.05):
        return [], []
    parts, needs = [], []
    names = ["p", "q"][: rng.choice((1, 1, 1, 2))]
    for name in names:
        on, off = rng.choice(((rng.randint(0, 3), rng.randint(0, 3)), (rng.randint(2, 5), rng.randint(0, 1))))
        on_span, off_span = rng.choice((0, 0, 1, 2)), rng.choice((0, 0, 1, 2))
        difference = f" difference at most {_ps(rng.randint(0, 3))}" if sketch.chance(0.2) else ""
        parts.append(f"  {name} on {on} ps to {on + on_span} ps off {off} ps to {off + off_span} ps{difference}")
        needs.append(off + off_span - on)
    sketch.slack = max(0, -max(needs))
    if len(names) == 2 and sketch.chance(0.5):
        sketch.need = max(0, sum(needs))
        return parts, [f"  {' '.join(sketch.switches)} through p, q"]
    sketch.need = max(0, *needs)
    if len(names) == 2:
        return parts, [f"  {switch} through {rng.choice(names)}" for switch in sketch.switches]
    return parts, [f"  {' '.join(sketch.switches)} through p"]


def _interlocks(sketch: Sketch) -> list[str]:
    if not sketch.chance(0.15):
        return []
    sketch.care = sketch.rng.choice((sketch.care, 0.5))
    dead = "" if sketch.chance(0.2) else f" dead time {_range(sketch.rng, *_around(sketch))}"
    one, other = sketch.rng.choice(sketch.pairs)
    return [f"  interlock {one} {other}{dead}"]


def _pins(sketch: Sketch) -> list[str]:
    rng, lines = sketch.rng, []
    for k, switch in enumerate(sketch.switches):
        rests = rng.choice(("high", "low", "unknown")) if not sketch.careful() else ""
        active = rng.choice(("high", "low"))
        rests = rests or {"high": "low", "low": "high"}[active]
        after = f" after {_range(rng, 0, 4, 2)}" if sketch.chance(0.4) else ""
        port = f" port {rng.choice(('A', 'A', 'B'))}" if sketch.chance(0.6) else ""
        lines.append(f"  {switch} G{k} active {active} rests {rests}{after}{port}")
    return lines


def _carriers(sketch: Sketch) -> list[str]:
    rng = sketch.rng
    count = rng.choice((0, 0, 0, 1, 1, 1, 1))
    if len(sketch.switches) == 2 and sketch.chance(0.08):
        count = 2
    lines = []
    for name in ["k", "j"][:count]:
        sketch.carriers.append(name)
        many = count == 2 or len(sketch.switches) > 2
        table = INEXACT if sketch.chance(0.15) and not many else PERIODS
        period = rng.choice([one for one in table if one < 6 or count < 2])
        first, last = sorted(rng.choice((0, 1, 2, 3, 5, 5, 7, 8, 9, 10)) * 10 for _ in range(2))
        duty = f"{first} %" if first == last or sketch.chance(0.2) else f"{first} % to {last} %"
        dead = f" dead time {_range(rng, *_around(sketch), 2)}" if sketch.chance(0.75) else ""
        update = rng.choice(
            ("", " updates at once", " updates at rise", " updates at rise", " updates within a period")
        )
        within = " within 10 %" if sketch.chance(0.08) else ""
        lines.append(f"  {name} {table[period]} GHz{within} duty {duty}{dead}{update}")
    return lines


def _around(sketch: Sketch) -> tuple[int, int]:
    """Bounds for a dead time: what is needed or a little more; or what may be a little too short."""
    if sketch.careful():
        return sketch.need, sketch.need + sketch.rng.choice((0, 0, 1, 2))
    return max(0, sketch.need - 2), sketch.need


# Rows


def _rows(sketch: Sketch) -> list[str]:
    lines = []
    for mode in sketch.modes:
        cells = _row(sketch, first=mode == sketch.start)
        words = [cells[switch] for switch in sketch.switches]
        means = f" means {sketch.rng.choice(sketch.means)}" if sketch.means and sketch.chance(0.2) else ""
        lines.append(f"  {mode} {' '.join(words)}{_known(sketch, 0.4)}{means}")
    return lines


def _known(sketch: Sketch, likely: float) -> str:
    if sketch.means and sketch.chance(likely):
        return f" with {sketch.rng.choice(sketch.facts)}"
    if sketch.facts and not sketch.means and sketch.chance(likely):
        return f" with {sketch.rng.choice((sketch.facts[0], sketch.facts[1], sketch.facts[1]))}"
    return ""


def _row(sketch: Sketch, *, first: bool) -> dict[str, str]:
    """One row; a careful author turns on no more than one of a pair, and where current must flow mostly one."""
    rng = sketch.rng
    cells: dict[str, str] = {}
    for one, other in sketch.pairs:
        choices = [("on", "off"), ("off", "on"), ("off", "off")]
        choices = [("on", "on"), *choices[:2] * 3] if sketch.means else choices
        if not first:
            for name in sketch.carriers:
                choices += [(name, f"~{name}"), (f"~{name}", name), (name, "off"), ("off", name), (f"~{name}", "off")]
            choices += [("keep", "off"), ("off", "keep"), ("keep", "keep")] if sketch.chance(0.3) else []
            if sketch.means and sketch.careful():
                choices = [("on", "off"), ("off", "on"), *((name, f"~{name}") for name in sketch.carriers)]
        choices += [("free", "free"), ("free", "off")] * 2 if sketch.free else []
        words = rng.choice(choices)
        if not sketch.careful():
            words = (rng.choice(choices)[0], rng.choice(choices)[1])
        for switch, word in zip((one, other), words, strict=True):
            cells.setdefault(switch, word)
    if sketch.careful() and any(_clash(cells[one], cells[other]) for one, other in sketch.pairs):
        return _row(sketch, first=first)
    return cells


def _clash(one: str, other: str) -> bool:
    return not {one, other} & {"off", "free", "keep"} and one.removeprefix("~") != other.removeprefix("~")


def _cell(sketch: Sketch) -> str:
    """A cell of a step."""
    words = ["on", "off", "off", "off", *sketch.carriers]
    words += [f"~{name}" for name in sketch.carriers]
    words += ["free"] if sketch.free else []
    return "off" if sketch.careful() else sketch.rng.choice(words)


# Moves and trips


def _moves(sketch: Sketch) -> list[str]:
    rng, modes = sketch.rng, sketch.modes
    lines = [f"  start {sketch.start}"]
    if sketch.start == "reset":
        lines += [f"  reset -> {modes[0]}{_trigger(sketch, 0, forward=True)}{_known(sketch, 0.2)}", *_steps(sketch)]
    for k in range(rng.choice((1, 2, 2, 3, 3, 4))):
        here = modes[k % len(modes)] if k == 0 or sketch.chance(0.7) else rng.choice(modes)
        there = modes[(k + 1) % len(modes)]
        if sketch.chance(0.3):
            there = rng.choice([mode for mode in modes if mode != here or sketch.chance(0.1)])
        forward = modes.index(here) < modes.index(there)
        trigger = _trigger(sketch, k + 1, forward=forward)
        source = here
        if trigger.startswith(" when") and sketch.chance(0.15):
            source = rng.choice(("any", f"{here}, {rng.choice(modes)}"))
            names = source.split(", ")
            source = here if len(set(names)) < len(names) else source
        if sketch.reset and sketch.chance(0.12):
            lines.append(f"  {here} -> reset when r{k}{_known(sketch, 0.2)}")
            continue
        unbroken = " unbroken" if sketch.chance(0.15) else ""
        lines += [f"  {source} -> {there}{trigger}{unbroken}{_known(sketch, 0.3)}", *_steps(sketch)]
    if sketch.reset and sketch.start != "reset" and sketch.chance(0.7):
        lines.append(f"  {rng.choice(modes)} -> reset when r9")
        lines += [f"  reset -> {rng.choice(modes)} when boot", *_steps(sketch)]
    return lines


def _trigger(sketch: Sketch, k: int, *, forward: bool) -> str:
    """When a move begins. Only moves towards later modes may begin with no time spent, so that no circle takes none."""
    rng = sketch.rng
    kind = rng.choice(("when", "when", "when", "when", "after", "after", "at once"))
    if kind == "at once" and forward:
        return ""
    if kind == "after":
        least = 0 if forward else 3
        return f" after {_range(rng, least, least + 5, 4)}"
    least = rng.randint(1, 6) if sketch.chance(0.3) else 0
    earliest = f" earliest {_ps(least)}" if least else ""
    latest = f" latest {_ps(rng.randint(max(4, least), 9))}" if sketch.chance(0.2) else ""
    return f" when e{k}{earliest}{latest}"


def _steps(sketch: Sketch, *, leading_wait: bool = True) -> list[str]:
    """The steps of a move: mostly everything off and the dead time, else anything."""
    rng = sketch.rng
    wait = f"    wait {_range(rng, *_around(sketch))}"
    if sketch.means and sketch.chance(0.85):
        one, other = sketch.rng.choice(sketch.pairs)
        first, last = rng.choice(((f"{one} on", f"{other} off"), (f"{other} on", f"{one} off")))
        return [f"    set {first}", wait, f"    set {last}", wait][: rng.choice((2, 3, 4))]
    if sketch.careful():
        steps = ["    set all off", wait]
        if sketch.slack and sketch.chance(0.5):
            switch = rng.choice(sketch.switches)
            steps += [f"    set {switch} on", f"    wait up to {_ps(sketch.slack)}", f"    set {switch} off", wait]
        if sketch.chance(0.15) and leading_wait:
            steps.insert(0, f"    wait {_range(rng, 0, 3)}")
        if sketch.chance(0.15):
            steps.append(f"    set {rng.choice(sketch.switches)} {_cell(sketch)}")
            steps.append(wait)
        return steps if sketch.chance(0.9) else []
    steps = []
    if sketch.chance(0.25):
        switch = rng.choice(sketch.switches)
        steps += [f"    set {switch} on", f"    wait {_range(rng, 0, 2, 1)}", f"    set {switch} off"]
    for _ in range(rng.choice((0, 1, 1, 2)) if steps else rng.choice((0, 1, 1, 2, 3))):
        waits = [wait, "    wait 0 ps", f"    wait at least {_ps(rng.randint(0, 3))}", wait]
        if sketch.chance(0.5):
            steps.append(rng.choice(waits))
            continue
        chosen = rng.sample(sketch.switches, rng.choice((1, 1, 2)))
        steps.append("    set " + ", ".join(f"{switch} {_cell(sketch)}" for switch in chosen))
    while steps and not leading_wait and "wait" in steps[0]:
        steps.pop(0)
    return steps


def _trips(sketch: Sketch) -> list[str]:
    rng, lines = sketch.rng, []
    for k in range(rng.choice((0, 0, 0, 1, 1, 1, 1, 2, 2))):
        target = "reset" if sketch.reset and sketch.chance(0.25) else rng.choice(sketch.modes)
        others = [mode for mode in sketch.modes if mode != target]
        source = rng.choice(("any", "any", rng.choice(others), ", ".join(others), f"any but {rng.choice(others)}"))
        hard = " at once" if sketch.chance(0.4) or (target == "reset" and sketch.chance(0.5)) else ""
        within = "" if hard or target == "reset" or sketch.chance(0.25) else f" within {_ps(rng.randint(0, 6))}"
        steps = [] if target == "reset" else _steps(sketch, leading_wait=not hard)
        lines += [f"  t{k} from {source} -> {target}{within}{hard}{_known(sketch, 0.2)}", *steps]
    return lines

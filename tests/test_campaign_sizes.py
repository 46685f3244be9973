"""Ranges of quantities in drawn drives against the literal judge, which knows nothing of ranges.

    SEQCHECK_SEEDS=0-2000 pytest -m campaign tests/test_campaign_sizes.py -n auto

A time of a drawn drive becomes a `let`, sometimes one that others are derived from, and its range is asked for. Every
value in it (whole picoseconds, or some of them) must then be safe by the judge, the next ones outside must not be, and
where today's value does not hold the judge must agree. What the mode graph of a drawn drive lacks is waived.
"""

import os
import re
from collections import Counter
from collections.abc import Iterator
from fractions import Fraction
from random import Random

import pytest
from judge.delays import delays_of
from judge.draws import draw, flowing
from judge.literal import Says, judge
from judge.ruled import ruled
from judge.shorts import asked
from proofs import at_most
from reading import FILE, drive_of
from test_campaign_judged import chunks, named

from seqcheck.checking import check
from seqcheck.commands.over import Over
from seqcheck.commands.size import Asked, size
from seqcheck.language.varied import Varied
from seqcheck.messages import Problems
from seqcheck.ranges import Beyond, End, Ends, Sized
from seqcheck.reports.waived import reason
from seqcheck.verdict import WARNINGS, Check, Finding

ZONES = int(os.environ.get("SEQCHECK_ZONES", "1500"))
STATES = int(os.environ.get("SEQCHECK_STATES", "3000"))
MOST = 9
"""Values of one range that the judge looks at."""

_TIME = re.compile(r"(?<![\w.])(\d+) ps")
_ANY = re.compile(r"(?<![\w.])(\d+) (ps|%|GHz)")
_STEPS = {"ps": Fraction(1), "%": Fraction(1, 100), "GHz": Fraction(10**9)}


def quantified(text: str, rng: Random) -> str | None:
    """The drive with one of its times as `let quantity`; None if it has none.

    Every so often another time is derived from it, so that the same quantity counts in two places, or in two ways.
    """
    found = list(_TIME.finditer(text))
    if not found:
        return None
    chosen = rng.choice(found)
    today = int(chosen[1])
    places = {chosen.start(): "quantity"}
    if rng.random() < 0.4 and len(found) > 1:
        other = rng.choice([one for one in found if one is not chosen])
        places[other.start()] = "derived"
        away = int(other[1]) - today
        derived = f"quantity + {away} ps" if away >= 0 else f"quantity - {-away} ps"
        if rng.random() < 0.3:
            derived = f"{int(other[1]) + today} ps - quantity"
    lets = [f"let quantity = {today} ps"] + ([f"let derived = {derived}"] if len(places) > 1 else [])
    for match in reversed(found):
        if match.start() in places:
            text = text[: match.start()] + places[match.start()] + text[match.end() :]
    head, _, rest = text.strip().partition("\n")
    return "\n".join([head, *lets, rest]) + "\n"


def graph_waived(text: str) -> str:
    """The drive with a waiver for all that its mode graph lacks."""
    outcome = check(drive_of(text), FILE, frozenset(), at_most(ZONES))
    lines = dict.fromkeys(
        f'  waive {one.check.value} for {one.names[0]} because "drawn"'
        for one in outcome.findings
        if one.check not in WARNINGS and one.names
    )
    return f"{text}rules\n" + "\n".join(lines) + "\n" if lines else text


def safe(varied: Varied, value: Fraction) -> bool | None:
    """Whether the judge finds every hazard safe with one value; None where it gave up. Raises Problems."""
    drive = varied.with_values({"quantity": value})
    unsure = False
    for literals, forbids in asked(drive):
        said = judge(drive, literals, delays_of(drive, literals), facts_forbid=forbids, most_states=STATES)
        if said.says is Says.UNSAFE:
            return False
        unsure = unsure or said.says is not Says.SAFE
    return None if unsure else True


def sized(text: str) -> Sized:
    call = Asked(FILE, "quantity", "1 ps", "screen", False)
    return size(text, call, lambda name: pytest.fail(f"reads {name}"), at_most(ZONES))


def values_in(found: Sized) -> list[Fraction]:
    """Both ends, today's value and some between."""
    assert found.low is not None
    assert found.high is not None
    low = found.low.value if found.low.value is not None else found.today - 20
    high = found.high.value if found.high.value is not None else max(low, found.today) + 20
    width = int(high - low)
    inside = {low + width * at // MOST for at in range(MOST + 1)}
    return sorted({low, high, *inside, *((found.today,) if found.holds else ())})


def disagreements(text: str, ends: Counter[str]) -> list[str]:
    """Where the range and the judge differ."""
    found = sized(text)
    varied = Varied(text, FILE, lambda _: "")
    if found.idle:
        ends["idle"] += 1
        return []
    if not found.holds and safe(varied, found.today) and not graph_amiss(found):
        return ["today's value is safe by the judge"]
    if found.low is None or found.high is None:
        ends["no range"] += 1
        return []
    wrong = []
    for value in values_in(found):
        said = safe(varied, value)
        ends[f"inside {said}"] += 1
        wrong += [f"{value} ps is in the range, but unsafe"] if said is False else []
    for end in (found.low, found.high):
        ends[end.how.value] += 1
        if end.how is Ends.FAILS and end.beyond is not None:
            wrong += outside(varied, end, end.beyond, ends)
    ends["whole" if all(part.whole for part in found.parts) and len(found.parts) == 1 else "in parts"] += 1
    return wrong


def outside(varied: Varied, end: End, beyond: Beyond, ends: Counter[str]) -> list[str]:
    """The next value outside must be unsafe, or be refused, or have a finding of its own about the mode graph."""
    assert end.value is not None
    if abs(beyond.value - end.value) > 1:
        return [f"{beyond.value} ps is more than a step beyond {end.value} ps"]
    try:
        said = safe(varied, beyond.value)
    except Problems:
        ends["outside refused"] += 1
        return []
    if isinstance(beyond.why, tuple):
        return [f"{beyond.value} ps is not refused"]
    ends[f"outside {said}"] += 1
    if said is True and all(reason(beyond.why.drive, one) is not None for one in graph_of(beyond.why.findings)):
        return [f"{beyond.value} ps is outside the range, but safe"]
    return []


def graph_of(findings: tuple[Finding, ...]) -> list[Finding]:
    return [one for one in findings if one.check not in WARNINGS and one.check is not Check.IDLE_WAIVER]


def graph_amiss(found: Sized) -> bool:
    return any(reason(found.drive, one) is None for one in graph_of(found.now.findings))


def run(seeds: range) -> None:
    """Judge the ranges of many drives, and fail with the drives on which one is wrong."""
    ends: Counter[str] = Counter()
    wrong = []
    for seed in seeds:
        rng = Random(f"size {seed}")
        text = quantified((flowing if seed % 4 == 3 else draw)(seed), rng)
        if text is None:
            continue
        text = graph_waived(text)
        wrong += [f"seed {seed}: {one}\n{text}" for one in disagreements(text, ends)]
        ends["drives"] += 1
    print(dict(ends))
    assert not wrong, "\n\n".join(wrong)
    assert ends["drives"]


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_ranges_of_drawn_drives(seeds: range) -> None:
    run(seeds)


def wide_and_single(text: str, rng: Random, ends: Counter[str]) -> Iterator[str]:
    """One number of a drive ranges: what is proven of an interval must be proven of each of its values by itself."""
    found = list(_ANY.finditer(text))
    chosen = rng.choice(found)
    today, step = int(chosen[1]), _STEPS[chosen[2]]
    said = f"{text[: chosen.start()]}quantity{text[chosen.end() :]}".strip()
    head, _, rest = said.partition("\n")
    whole = f"{head}\nlet quantity = {today} {chosen[2]}\n{rest}\n"
    over = Over(Varied(whole, FILE, lambda _: ""), "quantity", at_most(ZONES))
    single = Over(Varied(whole, FILE, lambda _: ""), "quantity", at_most(20 * ZONES))
    for _ in range(4):
        first = max(0, today + rng.randint(-4, 2)) * step
        last = first + rng.randint(1, 5) * step
        for key in over.questions(first, last):
            if not over.fine(key, first, last):
                ends["not shown together"] += 1
                continue
            ends["shown together"] += 1
            for at in range(5):
                value = first + (last - first) * at / 4
                if not single.fine(key, value, value):
                    ends["contradicted"] += 1
                    yield f"{key} holds from {first} to {last}, but not at {value} of\n{whole}"
                ends["single values"] += 1


@pytest.mark.campaign
@pytest.mark.parametrize("seeds", chunks(), ids=named)
def test_what_holds_of_all_values_holds_of_each(seeds: range) -> None:
    """Against the prover itself: quicker than the judge, so that times, shares and frequencies of all kinds count."""
    ends: Counter[str] = Counter()
    wrong = []
    for seed in seeds:
        rng = Random(f"wide {seed}")
        text = flowing(seed) if seed % 3 == 1 else draw(seed)
        if seed % 3 == 0:
            text = f"{ruled(text, seed)}  margin at least {rng.randint(1, 4)} ps\n"
        wrong += list(wide_and_single(text, rng, ends))
    print(dict(ends))
    assert not wrong, "\n\n".join(wrong)
    assert ends["single values"]

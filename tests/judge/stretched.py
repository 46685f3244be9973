"""Drawn drives with long stays: the times of short draws never reach the prover's cutting of stays with a carrier."""

import re
from random import Random

from judge.draws import draw

LONG = (60, 90, 120, 150, 200)
SPREADS = (0, 0, 1, 2, 5, 9, 20)
SECTIONS = ("moves", "trips")


def stretched(seed: int) -> str | None:
    """The text of a draw with its `after`, `earliest` and some waits made long; the same seed gives the same text.

    None where the draw has no carrier or nothing to lengthen.
    """
    text = draw(seed)
    if "\ncarriers" not in text or not re.search(r" (after|earliest) \d", _motion(text)):
        return None
    rng = Random(seed)
    lines, section = [], ""
    for line in text.splitlines():
        section = section if line.startswith(" ") else line.split()[0]
        lines.append(_longer(rng, line) if section in SECTIONS else line)
    return "\n".join(lines) + "\n"


def _motion(text: str) -> str:
    return text[text.index("\nmoves") :]


def _longer(rng: Random, line: str) -> str:
    if line.startswith("    wait") and rng.random() < 0.15:
        return f"    wait {rng.choice((60, 90, 120))} ps to {rng.choice((120, 125, 140))} ps"
    if "->" not in line:
        return line
    # `latest` goes: what is open from a long `earliest` on is what gets cut.
    line = re.sub(r" latest \d+ ps", "", line)
    return re.sub(r"(after|earliest) (\d+) ps(?: to \d+ ps)?", lambda found: _stay(rng, found), line)


def _stay(rng: Random, found: re.Match[str]) -> str:
    least = rng.choice(LONG) + int(found[2])
    if found[1] == "earliest":
        return f"earliest {least} ps"
    return f"after {least} ps to {least + rng.choice(SPREADS)} ps"

"""Shared by the tests against values from outside the project: small drives, and what the program says of them.

Marks beside every source: [seen] read in stored public material, [memory] known and not looked up again, [derived]
computed from the stated rule; common practice for facts of the trade without a source.
"""

from collections.abc import Callable, Iterable, Mapping

from reading import FILE, drive_of

from seqcheck.checking import check
from seqcheck.hazards import Hazard, Literal
from seqcheck.proving.prove import Proven, Prover
from seqcheck.verdict import Check, Safe, Unsafe

Switches = tuple[str, ...]


def unsafe(text: str, opened: bool = False) -> dict[Switches, Unsafe]:
    """The shorts (or what is `opened`) that the whole program finds in a file, by switches; every other set must be
    proven."""
    found: dict[Switches, Unsafe] = {}
    for verdict in check(drive_of(text), FILE, frozenset(), lambda _: None).verdicts:
        assert isinstance(verdict, Safe | Unsafe), verdict
        if isinstance(verdict, Unsafe) and (verdict.check is Check.OPEN_WINDING) == opened:
            found[tuple(literal.switch for literal in verdict.hazard.literals)] = verdict
    return found


def overlaps(text: str) -> dict[Switches, int | None]:
    """The greatest overlap of every set that is not proven, in ps, None without end; empty if the file is proven."""
    return {switches: verdict.overlap for switches, verdict in unsafe(text).items()}


def openings(text: str) -> dict[Switches, int | None]:
    """As `overlaps`, for the sets of switches that open a winding while they are off."""
    return {switches: verdict.overlap for switches, verdict in unsafe(text, opened=True).items()}


def shorts(text: str) -> set[Switches]:
    """The sets that a row at rest holds on all at once."""
    return {switches for switches, verdict in unsafe(text).items() if verdict.check is Check.SHORT}


def sets_of(text: str) -> set[Switches]:
    """All minimal sets that would short the stage."""
    outcome = check(drive_of(text), FILE, frozenset(), lambda _: None)
    return {tuple(literal.switch for literal in verdict.hazard.literals) for verdict in outcome.verdicts}


def meet(text: str, *literals: str) -> int | None:
    """For how long literals such as `UH` or `UL off` can be so together, in ps: 0 if never, None without end.

    The check values ask for more than shorts in a few places; the prover takes any literals.
    """
    drive = drive_of(text)
    wanted = tuple(Literal(name.split()[0], not name.endswith(" off")) for name in literals)
    proof = Prover(drive).prove(Hazard(wanted, ("P", "N")), True, lambda _: None)
    return 0 if isinstance(proof, Proven) else proof.overlap


def around(build: Callable[[str], str], pause: str, margin: int) -> tuple[dict[Switches, int | None], ...]:
    """The overlaps with a pause that leaves `margin` ps, and with one that is margin + 1 ps shorter."""
    return overlaps(build(pause)), overlaps(build(f"{pause} - {margin + 1} ps"))


def leg(
    parts: Mapping[str, str], pause: str, clock: str = "", writes: str = "together", waits: bool = True, to: str = "up"
) -> str:
    """One leg that changes from UH to UL and back, each switch through all parts, with `pause` between off and on."""
    steps = "    set all off\n    wait pause\n" if waits else ""
    back = f"  down -> up when turn earliest 1 s\n{steps}" if to == "up" else ""
    return f"""\
drive "one leg"
{clock}
let pause = {pause}
writes {writes}
stage
  rails P N
  leg U UH UL
parts
{lines(f"{name} {times}" for name, times in parts.items())}
paths
  UH UL through {", ".join(parts)}
modes  UH   UL
  up   on   off
  down off  on
moves
  start up
  up -> down when turn earliest 1 s
{steps}{back}"""


def at_rest(stage: Iterable[str], switches: Iterable[str], word: str, known: str = "") -> str:
    """A drive that only rests in one row of its table, written as a word of 0 and 1."""
    cells = " ".join("on" if bit == "1" else "off" for bit in word)
    return f"""\
drive "word {word}"
stage
{lines(stage)}
parts
  device on 10 ns to 20 ns off 10 ns to 20 ns
paths
  {" ".join(switches)} through device
modes {" ".join(switches)}
  only {cells} {known}
moves
  start only
"""


def words(length: int) -> list[str]:
    """All words of a number of bits."""
    return [format(number, f"0{length}b") for number in range(1 << length)]


def lines(rows: Iterable[str]) -> str:
    """Rows of a section."""
    return "\n".join(f"  {row}" for row in rows)

"""The form for people: every counterexample in full, what was proven and how, and a last word on each file."""

from collections.abc import Iterable, Sequence

from seqcheck.drive import Library
from seqcheck.hazards import Stuck
from seqcheck.reports.counterexample import counterexample, sentence
from seqcheck.reports.faults import table as fault_table
from seqcheck.reports.pieces import Line, Piece, Tone, counted, line, listed
from seqcheck.reports.standing import Sorted, Standing, sorted_out
from seqcheck.reports.wording import CAUTION, NOTHING, SERVES, stated, subject
from seqcheck.verdict import Finding, Outcome, Safe, Undecided, Unsafe

_STYLES = {
    Tone.STRONG: "bold",
    Tone.FAINT: "dim",
    Tone.GOOD: "bold green",
    Tone.BAD: "bold red",
    Tone.DOUBT: "bold yellow",
}


_TONES = {
    Standing.UNSAFE: Tone.BAD,
    Standing.AMISS: Tone.BAD,
    Standing.UNDECIDED: Tone.DOUBT,
    Standing.PROVEN: Tone.GOOD,
    Standing.NOTHING: Tone.STRONG,
}


def report(answers: Sequence[Outcome | Library]) -> list[Line]:
    """The whole report as styled lines."""
    found: list[Line] = []
    for answer in answers:
        found += [*(_library(answer) if isinstance(answer, Library) else _file(answer)), ()]
    if len(answers) != 1:
        found.append(_all(answers))
    if answers and all(isinstance(one, Library) for one in answers):
        return found if len(answers) > 1 else found[:-1]
    return [*found, line(Piece(CAUTION, Tone.FAINT))]


def plain(lines: Iterable[Line]) -> str:
    """The lines as bare text, each with a line end."""
    return "".join("".join(piece.text for piece in one) + "\n" for one in lines)


def coloured(lines: Iterable[Line]) -> str:
    """The lines with terminal colours; it looks at no terminal and no environment, the caller has decided."""
    from rich.color import ColorSystem
    from rich.style import Style

    styles = {tone: Style.parse(said) for tone, said in _STYLES.items()}

    def painted(piece: Piece) -> str:
        style = styles.get(piece.tone)
        return style.render(piece.text, color_system=ColorSystem.STANDARD) if style else piece.text

    return "".join("".join(painted(piece) for piece in one) + "\n" for one in lines)


# One file


def _file(outcome: Outcome) -> list[Line]:
    parts = sorted_out(outcome)
    blocks = [[line(Piece(outcome.file, Tone.STRONG), f'  "{outcome.drive.title}"'), *_verdict(parts)]]
    blocks += (counterexample(one, outcome.drive) for one in parts.unsafe)
    blocks += (_undecided(one) for one in parts.undecided)
    blocks += (_finding(one, Piece(one.check.value, Tone.BAD)) for one in parts.findings)
    blocks.append(_proven(parts.safe))
    blocks += (_finding(one, Piece(f"warning {one.check.value}", Tone.DOUBT)) for one in parts.warnings)
    blocks += (_waived(one, why) for one, why in parts.waived)
    blocks.append(fault_table(outcome))
    blocks.append(_closing(outcome.file, parts))
    full = [block for block in blocks if block]
    return [one for block in full[:-1] for one in (*block, ())] + full[-1]


def _library(library: Library) -> list[Line]:
    """A file that only serves `use`: read and checked, and no word of a proof."""
    named = [
        counted(len(names), name)
        for names, name in ((library.quantities, "quantity"), (library.parts, "part"), (library.carriers, "carrier"))
        if names
    ]
    head = line(Piece(library.place.file, Tone.STRONG), f'  "{library.title}"')
    brings = sentence(f"It brings {listed(named) or 'no name'} to files that use it")
    last = line(Piece(NOTHING, _TONES[Standing.NOTHING]), f": {library.place.file}: {SERVES}")
    return [head, (), *brings, (), last]


def _undecided(verdict: Undecided) -> list[Line]:
    """An undecided hazard, in words that nobody takes for proven."""
    found = [line(Piece("UNDECIDED", Tone.DOUBT), f"  {subject(verdict.hazard)}")]
    said = f"Neither proven nor disproven. Limit reached: {verdict.limit}. Zones stored: {verdict.zones}"
    return [*found, *sentence(said)]


def _finding(finding: Finding, title: Piece) -> list[Line]:
    found = [line(title, f"  {finding.place}"), *sentence(finding.text)]
    return found + (sentence(f"A way out: {finding.way_out}") if finding.way_out else [])


def _waived(found: Unsafe | Finding, why: str) -> list[Line]:
    text = found.text if isinstance(found, Finding) else stated(found)
    head = line(Piece(f"waived {found.check.value}", Tone.STRONG), f"  {found.place}")
    return [head, *sentence(text), *sentence(f"Waived because: {why}")]


def _proven(safe: Sequence[Safe]) -> list[Line]:
    """What was proven, by what method, and what of it does not lean on the firmware being in time."""
    if not safe:
        return []
    shorts = sum(1 for one in safe if one.hazard.joins and not one.hazard.asks)
    openings = sum(1 for one in safe if one.hazard.currents)
    faulty = sum(1 for one in safe if isinstance(one.hazard.asks, Stuck))
    lengths = sum(1 for one in safe if one.hazard.asks) - faulty
    others = len(safe) - shorts - openings - lengths - faulty
    kinds = [counted(shorts, "shorting set")] if shorts else []
    kinds += [counted(openings, "opening set")] if openings else []
    kinds += [counted(others, "forbidden combination")] if others else []
    kinds += [counted(lengths, "forbidden length")] if lengths else []
    kinds += [counted(faulty, "short") + " by a single fault"] if faulty else []
    found = [line(Piece("proven", Tone.GOOD), f"  {listed(kinds)}: possible in no run")]
    zoned = [one for one in safe if one.method != "screen"]
    ways = [f"{len(safe) - len(zoned)} by least times alone"] if len(safe) > len(zoned) else []
    ways += [f"{len(zoned)} by {counted(sum(one.zones for one in zoned), 'zone')}"] if zoned else []
    late = sum(1 for one in safe if one.however_late)
    lateness = "all of them" if late == len(safe) else f"{late or 'none'} of {len(safe)}"
    return found + sentence(f"Shown {listed(ways)}. However late the firmware is: {lateness}")


# The last words


def _verdict(parts: Sorted) -> list[Line]:
    """The verdict before all that goes on at length, if there is; what is proven is said in two lines anyway."""
    if parts.standing in (Standing.PROVEN, Standing.NOTHING):
        return []
    return [line(Piece(parts.standing.value, _TONES[parts.standing]), f": {_counts(parts)}")]


def _closing(file: str, parts: Sorted) -> list[Line]:
    standing = parts.standing
    but = " but for what is waived" if parts.waived and standing is Standing.PROVEN else ""
    return [line(Piece(f"{standing.value}{but}", _TONES[standing]), f": {file}: {_counts(parts)}")]


def _counts(parts: Sorted) -> str:
    """How much was found of each kind."""
    counts = [
        (len(parts.unsafe), "counterexample", ""),
        (len(parts.findings), "finding", ""),
        (len(parts.undecided), "hazard", " undecided"),
        (len(parts.safe), "hazard", " proven"),
        (len(parts.warnings), "warning", ""),
        (len(parts.waived), "finding", " waived"),
    ]
    said = [f"{counted(number, name)}{rest}" for number, name, rest in counts if number]
    return ", ".join(said) or "no hazard was asked for, and nothing else was found"


def _all(answers: Sequence[Outcome | Library]) -> Line:
    """How many files stand how."""
    stands = [Standing.NOTHING if isinstance(one, Library) else sorted_out(one).standing for one in answers]
    cells: list[str | Piece] = [f"{counted(len(stands), 'file')}"]
    for standing in Standing:
        if number := stands.count(standing):
            cells += [", " if len(cells) > 1 else ": ", Piece(f"{number} {standing.value}", _TONES[standing])]
    return line(*cells, ".")

"""One counterexample on the screen: what is joined, what would cure it, the run, and its picture."""

from seqcheck.drive import Drive
from seqcheck.quantities import shown
from seqcheck.reports.picture import picture
from seqcheck.reports.pieces import Line, Piece, Tone, line, listed, paragraph
from seqcheck.reports.rows import rows
from seqcheck.reports.run import Run, run_of
from seqcheck.reports.wording import condition, cure, stated, stretch, where
from seqcheck.verdict import Unsafe

INDENT = 2


def counterexample(verdict: Unsafe, drive: Drive) -> list[Line]:
    """The lines for one unsafe verdict that no waiver lets pass."""
    run = run_of(verdict, drive)
    found = [line(Piece(verdict.check.value.upper(), Tone.BAD), f"  {verdict.place}")]
    found += sentence(stated(verdict), Tone.STRONG)
    found += sentence(_capital(where(verdict, drive))) + sentence(_capital(condition(verdict.hazard)))
    found += sentence(f"To cure it: {cure(verdict, drive)}", Tone.STRONG)
    found += [
        (),
        *_count_from(run, verdict),
        *_interlocks(verdict, drive),
        *_differences(verdict, drive),
        *_letters(run),
        (),
    ]
    return [*found, *rows(run), (), *picture(run)]


def sentence(text: str, tone: Tone = Tone.PLAIN, indent: int = INDENT) -> list[Line]:
    """A sentence as a paragraph, its first letter as it is, for it may begin with a name; nothing for an empty one."""
    return paragraph(f"{text}.", indent, tone) if text else []


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _count_from(run: Run, verdict: Unsafe) -> list[Line]:
    """From what moment the times of the run count, and how much of the overlap this run shows."""
    note = run.origin_note
    begins = f"is where line {note.line} begins ({note.text})" if note.text else "is its start"
    into = f", {shown(run.origin)} after the start" if run.origin else ""
    text = f"The run. t = 0 {begins}{into}"
    span = verdict.replayed.overlap
    found = paragraph(f"{text}.", INDENT, Tone.FAINT)
    whole = verdict.overlap is None or stretch(verdict) not in ("overlap", "opening", "excess", "lateness")
    if not whole and span.end is not None and span.end - span.start != verdict.overlap:
        found += paragraph(
            f"In this run the {run.stretch} is {shown(span.end - span.start)}.", INDENT, Tone.FAINT
        )
    return found


def _interlocks(verdict: Unsafe, drive: Drive) -> list[Line]:
    """What the column of commands means where a concerned switch has an interlock."""
    concerned = {one.switch for one in verdict.hazard.literals}
    if not any(concerned & {one.first, one.second} for one in drive.interlocks):
        return []
    how = "as the interlock passes it on" if verdict.trace.interlocked else "with the interlock left out"
    return paragraph(f"A command is shown {how}.", INDENT, Tone.FAINT)


def _differences(verdict: Unsafe, drive: Drive) -> list[Line]:
    """What the conduction means where a part bounds the difference of its delays."""
    literals = verdict.hazard.literals
    parts = {part for one in literals for part in drive.paths[one.switch]}
    named = sorted(part.name for part in parts if part.difference is not None)
    if not named or len(literals) != 2 or not all(one.on for one in literals):
        return []
    text = f"A turn-on is shown against the slowest turn-off of the other: the difference of {listed(named)} counts."
    return paragraph(text, INDENT, Tone.FAINT)


def _letters(run: Run) -> list[Line]:
    """Which switch each letter stands for, where letters are used."""
    names = [lane.literal.switch for lane in run.lanes]
    both = [(title, name) for title, name in zip(run.titles, names, strict=True) if title != name]
    return [line(" " * INDENT, Piece(f"{title} is {name}", Tone.STRONG)) for title, name in both]

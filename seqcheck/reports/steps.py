"""The steps of a counterexample, each with the line of the file that it is to be shown at."""

from collections.abc import Iterator

from seqcheck.drive import Drive
from seqcheck.quantities import shown
from seqcheck.reports.acts import Note
from seqcheck.reports.instants import Instant
from seqcheck.reports.run import Run
from seqcheck.source import Place
from seqcheck.verdict import Unsafe


def steps(run: Run, verdict: Unsafe, drive: Drive) -> Iterator[tuple[Instant, Note, Place]]:
    """A step for everything that happens, at its line; where there is none, at the line where the firmware is."""
    place = drive.modes[drive.start].place if drive.start in drive.modes else drive.place
    for instant in run.instants:
        for note in instant.notes:
            place = note.place or place
            yield instant, note, place


def told_at(run: Run, instant: Instant, note: Note) -> str:
    """A step with its time: `t = 1.5 us: set UH off`."""
    when = "start" if instant.time is None else f"t = {shown(instant.time - run.origin)}"
    return f"{when}: {note.text}"

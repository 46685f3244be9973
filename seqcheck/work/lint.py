"""A lint by one process, by several or by a cluster, with a line that tells how far it is where somebody watches."""

import contextlib
import os
from collections.abc import Generator, Iterator, Sequence
from typing import TYPE_CHECKING, TextIO

from seqcheck.work.pieces import Call, Hands, Instead, Judged, Told, judged

if TYPE_CHECKING:
    from seqcheck.reports.progress import Progress


def judged_by(hands: Hands, files: Sequence[str], call: Call, stream: TextIO) -> Generator[Judged, None, None]:
    """What there is to say of each file, in their order; raises NoHands. How far it is is told on a terminal."""
    progress = _progress(stream, len(files))
    try:
        for one in _each(hands, files, call, progress):
            if progress:
                progress.file_done()
            yield one
    finally:
        if progress:
            progress.clear()


def _progress(stream: TextIO, files: int) -> "Progress | None":
    if not stream.isatty() or os.environ.get("TERM") == "dumb":
        return None
    from seqcheck.reports.progress import Progress

    return Progress(stream, files)


def _each(hands: Hands, files: Sequence[str], call: Call, progress: "Progress | None") -> Iterator[Judged]:
    def tell(said: Told | Instead) -> None:
        if progress and isinstance(said, Told):
            progress.count(said.hazards, said.settled, said.zones)

    teller = tell if progress else None
    if hands == Hands():
        yield from (judged(file, call, teller) for file in files)
        return
    from seqcheck.work.plan import by_many, crew_of

    with contextlib.closing(crew_of(hands)) as crew:
        yield from by_many(files, call, crew, teller)

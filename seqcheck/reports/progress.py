"""How far a lint is, on one line of a terminal, for work that takes more than a second; it leaves no trace there."""

import time
from typing import TYPE_CHECKING, TextIO

if TYPE_CHECKING:
    from rich.live import Live

SHOWN_AFTER = 1.0
"""Seconds for which nothing is shown."""
_RENEWED_EVERY = 0.1
"""Seconds between two looks of the line."""


class Progress:
    """The line; rich is imported when it is first shown."""

    def __init__(self, stream: TextIO, files: int) -> None:
        self._stream = stream
        self._files = files
        self._begun = time.monotonic()
        self._due = self._begun + SHOWN_AFTER
        self._live: Live | None = None
        self._done = self._hazards = self._settled = self._zones = 0

    def count(self, hazards: int, settled: int, zones: int) -> None:
        """So many more hazards have been found to prove, been settled, and zones been stored."""
        self._hazards += hazards
        self._settled += settled
        self._zones += zones
        now = time.monotonic()
        if now >= self._due:
            self._due = now + _RENEWED_EVERY
            self._show(now - self._begun)

    def file_done(self) -> None:
        """One more file is judged; the line goes away, since something may be said of the file now."""
        self._done += 1
        self.clear()

    def clear(self) -> None:
        """Take the line away; the next count shows it again."""
        if self._live is not None:
            self._live.stop()
            self._live = None

    def line(self, seconds: float) -> str:
        """What is shown after that time."""
        files = f"{self._done} of {self._files} files, " if self._files > 1 else ""
        hazards = f"{min(self._settled, self._hazards)} of {self._hazards} hazards settled"
        return f"{files}{hazards}, {self._zones:,} zones explored, {self._zones / seconds:,.0f} a second"

    def _show(self, seconds: float) -> None:
        from rich.console import Console
        from rich.live import Live
        from rich.text import Text

        text = Text(self.line(seconds), style="dim", no_wrap=True, overflow="ellipsis")
        if self._live is None:
            console = Console(file=self._stream, force_terminal=True)
            self._live = Live(  # no thread of its own: processes may be forked beside it
                console=console, auto_refresh=False, transient=True, redirect_stdout=False, redirect_stderr=False
            )
            self._live.start()
        self._live.update(text, refresh=True)

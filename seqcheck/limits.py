"""When a proof is given up, and the observer that gives it up."""

import time
from collections.abc import Callable
from typing import TYPE_CHECKING

from seqcheck.records import dataclass

if TYPE_CHECKING:
    from seqcheck.proving.reductions import Reduction

Observer = Callable[[int], None]


@dataclass(frozen=True, slots=True)
class Limits:
    """When to give a proof up: after so many zones, or so many seconds for one file. `without`: reductions left out."""

    zones: int | None
    seconds: float | None
    without: "frozenset[Reduction]" = frozenset()

    def end(self) -> float | None:
        """When the time of a file that begins now is over, by the monotonic clock of this machine."""
        return None if self.seconds is None else time.monotonic() + self.seconds


NO_LIMITS = Limits(None, None)


def observer(limits: Limits, end: float | None = None) -> Observer:
    """The observer that ends a proof at its limits by raising LimitReached; `end` where the file's time has begun."""
    from seqcheck.proving.search import LimitReached

    over = limits.end() if end is None else end

    def observe(zones: int) -> None:
        if limits.zones is not None and zones > limits.zones:
            raise LimitReached(f"{limits.zones} zones (--most-zones)")
        if over is not None and zones % 64 == 0 and time.monotonic() > over:
            raise LimitReached(f"{limits.seconds:g} s (--give-up-after)")

    return observe

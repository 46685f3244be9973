"""Why the replay of a trace refuses it."""

from dataclasses import dataclass

from seqcheck.drive import cell_text
from seqcheck.quantities import Interval, shown
from seqcheck.verdict import Event


class NotPermitted(Exception):  # noqa: N818 - it says what a trace is, not that the program failed
    """The drive does not permit the trace; the text is a sentence that says what is wrong, when and why."""


@dataclass(frozen=True, slots=True)
class Due:
    """Something that must have happened by `time` (ps); `what` completes "... must ..."."""

    time: int
    what: str


def due(since: int, span: Interval, what: str) -> list[Due]:
    """What must happen within `span` after `since`: nothing where the span has no upper bound."""
    return [] if span.hi is None else [Due(since + span.hi, what)]


def require_within(time: int, since: int, span: Interval, what: str) -> None:
    """Refuse a `time` outside of `span` after `since`; `what` names that which is timed."""
    if time < since + span.lo:
        raise NotPermitted(f"{what} cannot come before {shown(since + span.lo)}")
    if span.hi is not None and time > since + span.hi:
        raise NotPermitted(f"{what} cannot come after {shown(since + span.hi)}")


def described(event: Event) -> str:
    """The event in a few words, without its time."""
    cells = ", ".join(f"{switch} {cell_text(cell)}" for switch, cell in event.writes)
    number = f"{'trip' if event.trip else 'move'} {event.index}" if event.index >= 0 else ""
    return " ".join(word for word in (event.act.value, event.name, number, cells) if word)

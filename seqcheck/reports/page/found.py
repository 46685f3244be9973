"""What was found, on a page: counterexamples with their diagrams and rows of time, and findings without a run."""

from collections.abc import Iterator
from xml.etree.ElementTree import Element

from seqcheck.drive import Drive
from seqcheck.quantities import shown
from seqcheck.reports.checks import ABOUT
from seqcheck.reports.drawing import waves
from seqcheck.reports.instants import Instant, State
from seqcheck.reports.page.markup import node, sentence, table
from seqcheck.reports.rows import scaled
from seqcheck.reports.run import Run, run_of
from seqcheck.reports.wording import condition, cure, stated, subject, where
from seqcheck.verdict import Finding, Undecided, Unsafe


def unsafe(verdict: Unsafe, drive: Drive, name: str, why: str | None = None) -> Element:
    """A counterexample in full; `why` is the reason of the waiver that lets it pass."""
    run = run_of(verdict, drive)
    waived = "waived " if why is not None else ""
    return node(
        "section",
        node("h3", f"{waived}{verdict.check.value}: {subject(verdict.hazard)}", id=name),
        node("p", node("code", str(verdict.place)), f" \u2014 {ABOUT[verdict.check.value].name}."),
        sentence(stated(verdict), "" if waived else "alarm"),
        sentence(where(verdict, drive)),
        sentence(condition(verdict.hazard)),
        sentence(f"Waived because: {why}" if why is not None else f"To cure it: {cure(verdict, drive)}"),
        waves.picture(verdict, drive, name=f"{name}-run", told=False),
        _rows(run),
        kind="finding",
    )


def finding(one: Finding, name: str, why: str | None = None) -> Element:
    """A finding or warning without a run."""
    about = ABOUT[one.check.value]
    return node(
        "section",
        node("h3", f"{'waived ' if why is not None else ''}{one.check.value}: {about.name}", id=name),
        node("p", node("code", str(one.place))),
        sentence(one.text),
        sentence(f"Waived because: {why}" if why is not None else f"A way out: {one.way_out}" if one.way_out else ""),
        kind="finding",
    )


def undecided(one: Undecided, name: str) -> Element:
    """An undecided hazard, in words that nobody takes for proven."""
    return node(
        "section",
        node("h3", f"undecided: {subject(one.hazard)}", id=name),
        sentence(f"Neither proven nor disproven. Limit reached: {one.limit}. Zones stored: {one.zones}", "alarm"),
        kind="finding",
    )


def _rows(run: Run) -> Element:
    heads = ["row", f"t / {run.unit}", "since", "what happens (line)"]
    heads += [f"{title} command" for title in run.titles] + [f"{title} conducts" for title in run.titles]
    note = run.origin_note
    begins = f"where line {note.line} begins ({note.text})" if note.text else "the start of the run"
    names = zip(run.titles, (lane.literal.switch for lane in run.lanes), strict=True)
    letters = "".join(f"; {title} is {name}" for title, name in names if title != name)
    marked = frozenset(index for index, one in enumerate(run.instants) if one.overlap)
    return table(f"The run; t = 0 is {begins}{letters}. The {run.stretch} is marked *.", heads, _cells(run), marked)


def _cells(run: Run) -> Iterator[list[str | Element]]:
    before: Instant | None = None
    for one in run.instants:
        time = "start" if one.time is None else scaled(one.time - run.origin, run.size)
        since = (one.time or 0) - ((before.time or 0) if before else 0)
        notes = node("span", "; ".join(f"{note.text} ({note.line})" if note.line else note.text for note in one.notes))
        commands = [_commands(state) for state in one.states]
        conducts = [state.conduct.value for state in one.states]
        mark = f"{one.number} *" if one.overlap else str(one.number)  # no row is told by its ground alone
        yield [mark, time, f"+{shown(since)}" if since else "", notes, *commands, *conducts]
        before = one


def _commands(state: State) -> str:
    return ",".join("any" if each.value == "unknown" else each.value for each in state.commands)

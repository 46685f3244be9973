"""`seqcheck draw`: the picture that is asked for, as a text."""

import argparse
from dataclasses import dataclass

from seqcheck.reports.standing import Sorted, Standing, are, sorted_out, worst
from seqcheck.source import printable
from seqcheck.verdict import Check, Outcome, Unsafe

FORMS = ("svg", "mermaid")
ABOUT = """\
Draw FILE: the graph of its modes, coloured by what each does to the winding, with the path of the worst counterexample
marked; or with --trace a counterexample as a timing diagram. The picture is SVG; it says so where there is no
counterexample. The exit code is that of 'lint'.

example:
  seqcheck draw drive.dseq --out modes.svg
  seqcheck draw drive.dseq --trace overlap --out overlap.svg"""
RUNLESS = tuple(
    check.value
    for check in (
        Check.UNREACHABLE, Check.NO_WAY_BACK, Check.AMBIGUOUS, Check.STALLED, Check.ROW_MEANING, Check.IDLE_WAIVER,
        Check.NO_PATH, Check.HELD_BY_INTERLOCK, Check.PUNCTUAL,
    )
)  # fmt: skip
"""The checks whose findings are no runs."""
TRACED = tuple(check.value for check in Check if check.value not in RUNLESS)
"""The checks whose findings are runs."""


@dataclass(frozen=True, slots=True)
class Wanted:
    """What to draw: the mode graph, or the run of a check if one is named; `run` counts as on the screen."""

    check: str | None
    run: int | None
    form: str


def arguments(parser: argparse.ArgumentParser) -> None:
    """Give the parser what is special to this command."""
    parser.add_argument("file", metavar="FILE")
    parser.add_argument("--modes", action="store_true", help="the graph of modes (what is drawn if nothing is said)")
    parser.add_argument("--trace", metavar="CHECK", help="a timing diagram of a run of this check, such as 'overlap'")
    parser.add_argument("--run", metavar="N", help="the N-th counterexample of the screen, not the worst")
    parser.add_argument("--as", dest="form", metavar="FORM", default="svg", help="svg (the default) or mermaid")


def drawn(outcome: Outcome, wanted: Wanted) -> str:
    """The picture as a text. ValueError with the words for whoever asked if there is no such run."""
    parts = sorted_out(outcome)
    verdict = _chosen(parts, wanted, outcome.file)
    if wanted.check is not None:
        return _diagram(outcome, parts, verdict, wanted.check)
    from seqcheck.commands.graphs import graph_of

    graph, note = graph_of(outcome.drive), noted(parts, verdict)
    if wanted.form == "mermaid":
        from seqcheck.reports.drawing import mermaid

        return mermaid.report(graph, verdict, note)
    from seqcheck.reports.drawing import modes
    from seqcheck.reports.drawing.elements import alone

    return alone(modes.picture(graph, verdict, note))


def _chosen(parts: Sorted, wanted: Wanted, file: str) -> Unsafe | None:
    if wanted.run is not None:
        if wanted.run > len(parts.unsafe):
            raise ValueError(f"--run {wanted.run}: there {are(len(parts.unsafe))} of {printable(file)}")
        chosen = parts.unsafe[wanted.run - 1]
        if wanted.check not in (None, chosen.check.value):
            raise ValueError(f"--run {wanted.run}: this run is of '{chosen.check.value}', not of '{wanted.check}'")
        return chosen
    own = [one for one in parts.unsafe if wanted.check in (None, one.check.value)]
    return worst(own) if own else None


def noted(parts: Sorted, verdict: Unsafe | None) -> str:
    """What the marking of a mode graph rests on."""
    if verdict is not None:
        number = parts.unsafe.index(verdict) + 1
        return f"Marked is run {number} of {len(parts.unsafe)}: {verdict.check.value} at {verdict.place}."
    if parts.undecided:
        return "Undecided within the limits given: no path is marked, and none is ruled out."
    waived = " but for what is waived" if parts.waived else ""
    if parts.standing is Standing.PROVEN:
        return f"No unsafe path: the file is proven{waived}."
    return f"No unsafe path{waived}, but the file is {parts.standing.value}."


def _diagram(outcome: Outcome, parts: Sorted, verdict: Unsafe | None, check: str) -> str:
    from seqcheck.reports.drawing import waves
    from seqcheck.reports.drawing.elements import alone
    from seqcheck.reports.drawing.nothing import picture

    if verdict is not None:
        return alone(waves.picture(verdict, outcome.drive))
    said = [f"There is no counterexample of the check '{check}' in {printable(outcome.file)}."]
    said += [f"The file is {parts.standing.value}; this picture says nothing else."]
    said += [f"{len(parts.undecided)} undecided: a limit was reached, so a run may exist."] if parts.undecided else []
    return alone(picture(f"No run of '{check}': {outcome.drive.title}", said))

"""The command line as it is read: commands, options, their help, and what their values must be."""

import argparse
import io
import re
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Never

from seqcheck import __version__
from seqcheck.exits import WRONG
from seqcheck.limits import Limits

if TYPE_CHECKING:
    from seqcheck.proving.reductions import Reduction
    from seqcheck.verdict import Check

FORMS = ("screen", "lines", "annotations", "json", "sarif", "vcd")
COMPARE_FORMS = ("screen", "lines")
SHELLS = ("bash", "zsh", "fish")
MOST_JOBS = 256
"""More processes than any one machine has use for here."""
_LINT = """\
Prove each drive-sequence file, or print the run that shorts a leg. A folder means every *.dseq in it, no PATH the
folder you are in, '-' standard input. A file that only serves 'use' is read and checked; it has nothing to prove.

example:
  seqcheck lint drive.dseq
  seqcheck lint drives --as sarif --out drives.sarif"""
_AUDIT = """\
Check the evidence that 'lint --evidence' wrote for FILE: that its proofs prove and its runs run, by code that shares
nothing with the prover. Evidence that does not bear out what it says ends with exit code 4.

example:
  seqcheck lint drive.dseq --evidence proofs
  seqcheck audit drive.dseq proofs/drive.dseq.json"""
_MARGINS = """\
The dead-time budget of FILE: for every switch and those that may not conduct with it, what the parts ask for, what the
file leaves at worst, and the move, trip or row that sets it; least first.

example:
  seqcheck margins drive.dseq"""
_SIZE = """\
The range of NAME, a 'let' of FILE, in which the whole file is proven: all that 'lint' proves, with any value of the
range; and what breaks one step outside it. If today's value fails, the nearest that was found to hold.

example:
  seqcheck size drive.dseq settle
  seqcheck size drive.dseq settle --step 100ns"""
_SIZED = """\
exit codes: 0 today's value holds, and the ends of the range are decided (or it was looked for a thousand times as far);
1 today's value does not hold; 2 the input or the call is wrong; 3 today's value or an end is undecided within the
limits given; 4 the program itself is at fault."""
_ROWS = """\
Read the switching table of FILE back from the circuit: what every row does to every winding, whether its current has a
way, and which rows swap a leg. Exit code 1 if a row shorts a supply or does not do what it 'means'.

example:
  seqcheck rows drive.dseq"""
_REPORT = """\
Write one page about FILE for a design review: verdict, assumptions, table, mode graph, margins, every finding with its
timing diagram, waivers, what is not covered. It stands alone.

example:
  seqcheck report drive.dseq --out page.html"""
_DRAW = """\
Draw FILE: the graph of its modes, coloured by what each does to the winding, with the path of the worst counterexample
marked; or with --trace a counterexample as a timing diagram. The picture is SVG; it says so where there is no
counterexample. The exit code is that of 'lint'.

example:
  seqcheck draw drive.dseq --out modes.svg
  seqcheck draw drive.dseq --trace overlap --out overlap.svg"""
_SERVE = """\
Serve an editor: speak the Language Server Protocol 3.17 on standard input and output. Mistakes of reading are said at
once, findings after a proof; hover, definition, completion and formatting are answered. The exit code is the
protocol's. An editor starts it; the README says how to set some up.

example, as the command in an editor's settings:
  seqcheck serve --give-up-after '30 s'"""
_COMPARE = """\
What the change from OLD to NEW comes to, for a review: hazards, findings, margins, overlaps, what can be entered, and
what is said differently. One of them may be '-', standard input. Files that it names with 'use' are looked for from the
folder you are in, as they are now.

example:
  seqcheck compare old.dseq new.dseq
  git show HEAD:drive.dseq | seqcheck compare - drive.dseq"""
_COMPARED = """\
exit codes: 0 nothing became worse; 1 a hazard is possible in NEW that was not shown to be in OLD, or a check is broken
that was not, and no waiver lets it pass; 2 the input or the call is wrong, nothing was compared; 3 a hazard of NEW is
undecided within the limits given; 4 the program itself is at fault. Code 0 does not say that NEW is proven: what was
possible before and still is, is no change. A smaller margin or a longer overlap alone is told, and is code 0 too."""
_TIDY = """\
Line up the columns of each file, its spacing and its blank lines. Comments, names and meaning stay; a file with
mistakes is left as it is (exit code 2). A folder means every *.dseq in it; '-' goes from standard input to standard
output.

example:
  seqcheck tidy drive.dseq
  seqcheck tidy --check drives"""
_TIDY_EXITS = """\
exit codes: 0 all files are tidy now; 1 --check found one that is not; 2 the input or the call is wrong, or a file
cannot be written; 4 the program itself is at fault. Where several files differ the worst counts, in the order 4, 2, 1,
0."""
_START = """\
Print a first file for a drive of this KIND, proven as it stands: put in your own circuit, data-sheet values and moves.
Without KIND, list the kinds.

example:
  seqcheck start h-bridge > pump.dseq && seqcheck lint pump.dseq"""
_COMPLETION = """\
Print the script with which a shell completes calls of seqcheck: commands, options, their values, files. SHELL is bash,
zsh or fish; the script's first lines say where it belongs.

example, for the bash that you are in:
  source <(seqcheck completion bash)"""
_ABOUT = """\
Prove that a drive sequence never shorts a leg of its power stage, or show the run that does.

example:
  seqcheck start h-bridge > pump.dseq
  seqcheck lint pump.dseq

'seqcheck COMMAND --help' says more of each."""
_EXITS = """\
exit codes: 0 everything asked is proven; 1 a hazard is possible, or there is another finding that is not waived; 2 the
input or the call is wrong, nothing was judged; 3 undecided within the limits given, never to be taken for proven; 4 the
program itself is at fault. Where several files differ the worst counts, in the order 4, 2, 1, 3, 0."""


def complain(text: str) -> None:
    tell(f"seqcheck: {text}")


def tell(line: str) -> None:
    """Put a line on standard error; where that cannot be written the exit code must do."""
    try:
        print(line, file=sys.stderr)
    except (OSError, ValueError):
        sys.stderr = io.StringIO()  # or what is stuck in it would spoil the exit code at the end


class _Help(argparse.HelpFormatter):
    """Help in paragraphs; lines that are indented, as those of examples, stay as they are."""

    def _fill_text(self, text: str, width: int, indent: str) -> str:
        return "\n\n".join(self._paragraph(one, width, indent) for one in text.split("\n\n"))

    def _paragraph(self, text: str, width: int, indent: str) -> str:
        if "\n  " in text:
            return "\n".join(f"{indent}{row}" for row in text.splitlines())
        return super()._fill_text(text, width, indent)

    def add_argument(self, action: argparse.Action) -> None:
        """Add an argument, but for one of which the usage line says all; the names of commands are indented once more
        than argparse reckons with."""
        if isinstance(action, argparse._SubParsersAction):
            super().add_argument(action)
            longest = max(map(len, action.choices))
            self._action_max_length = max(self._action_max_length, longest + 2 * self._indent_increment)
        elif action.option_strings or action.help is not None:
            super().add_argument(action)


class _Parser(argparse.ArgumentParser):
    """Wrong calls in our own words, on one line; help as it is formatted here."""

    def __init__(self, *, formatter_class: type[argparse.HelpFormatter] = _Help, **more: Any) -> None:
        super().__init__(formatter_class=formatter_class, **more)

    def error(self, message: str) -> Never:
        complain(f"error: {message}; '{self.prog} --help' shows the call")
        raise SystemExit(WRONG)


def parser() -> argparse.ArgumentParser:
    parser = _Parser(
        prog="seqcheck",
        description=_ABOUT,
        epilog=_EXITS,
        allow_abbrev=False,
    )
    version = f"seqcheck {__version__}"
    parser.add_argument("--version", action="version", version=version, help="print the version and exit")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands", required=True)
    lint = commands.add_parser("lint", help="prove files", description=_LINT, epilog=_EXITS, allow_abbrev=False)
    lint.add_argument("paths", nargs="*", metavar="PATH", default=[])
    forms = f"{FORMS[0]} (the default), {one_or_other(FORMS[1:])}"
    lint.add_argument("--as", dest="form", metavar="FORM", default=FORMS[0], help=forms)
    lint.add_argument("--run", metavar="N", help="with --as vcd: the N-th counterexample of the screen, not the worst")
    lint.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    lint.add_argument("--only", metavar="CHECK", action="append", default=[], help="besides hazards say only this")
    _limited(lint)
    lint.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")
    lint.add_argument("--changed", action="store_true", help="PATHs are what a change touches: add all that 'use' them")
    lint.add_argument("--with-fault", action="store_true", help="also tell what any one thing that is stuck brings")
    lint.add_argument("--jobs", metavar="N", help="let N processes share the work (1); the answer is the same")
    lint.add_argument("--scheduler", metavar="ADDRESS", help="let the machines of a dask scheduler share the work")
    lint.add_argument("--without", metavar="REDUCTION", action="append", default=[], help=argparse.SUPPRESS)
    lint.add_argument("--evidence", metavar="DIR", help="write FILE.json for each file into this folder, for audit")
    rows = commands.add_parser("rows", help="read the table back", description=_ROWS, epilog=_EXITS, allow_abbrev=False)
    rows.add_argument("file", metavar="FILE")
    rows.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    rows.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")
    drawing = commands.add_parser(
        "draw", help="draw the modes or a run", description=_DRAW, epilog=_EXITS, allow_abbrev=False
    )
    drawing.add_argument("file", metavar="FILE")
    drawing.add_argument("--modes", action="store_true", help="the graph of modes (what is drawn if nothing is said)")
    drawing.add_argument("--trace", metavar="CHECK", help="a timing diagram of a run of this check, such as 'overlap'")
    drawing.add_argument("--run", metavar="N", help="the N-th counterexample of the screen, not the worst")
    drawing.add_argument("--as", dest="form", metavar="FORM", default="svg", help="svg (the default) or mermaid")
    drawing.add_argument("--out", metavar="FILE", help="write the picture to FILE instead of standard output")
    _limited(drawing)
    review = commands.add_parser(
        "report", help="write the page for a review", description=_REPORT, epilog=_EXITS, allow_abbrev=False
    )
    review.add_argument("file", metavar="FILE")
    review.add_argument("--out", metavar="FILE", help="write the page to FILE instead of standard output")
    _limited(review)
    compare = commands.add_parser(
        "compare", help="say what a change does", description=_COMPARE, epilog=_COMPARED, allow_abbrev=False
    )
    compare.add_argument("old", metavar="OLD")
    compare.add_argument("new", metavar="NEW")
    _told(compare, "screen (the default) or lines")
    margins = commands.add_parser(
        "margins", help="how much dead time is left", description=_MARGINS, epilog=_EXITS, allow_abbrev=False
    )
    margins.add_argument("file", metavar="FILE")
    _told(margins, "screen (the default), lines or json")
    size = commands.add_parser(
        "size", help="how far a quantity may go", description=_SIZE, epilog=_SIZED, allow_abbrev=False
    )
    size.add_argument("file", metavar="FILE")
    size.add_argument("name", metavar="NAME")
    size.add_argument("--step", metavar="D", help="how finely to look (a tick of the clock, else 1 ps, Hz, ppm)")
    _told(size, "screen (the default), lines or json")
    audit = commands.add_parser(
        "audit", help="check evidence", description=_AUDIT, epilog=_EXITS, allow_abbrev=False
    )
    audit.add_argument("file", metavar="FILE")
    audit.add_argument("evidence", metavar="EVIDENCE")
    serve = commands.add_parser("serve", help="serve an editor", description=_SERVE, allow_abbrev=False)
    serve.add_argument("--most-zones", metavar="N", help="give a proof up after N zones (50000)")
    serve.add_argument("--give-up-after", metavar="DURATION", help="give a text up after this time (10 s)")
    tidy = commands.add_parser("tidy", help="line up files", description=_TIDY, epilog=_TIDY_EXITS, allow_abbrev=False)
    tidy.add_argument("files", nargs="+", metavar="FILE")
    tidy.add_argument("--check", action="store_true", help="change nothing, say which files are not tidy (exit code 1)")
    start = commands.add_parser("start", help="print a first file", description=_START, allow_abbrev=False)
    start.add_argument("kind", nargs="?", metavar="KIND")
    completion = commands.add_parser(
        "completion", help="let a shell complete calls", description=_COMPLETION, allow_abbrev=False
    )
    completion.add_argument("shell", metavar="SHELL")
    return parser


def _told(parser: argparse.ArgumentParser, forms: str) -> None:
    """How an answer is told, where it goes, and when a proof for it is given up."""
    parser.add_argument("--as", dest="form", metavar="FORM", default="screen", help=forms)
    parser.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    parser.add_argument("--most-zones", metavar="N", help="give a proof up after N zones")
    parser.add_argument("--give-up-after", metavar="DURATION", help="give up after this time, such as '30 s'")
    parser.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")


def _limited(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--most-zones", metavar="N", help="give a proof up after N zones")
    parser.add_argument("--give-up-after", metavar="DURATION", help="give a file up after this time, such as '30 s'")
    parser.add_argument("--fresh", action="store_true", help="prove all anew, use no answer kept from an earlier run")


def wrong(text: str) -> Never:
    complain(f"error: {text}")
    raise SystemExit(WRONG)


def one_of(option: str, value: str, known: tuple[str, ...]) -> str:
    if value not in known:
        from seqcheck.messages import nearest

        wrong(f"{option} cannot be '{value}'; {nearest(value, known)}")
    return value


def check_named(name: str) -> "Check":
    from seqcheck.messages import nearest
    from seqcheck.verdict import Check

    known = {check.value: check for check in Check}
    if name in known:
        return known[name]
    wrong(f"--only {name}: there is no such check; {nearest(name, known)}")


def limits_of(asked: argparse.Namespace) -> Limits:
    zones = count("--most-zones", asked.most_zones)
    return Limits(zones, seconds(asked.give_up_after), _left_out(getattr(asked, "without", [])))


def _left_out(names: list[str]) -> "frozenset[Reduction]":
    if not names:
        return frozenset()
    from seqcheck.messages import nearest
    from seqcheck.proving.reductions import Reduction

    known = {one.value: one for one in Reduction}
    for name in names:
        if name not in known:
            wrong(f"--without {name}: there is no such reduction; {nearest(name, known)}")
    return frozenset(known[name] for name in names)


def one_or_other(names: Sequence[str]) -> str:
    return f"{', '.join(names[:-1])} or {names[-1]}"


def count(option: str, text: str | None) -> int | None:
    if text is None:
        return None
    if not re.fullmatch(r"[0-9]{1,15}", text) or int(text) == 0:
        wrong(f"{option} must be a whole number above 0, not '{text}'")
    return int(text)


def at_most(most: int, option: str, number: int) -> int:
    if number > most:
        wrong(f"{option} cannot be above {most}")
    return number


def seconds(text: str | None) -> float | None:
    if text is None:
        return None

    from fractions import Fraction

    from seqcheck.quantities import PICOSECONDS

    match = re.fullmatch(r"([0-9]{1,15}(?:\.[0-9]{1,15})?) *([a-zµμ]+)", text)
    if match is None or match[2] not in PICOSECONDS or Fraction(match[1]) == 0:
        wrong(f"--give-up-after must be a time above 0 with its unit, such as '30 s', not '{text}'")
    return float(Fraction(match[1]) * PICOSECONDS[match[2]] / PICOSECONDS["s"])

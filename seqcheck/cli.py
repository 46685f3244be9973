"""Arguments, opening files and exit codes: the only room that touches the world."""

import argparse
import contextlib
import errno
import gc
import os
import re
import shlex
import stat
import sys
import time
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from typing import TYPE_CHECKING, Never, TextIO

from seqcheck import __version__
from seqcheck.commands import draw
from seqcheck.drive import Drive, Library, NeverRule
from seqcheck.exits import FAULT, FOUND, PROVEN, UNDECIDED, WRONG
from seqcheck.exits import worse as _worse
from seqcheck.messages import Problem, Problems, nearest
from seqcheck.quantities import PICOSECONDS
from seqcheck.source import Place, printable
from seqcheck.verdict import WARNINGS, Answer, Check, Failed, Finding, Outcome, Undecided, Unread, Unsafe

if TYPE_CHECKING:
    from seqcheck.checking import Kept
    from seqcheck.evidence.audit import Audited
    from seqcheck.reports.repository import Repository

_STDIN = "-"
FORMS = ("screen", "lines", "annotations", "json", "sarif", "vcd")
_WHATEVER_COMES = ("annotations", "json", "sarif")
"""The forms that also say which files could not be judged."""

_LINT = """\
Prove each drive-sequence file, or print the run that shorts a leg. A folder means every *.dseq in it, no PATH the
folder you are in, '-' standard input. A file that only serves 'use' is read and checked; it has nothing to prove."""
_AUDIT = """\
Check the evidence that 'lint --evidence' wrote for FILE: that its proofs prove and its runs run, by code that shares
nothing with the prover. Evidence that does not bear out what it says ends with exit code 4."""
_MARGINS = """\
The dead-time budget of FILE: for every switch and those that may not conduct with it, what the parts ask for, what the
file leaves at worst, and the move, trip or row that sets it; least first."""
_ROWS = """\
Read the switching table of FILE back from the circuit: what every row does to every winding, whether its current has a
way, and which rows swap a leg. Exit code 1 if a row shorts a supply or does not do what it 'means'."""
_REPORT = """\
Write one page about FILE for a design review: verdict, assumptions, table, mode graph, margins, every finding with its
timing diagram, waivers, what is not covered. It stands alone. Example: seqcheck report drive.dseq --out page.html"""
_SERVE = """\
Serve an editor: speak the Language Server Protocol 3.17 on standard input and output. Mistakes of reading are said at
once, findings after a proof; hover, definition and completion are answered. The exit code is the protocol's."""
_COMPARE = """\
What the change from OLD to NEW comes to, for a review: hazards, findings, margins, overlaps, what can be entered, and
what is said differently. One of them may be '-', standard input: 'git show HEAD:x.dseq | seqcheck compare - x.dseq'.
Files that it names with 'use' are looked for from the folder you are in, as they are now."""
_COMPARED = """\
exit codes: 0 nothing became worse; 1 a hazard is possible in NEW that was not shown to be in OLD, or a check is broken
that was not, and no waiver lets it pass; 2 the input or the call is wrong, nothing was compared; 3 a hazard of NEW is
undecided within the limits given; 4 the program itself is at fault. Code 0 does not say that NEW is proven: what was
possible before and still is, is no change. A smaller margin or a longer overlap alone is told, and is code 0 too."""
_TIDY = """\
Line up the columns of each file, its spacing and its blank lines. Comments, names and meaning stay; a file with
mistakes is left as it is (exit code 2). A folder means every *.dseq in it; '-' goes from standard input to standard
output. Example: seqcheck tidy --check drives"""
_TIDY_EXITS = """\
exit codes: 0 all files are tidy now; 1 --check found one that is not; 2 the input or the call is wrong, or a file
cannot be written; 4 the program itself is at fault. Where several files differ the worst counts, in the order 4, 2, 1,
0."""
_START = """\
Print a first file for a drive of this KIND, proven as it stands: put in your own circuit, data-sheet values and moves.
Without KIND, list the kinds. Example: seqcheck start h-bridge > pump.dseq && seqcheck lint pump.dseq"""
_EXITS = """\
exit codes: 0 everything asked is proven; 1 a hazard is possible, or there is another finding that is not waived; 2 the
input or the call is wrong, nothing was judged; 3 undecided within the limits given, never to be taken for proven; 4 the
program itself is at fault. Where several files differ the worst counts, in the order 4, 2, 1, 3, 0."""


@dataclass(frozen=True, slots=True)
class Limits:
    """When to give a proof up: after so many zones, or so many seconds for one file."""

    zones: int | None
    seconds: float | None


@dataclass(frozen=True, slots=True)
class Answering:
    """How to answer: in what form, with colour where the form has any, and the number of the run that a dump shows."""

    form: str
    colour: bool
    run: int | None


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line; the exit code. No input makes it raise."""
    gc.disable()  # a short-lived process: collecting would cost more than it frees
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")
    try:
        code = _run(list(sys.argv[1:] if arguments is None else arguments))
        sys.stdout.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return FOUND  # whoever stopped reading has not seen a proof
    except KeyboardInterrupt:
        _complain("stopped by the keyboard; nothing is proven")
        return UNDECIDED
    except Exception as fault:
        _complain(f"internal error, please report it: {type(fault).__name__}: {fault}")
        return FAULT
    return code


def _complain(text: str) -> None:
    print(f"seqcheck: {text}", file=sys.stderr)


class _Parser(argparse.ArgumentParser):
    """Wrong calls in our own words, on one line."""

    def error(self, message: str) -> Never:
        _complain(f"error: {message}; '{self.prog} --help' shows the call")
        raise SystemExit(WRONG)


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(
        prog="seqcheck",
        description="Prove that a drive sequence never shorts a leg of its power stage.",
        epilog=_EXITS,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"seqcheck {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    lint = commands.add_parser("lint", help="prove files", description=_LINT, epilog=_EXITS, allow_abbrev=False)
    lint.add_argument("paths", nargs="*", metavar="PATH", default=[])
    forms = f"{FORMS[0]} (the default), {_or(FORMS[1:])}"
    lint.add_argument("--as", dest="form", metavar="FORM", default=FORMS[0], help=forms)
    lint.add_argument("--run", metavar="N", help="with --as vcd: the N-th counterexample of the screen, not the worst")
    lint.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    lint.add_argument("--only", metavar="CHECK", action="append", default=[], help="besides hazards say only this")
    _limited(lint)
    lint.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")
    lint.add_argument("--changed", action="store_true", help="PATHs are what a change touches: add all that 'use' them")
    lint.add_argument("--with-fault", action="store_true", help="also tell what any one thing that is stuck brings")
    lint.add_argument("--evidence", metavar="DIR", help="write FILE.json for each file into this folder, for audit")
    rows = commands.add_parser("rows", help="read the table back", description=_ROWS, epilog=_EXITS, allow_abbrev=False)
    rows.add_argument("file", metavar="FILE")
    rows.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    rows.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")
    drawing = commands.add_parser("draw", help="draw", description=draw.ABOUT, epilog=_EXITS, allow_abbrev=False)
    draw.arguments(drawing)
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
    compare.add_argument("--as", dest="form", metavar="FORM", default="screen", help="screen (the default) or lines")
    compare.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    compare.add_argument("--most-zones", metavar="N", help="give a proof up after N zones")
    compare.add_argument("--give-up-after", metavar="DURATION", help="give up after this time, such as '30 s'")
    compare.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")
    margins = commands.add_parser(
        "margins", help="how much dead time is left", description=_MARGINS, epilog=_EXITS, allow_abbrev=False
    )
    margins.add_argument("file", metavar="FILE")
    margins.add_argument("--out", metavar="FILE", help="write the answer to FILE instead of standard output")
    margins.add_argument("--most-zones", metavar="N", help="give a search up after N zones")
    margins.add_argument("--give-up-after", metavar="DURATION", help="give up after this time, such as '30 s'")
    margins.add_argument("--color", metavar="WHEN", default="auto", help="auto (the default), always or never")
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
    return parser


def _limited(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--most-zones", metavar="N", help="give a proof up after N zones")
    parser.add_argument("--give-up-after", metavar="DURATION", help="give a file up after this time, such as '30 s'")


def _run(arguments: list[str]) -> int:
    try:
        asked = _parser().parse_args(arguments)
        if asked.command == "audit":
            return _audit(asked.file, asked.evidence)
        if asked.command == "serve":
            from seqcheck.serving.command import serve

            return serve(_count("--most-zones", asked.most_zones), _seconds(asked.give_up_after))
        if asked.command == "rows":
            return _rows(asked.file, _one_of("--color", asked.color, ("auto", "always", "never")), asked.out)
        if asked.command == "draw":
            return _draw(asked)
        if asked.command == "report":
            return _report(asked, shlex.join(["seqcheck", *arguments]))
        if asked.command == "tidy":
            return _tidy(asked.files, asked.check)
        if asked.command == "start":
            return _start(asked.kind)
        if asked.command == "compare":
            return _compare(asked)
        limits = Limits(_count("--most-zones", asked.most_zones), _seconds(asked.give_up_after))
        colour = _one_of("--color", asked.color, ("auto", "always", "never"))
        if asked.command == "margins":
            return _margins(asked.file, limits, colour, asked.out)
        form = _one_of("--as", asked.form, FORMS)
        if asked.with_fault and form not in ("screen", "lines"):
            _wrong(f"--with-fault makes a table for '--as screen' or '--as lines'; '{form}' has no place for it")
        only = frozenset(_check(name) for name in asked.only)
        answering = Answering(form, _wants_colour(colour, sys.stdout) and not asked.out, _count("--run", asked.run))
        files = _changed(asked.paths) if asked.changed else list(dict.fromkeys(_files(asked.paths or ["."])))
        _one_run(answering, files)
        shelf = None if asked.evidence is None else _Shelf(asked.evidence, files)
    except SystemExit as stop:
        return int(stop.code or 0)
    answers, code = _lint(files, only, limits, shelf, asked.with_fault)
    try:
        text = _written(answers, answering)
    except SystemExit as stop:
        return _worse(code, int(stop.code or 0))
    return code if text is None else _worse(code, _deliver(text, asked.out))


def _wrong(text: str) -> Never:
    _complain(f"error: {text}")
    raise SystemExit(WRONG)


def _one_of(option: str, value: str, known: tuple[str, ...]) -> str:
    if value not in known:
        _wrong(f"{option} cannot be '{value}'; {nearest(value, known)}")
    return value


def _check(name: str) -> Check:
    known = {check.value: check for check in Check}
    if name in known:
        return known[name]
    _wrong(f"--only {name}: there is no such check; {nearest(name, known)}")


def _or(names: Sequence[str]) -> str:
    return f"{', '.join(names[:-1])} or {names[-1]}"


def _one_run(answering: Answering, files: list[str]) -> None:
    """Refuse what a dump of one run cannot do."""
    if answering.run is not None and answering.form != "vcd":
        _wrong("--run says which run '--as vcd' dumps; it needs that form")
    if answering.form == "vcd" and len(files) > 1:
        _wrong(f"--as vcd dumps one run of one file, but here are {len(files)} files; name one of them")


def _count(option: str, text: str | None) -> int | None:
    if text is None:
        return None
    if not re.fullmatch(r"[0-9]{1,15}", text) or int(text) == 0:
        _wrong(f"{option} must be a whole number above 0, not '{text}'")
    return int(text)


def _seconds(text: str | None) -> float | None:
    if text is None:
        return None
    match = re.fullmatch(r"([0-9]{1,15}(?:\.[0-9]{1,15})?) *([a-zµμ]+)", text)
    if match is None or match[2] not in PICOSECONDS or Fraction(match[1]) == 0:
        _wrong(f"--give-up-after must be a time above 0 with its unit, such as '30 s', not '{text}'")
    return float(Fraction(match[1]) * PICOSECONDS[match[2]] / PICOSECONDS["s"])


def _files(paths: list[str]) -> Iterator[str]:
    for path in paths:
        if path == _STDIN or not os.path.isdir(path):
            yield path
            continue
        found = sorted(name for name in os.listdir(path) if name.endswith(".dseq"))
        if not found:
            _wrong(f"there is no *.dseq file in the folder '{printable(path)}'; name a file or another folder")
        yield from (name if path == "." else os.path.join(path, name) for name in found)


def _changed(paths: list[str]) -> list[str]:
    from seqcheck.commands.users import concerned

    if any(path == _STDIN or os.path.isdir(path) for path in paths):
        _wrong("--changed needs the files that a change touches, not a folder or standard input")
    return concerned(paths)


# Proving


class _Shelf:
    """The folder that takes up evidence; refuses two files whose evidence would have one name."""

    def __init__(self, folder: str, files: list[str]) -> None:
        self._folder = folder
        names = [self._path(file) for file in files]
        twice = next((file for file, name in zip(files, names, strict=True) if names.count(name) > 1), None)
        if twice is not None:
            name = printable(os.path.basename(twice))
            _wrong(f"--evidence: two files are named '{name}'; give each a folder of its own")
        try:
            os.makedirs(folder, exist_ok=True)
        except (OSError, ValueError) as refusal:
            why = getattr(refusal, "strerror", None) or refusal
            _wrong(f"--evidence: there can be no folder '{printable(folder)}': {why}")

    def _path(self, file: str) -> str:
        name = "standard-input" if file == _STDIN else os.path.basename(file)
        return os.path.join(self._folder, f"{name}.json")

    def put(self, file: str, drive: Drive, kept: "list[Kept]") -> int:
        """Write the evidence of one file; the exit code."""
        from seqcheck.evidence.certificate import written

        return _deliver(written(drive, kept), self._path(file))


def _lint(
    files: list[str], only: frozenset[Check], limits: Limits, shelf: _Shelf | None, with_fault: bool
) -> tuple[list[Answer], int]:
    answers, code = [], PROVEN
    for file in files:
        answer, own = _one_file(file, only, limits, shelf)
        code = _worse(code, own)
        if with_fault and isinstance(answer, Outcome):
            answer = _with_faults(answer, limits)
        answers.append(answer)
    return answers, code


def _one_file(
    file: str, only: frozenset[Check], limits: Limits, shelf: _Shelf | None
) -> tuple[Answer, int]:
    from seqcheck.checking import check
    from seqcheck.confirming import Fault
    from seqcheck.language import read_any

    try:
        drive = read_any(_text(file), file, _text)
        if isinstance(drive, Library):
            return drive, PROVEN
        kept: list[Kept] | None = None if shelf is None else []
        outcome = check(drive, file, only, _observer(limits), kept)
    except Problems as problems:
        return Unread(file, problems.found), _mistaken(problems)
    except Fault as fault:
        _complain(f"{printable(file)}: internal error, please report it with the file: {fault}")
        return Failed(file, str(fault)), FAULT
    stored = PROVEN if shelf is None or kept is None else shelf.put(file, drive, kept)
    return outcome, _worse(stored, _exit_of(outcome))


def _with_faults(outcome: Outcome, limits: Limits) -> Outcome:
    from seqcheck.failing import with_faults

    return with_faults(outcome, _observer(limits))


def _mistaken(problems: Problems) -> int:
    for problem in problems.found:
        print(problem.line(), file=sys.stderr)
    return WRONG


def _audit(file: str, evidence: str) -> int:
    """Check the evidence of a file; the exit code of the verdicts that it bears out."""
    from seqcheck.evidence.audit import NotProven, audit
    from seqcheck.evidence.certificate import NoEvidence
    from seqcheck.evidence.certificate import read as read_evidence
    from seqcheck.language import read

    try:
        drive = read(_text(file), file, _text)
        found = audit(drive, read_evidence(_text(evidence)))
    except Problems as problems:
        return _mistaken(problems)
    except NoEvidence as why:
        _complain(f"error: {printable(evidence)} cannot be used for {printable(file)}: {why}")
        return WRONG
    except NotProven as why:
        _complain(f"{printable(evidence)} does not prove what it says of {printable(file)}: {why}")
        return FAULT
    print(f"{printable(file)}: {_borne_out(found)}{_not_about(drive)}")
    if found.unsafe:
        return FOUND
    return UNDECIDED if found.undecided else PROVEN


def _borne_out(found: "Audited") -> str:
    late = f" ({found.however_late} of them however late the firmware is)" if found.however_late else ""
    parts = [f"{found.safe} {'hazard' if found.safe == 1 else 'hazards'} safe{late}"] if found.safe else []
    parts += [f"{found.unsafe} unsafe, with their runs"] if found.unsafe else []
    parts += [f"{found.undecided} without evidence"] if found.undecided else []
    return f"evidence checked: {'; '.join(parts) or 'there is no hazard'}"


def _not_about(drive: Drive) -> str:
    """What evidence says nothing of: rules about margins and lengths, which only a new proof can bear out."""
    lines = [str(rule.place.line) for rule in drive.rules if not isinstance(rule, NeverRule)]
    if not lines:
        return ""
    return f"; it says nothing of the {'rule in line' if len(lines) == 1 else 'rules in lines'} {', '.join(lines)}"


def _rows(file: str, colour: str, out: str | None) -> int:
    """Read the table of a file back; the exit code."""
    from seqcheck.circuit.reading import read_back
    from seqcheck.language import read
    from seqcheck.reports import screen, table

    try:
        found = read_back(read(_text(file), file, _text), file)
    except Problems as problems:
        return _mistaken(problems)
    report = table.report(found)
    painted = _wants_colour(colour, sys.stdout) and not out
    code = _deliver(screen.coloured(report) if painted else screen.plain(report), out)
    return _worse(code, FOUND if table.shorting(found) or any(row.amiss for row in found.rows) else PROVEN)


def _draw(asked: argparse.Namespace) -> int:
    """Draw a picture of a file; the exit code of its verdict."""
    form = _one_of("--as", asked.form, draw.FORMS)
    if asked.trace in draw.RUNLESS:
        _wrong(f"--trace: a finding of '{asked.trace}' is no run; those of {_or(draw.TRACED)} are")
    if asked.trace is not None:
        _one_of("--trace", asked.trace, draw.TRACED)
    if asked.trace is not None and (asked.modes or form == "mermaid"):
        _wrong(f"--trace draws a timing diagram; it does not go with {'--modes' if asked.modes else '--as mermaid'}")
    limits = Limits(_count("--most-zones", asked.most_zones), _seconds(asked.give_up_after))
    wanted = draw.Wanted(asked.trace, _count("--run", asked.run), form)
    outcome, code = _one_file(asked.file, frozenset(), limits, None)
    if isinstance(outcome, Library):
        _wrong(f"{printable(asked.file)} only serves 'use'; it has no modes")
    if not isinstance(outcome, Outcome):
        return code
    try:
        text = draw.drawn(outcome, wanted)
    except Problems as problems:
        return _mistaken(problems)
    except ValueError as why:
        _wrong(str(why))
    return _worse(code, _deliver(text, asked.out))


def _report(asked: argparse.Namespace, call: str) -> int:
    """Write the page about a file; the exit code of its verdict."""
    from seqcheck.commands.review import page
    from seqcheck.confirming import Fault

    limits = Limits(_count("--most-zones", asked.most_zones), _seconds(asked.give_up_after))
    outcome, code = _one_file(asked.file, frozenset(), limits, None)
    if isinstance(outcome, Library):
        _wrong(f"{printable(asked.file)} only serves 'use'; there is nothing to review")
    if not isinstance(outcome, Outcome):
        return code
    try:
        text = page(outcome, printable(call), _observer(limits))
    except Problems as problems:
        return _mistaken(problems)
    except Fault as fault:
        _complain(f"{printable(asked.file)}: internal error, please report it with the file: {fault}")
        return FAULT
    return _worse(code, _deliver(text, asked.out))


def _compare(asked: argparse.Namespace) -> int:
    """Hold two files against each other; the exit code."""
    form = _one_of("--as", asked.form, ("screen", "lines"))
    colour = _one_of("--color", asked.color, ("auto", "always", "never"))
    observer = _observer(Limits(_count("--most-zones", asked.most_zones), _seconds(asked.give_up_after)))
    if asked.old == asked.new == _STDIN:
        _wrong("only one of two files can come from standard input; name the other")
    from seqcheck.commands.compare import run
    from seqcheck.confirming import Fault

    painted = _wants_colour(colour, sys.stdout) and not asked.out
    try:
        text, code = run((asked.old, asked.new), _text, observer, form, painted)
    except Problems as problems:
        return _mistaken(problems)
    except Fault as fault:
        _complain(f"internal error, please report it with both files: {fault}")
        return FAULT
    return _worse(code, _deliver(text, asked.out))


def _margins(file: str, limits: Limits, colour: str, out: str | None) -> int:
    """Tell the margins of a file; the exit code."""
    from seqcheck.confirming import Fault
    from seqcheck.language import read
    from seqcheck.margins import budget
    from seqcheck.reports import budget as wording
    from seqcheck.reports import screen

    try:
        found = budget(read(_text(file), file, _text), file, _observer(limits))
    except Problems as problems:
        return _mistaken(problems)
    except Fault as fault:
        _complain(f"{printable(file)}: internal error, please report it with the file: {fault}")
        return FAULT
    report = wording.report(found)
    painted = _wants_colour(colour, sys.stdout) and not out
    code = _deliver(screen.coloured(report) if painted else screen.plain(report), out)
    return _worse(code, FOUND if found.unsafe else UNDECIDED if found.undecided else PROVEN)


def _tidy(paths: list[str], only_say: bool) -> int:
    """Put files in order; the exit code."""
    from seqcheck.commands.tidy import World, run

    def write(text: str, file: str) -> int:
        if file != _STDIN:
            return _deliver(text, file)
        if hasattr(sys.stdout, "reconfigure"):
            sys.stdout.reconfigure(encoding="utf-8", newline="")  # what came in goes out, whatever the terminal speaks
        return _deliver(text, None)

    return run(list(dict.fromkeys(_files(paths))), only_say, World(_data, _text, write, _mistaken, _complain))


def _start(kind: str | None) -> int:
    """Print the first file of a kind, or the kinds; the exit code."""
    from seqcheck.commands.start import first_file, listing

    try:
        return _deliver(listing() if kind is None else first_file(kind), None)
    except KeyError as unknown:
        _wrong(unknown.args[0])


def _text(file: str) -> str:
    from seqcheck.language import decode

    return decode(_data(file), file)


def _data(file: str) -> bytes:
    try:
        return sys.stdin.buffer.read() if file == _STDIN else Path(file).read_bytes()
    except (OSError, ValueError) as refusal:
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise Problems([_unreadable(file, why)]) from refusal


def _unreadable(file: str, why: str) -> Problem:
    return Problem(Place(file, 1, 1, 1, 1), "cannot-read", f"cannot read this file: {why}", "check its name and rights")


def _observer(limits: Limits) -> Callable[[int], None]:
    from seqcheck.proving.search import LimitReached

    end = None if limits.seconds is None else time.monotonic() + limits.seconds

    def observe(zones: int) -> None:
        if limits.zones is not None and zones > limits.zones:
            raise LimitReached(f"{limits.zones} zones (--most-zones)")
        if end is not None and zones % 64 == 0 and time.monotonic() > end:
            raise LimitReached(f"{limits.seconds:g} s (--give-up-after)")

    return observe


def _exit_of(outcome: Outcome) -> int:
    from seqcheck.reports.waived import reason

    found: list[Unsafe | Finding] = [one for one in outcome.verdicts if isinstance(one, Unsafe)]
    found += (one for one in outcome.findings if one.check not in WARNINGS)
    if any(reason(outcome.drive, one) is None for one in found):
        return FOUND
    return UNDECIDED if any(isinstance(one, Undecided) for one in outcome.verdicts) else PROVEN


# Answering


def _written(answers: list[Answer], answering: Answering) -> str | None:
    """The answer as a text; None where nothing was judged and the form has no word for that."""
    judged = [one for one in answers if isinstance(one, Outcome | Library)]
    if not answers and answering.form in ("screen", "vcd"):
        return "nothing to prove: the change touches no *.dseq file and none that one uses\n"
    if not judged and answering.form not in _WHATEVER_COMES:
        return None
    match answering.form:
        case "lines":
            from seqcheck.reports import lines

            return lines.report(judged)
        case "annotations":
            from seqcheck.reports import annotations

            return annotations.report(answers, _repository())
        case "json":
            from seqcheck.reports import document

            return document.report(answers)
        case "sarif":
            from seqcheck.reports import sarif

            return sarif.report(answers, _repository())
        case "vcd":
            return _dump(answers[0], answering.run)
    from seqcheck.reports import screen

    report = screen.report(judged)
    return screen.coloured(report) if answering.colour else screen.plain(report)


def _dump(outcome: Answer, run: int | None) -> str:
    from seqcheck.reports import vcd

    if not isinstance(outcome, Outcome):
        _wrong("--as vcd: a file that only serves 'use' has no run")
    try:
        return vcd.report(outcome, run)
    except ValueError as why:
        _wrong(f"--run {run}: {why} of {printable(outcome.file)}")


def _repository() -> "Repository":
    """The repository that we are in: the nearest folder upwards with a `.git`, else the folder that we are in."""
    from seqcheck.reports.repository import Repository

    here = Path.cwd()
    top = next((one for one in (here, *here.parents) if (one / ".git").exists()), here)
    return Repository(str(here), str(top))


def _wants_colour(asked: str, stream: TextIO) -> bool:
    """--color above the environment: NO_COLOR and FORCE_COLOR count where they are not empty."""
    if asked != "auto":
        return asked == "always"
    if os.environ.get("NO_COLOR"):
        return False
    if os.environ.get("FORCE_COLOR"):
        return True
    return stream.isatty() and os.environ.get("TERM") != "dumb"


def _deliver(text: str, out: str | None) -> int:
    try:
        if out is None:
            sys.stdout.write(text)
            sys.stdout.flush()
        else:
            _write(Path(out), text)
    except BrokenPipeError:
        raise
    except (OSError, ValueError) as refusal:
        name = "the answer" if out is None else f"'{printable(out)}'"
        _complain(f"error: cannot write {name}: {getattr(refusal, 'strerror', None) or refusal}")
        return WRONG
    return PROVEN


def _write(out: Path, text: str) -> None:
    """Write a file whole or not at all, whatever stops it; what is no file, as a pipe or device, is written to.

    Line ends are written as they are; a file that was there keeps its rights, and is let alone if they forbid writing.
    """
    if not out.name or out.is_dir():
        raise IsADirectoryError(errno.EISDIR, "it is a folder")
    if out.exists() and not out.is_file():
        out.write_text(text, encoding="utf-8", errors="backslashreplace")
        return
    target = Path(os.path.realpath(out))
    draft = target.parent / f".{target.name}.{os.getpid()}.part"
    try:
        rights = stat.S_IMODE(target.stat().st_mode) if target.exists() else None
        if rights is not None:
            if not os.access(target, os.W_OK):
                raise PermissionError(errno.EACCES, "it is read-only")
            draft.touch(0o600)
        draft.write_text(text, encoding="utf-8", errors="backslashreplace", newline="")
        if rights is not None:
            draft.chmod(rights)
        draft.replace(target)
    finally:
        with contextlib.suppress(OSError, ValueError):
            draft.unlink()

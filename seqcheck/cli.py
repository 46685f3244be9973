"""The commands and their exit codes."""

import argparse
import contextlib
import gc
import os
import shlex
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING

from seqcheck.arguments import (
    COMPARE_FORMS,
    FORMS,
    MOST_JOBS,
    SHELLS,
    at_most,
    check_named,
    complain,
    count,
    limits_of,
    one_of,
    one_or_other,
    parser,
    tell,
    wrong,
)
from seqcheck.delivering import Answering, answer_text, deliver, spare, wants_colour
from seqcheck.drive import Drive, Library, NeverRule, ToleratesRule
from seqcheck.exits import FAULT, FOUND, PROVEN, UNDECIDED, WRONG
from seqcheck.exits import worse as _worse
from seqcheck.limits import Limits
from seqcheck.limits import observer as _observer
from seqcheck.messages import Problems
from seqcheck.opening import STDIN, data_of, files_of, reason_of, text_of, used_text
from seqcheck.source import printable
from seqcheck.streams import let_go, ready_streams
from seqcheck.verdict import WARNINGS, Answer, Failed, Finding, Outcome, Undecided, Unread, Unsafe
from seqcheck.work.lint import judged_by
from seqcheck.work.pieces import Call, Hands, Judged, NoHands, judged

if TYPE_CHECKING:
    from seqcheck.checking import Kept
    from seqcheck.evidence.audit import Audited


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command line; the exit code. No input makes it raise."""
    gc.disable()  # a short-lived process: collecting would cost more than it frees
    ready_streams()
    try:
        code = _run(list(sys.argv[1:] if arguments is None else arguments))
        sys.stdout.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return FOUND  # whoever stopped reading has not seen a proof
    except KeyboardInterrupt:
        complain("stopped by the keyboard; nothing is proven")
        return UNDECIDED
    except OSError as refusal:  # of a stream or a folder; files have their own words
        complain(f"error: {reason_of(refusal)}")
        let_go()
        return WRONG
    except Exception as fault:
        complain(f"internal error, please report it: {type(fault).__name__}: {fault}")
        return FAULT
    return code


def _run(arguments: list[str]) -> int:
    try:
        asked = parser().parse_args(arguments)
        spare(getattr(asked, "out", None), _inputs(asked))
        if asked.command == "audit":
            return _audit(asked.file, asked.evidence)
        if asked.command == "serve":
            from seqcheck.serving.command import serve

            limits = limits_of(asked)
            return serve(limits.zones, limits.seconds)
        if asked.command == "rows":
            return _rows(asked.file, one_of("--color", asked.color, ("auto", "always", "never")), asked.out)
        if asked.command == "draw":
            return _draw(asked)
        if asked.command == "report":
            return _report(asked, shlex.join(["seqcheck", *arguments]))
        if asked.command == "tidy":
            return _tidy(asked.files, asked.check)
        if asked.command == "start":
            return _start(asked.kind)
        if asked.command == "completion":
            from seqcheck.commands.completion import script

            shell = one_of("SHELL", asked.shell, SHELLS)
            return deliver(script(shell, parser(), FORMS, COMPARE_FORMS), None)
        if asked.command == "compare":
            return _compare(asked)
        if asked.command == "size":
            return _size(asked)
        limits = limits_of(asked)
        colour = one_of("--color", asked.color, ("auto", "always", "never"))
        if asked.command == "margins":
            return _margins(asked.file, limits, asked.form, colour, asked.out)
        form = one_of("--as", asked.form, FORMS)
        if asked.with_fault and form not in ("screen", "lines", "json"):
            wrong(f"--with-fault goes with '--as screen', 'lines' or 'json'; '{form}' has no place for what it tells")
        only = frozenset(check_named(name) for name in asked.only)
        answering = Answering(form, wants_colour(colour, sys.stdout) and not asked.out, count("--run", asked.run))
        files = _changed(asked.paths) if asked.changed else list(dict.fromkeys(files_of(asked.paths or ["."])))
        _one_run(answering, files)
        hands = Hands(at_most(MOST_JOBS, "--jobs", count("--jobs", asked.jobs) or 1), asked.scheduler)
        if asked.jobs and asked.scheduler is not None:
            wrong("--jobs is about processes of this machine, --scheduler about other machines; choose one of them")
        shelf = None if asked.evidence is None else _Shelf(asked.evidence, files)
        call = Call(only, limits, shelf is not None, asked.with_fault, asked.fresh)
        answers, code = _lint(files, call, shelf, hands)
    except SystemExit as stop:
        return int(stop.code or 0)
    try:
        text = answer_text(answers, answering)
    except SystemExit as stop:
        return _worse(code, int(stop.code or 0))
    return code if text is None else _worse(code, deliver(text, asked.out))


def _inputs(asked: argparse.Namespace) -> list[str]:
    """The files that a call names to be read."""
    given = vars(asked)
    return [*given.get("paths", ()), *(given[name] for name in ("file", "old", "new") if name in given)]


def _one_run(answering: Answering, files: list[str]) -> None:
    """Refuse what a dump of one run cannot do."""
    if answering.run is not None and answering.form != "vcd":
        wrong("--run says which run '--as vcd' dumps; it needs that form")
    if answering.form == "vcd" and len(files) > 1:
        wrong(f"--as vcd dumps one run of one file, but here are {len(files)} files; name one of them")


def _changed(paths: list[str]) -> list[str]:
    from seqcheck.commands.users import concerned

    if any(path == STDIN or os.path.isdir(path) for path in paths):
        wrong("--changed needs the files that a change touches, not a folder or standard input")
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
            wrong(f"--evidence: two files are named '{name}'; give each a folder of its own")
        try:
            os.makedirs(folder, exist_ok=True)
        except (OSError, ValueError) as refusal:
            wrong(f"--evidence: there can be no folder '{printable(folder)}': {reason_of(refusal)}")

    def _path(self, file: str) -> str:
        name = "standard-input" if file == STDIN else os.path.basename(file)
        return os.path.join(self._folder, f"{name}.json")

    def put(self, file: str, drive: Drive, kept: "list[Kept]") -> int:
        """Write the evidence of one file; the exit code."""
        from seqcheck.evidence.certificate import written

        return deliver(written(drive, kept), self._path(file))


def _lint(files: list[str], call: Call, shelf: _Shelf | None, hands: Hands) -> tuple[list[Answer], int]:
    answers, code = [], PROVEN
    try:
        with contextlib.closing(judged_by(hands, files, call, sys.stderr)) as every:
            for file, one in zip(files, every, strict=True):
                answers.append(one.answer)
                code = _worse(code, _told(file, one, shelf))
    except NoHands as why:
        complain(f"error: {why}")
        raise SystemExit(why.code) from why
    return answers, code


def _one_file(asked: argparse.Namespace, limits: Limits) -> tuple[Answer, int]:
    one = judged(asked.file, Call(limits=limits, fresh=asked.fresh), None)
    return one.answer, _told(asked.file, one, None)


def _told(file: str, one: Judged, shelf: _Shelf | None) -> int:
    """Say what there is to complain of in a file, put its evidence away; its exit code."""
    match one.answer:
        case Unread(_, found):
            return _mistaken(Problems(found))
        case Failed():
            complain(f"{printable(file)}: {one.complaint}")
            return FAULT
        case Outcome() as outcome:
            stored = PROVEN if shelf is None else shelf.put(file, outcome.drive, list(one.kept))
            return _worse(stored, _exit_of(outcome))
    return PROVEN


def _mistaken(problems: Problems) -> int:
    for problem in problems.found:
        tell(problem.line())
    return WRONG


def _audit(file: str, evidence: str) -> int:
    """Check the evidence of a file; the exit code of the verdicts that it bears out."""
    from seqcheck.evidence.audit import NotProven, audit
    from seqcheck.evidence.certificate import NoEvidence
    from seqcheck.evidence.certificate import read as read_evidence
    from seqcheck.language import read

    try:
        drive = read(text_of(file), file, used_text)
        found = audit(drive, read_evidence(text_of(evidence)))
    except Problems as problems:
        return _mistaken(problems)
    except NoEvidence as why:
        complain(f"error: {printable(evidence)} cannot be used for {printable(file)}: {why}")
        return WRONG
    except NotProven as why:
        complain(f"{printable(evidence)} does not prove what it says of {printable(file)}: {why}")
        return FAULT
    print(f"{printable(file)}: {_borne_out(found, drive)}{_not_about(drive)}")
    if found.unsafe:
        return FOUND
    return UNDECIDED if found.undecided else PROVEN


def _borne_out(found: "Audited", drive: Drive) -> str:
    asked = "hazards" if all(isinstance(rule, NeverRule) for rule in drive.rules) else "hazards, lengths and margins"
    late = f" ({found.however_late} of them however late the firmware is)" if found.however_late else ""
    parts = [f"{found.safe} {'hazard' if found.safe == 1 else asked} safe{late}"] if found.safe else []
    parts += [f"{found.unsafe} unsafe, with their runs"] if found.unsafe else []
    parts += [f"{found.undecided} without evidence"] if found.undecided else []
    return f"evidence checked: {'; '.join(parts) or 'there is no hazard'}"


def _not_about(drive: Drive) -> str:
    """What evidence says nothing of: rules about single faults, which only a new proof can bear out."""
    lines = [str(rule.place.line) for rule in drive.rules if isinstance(rule, ToleratesRule)]
    if not lines:
        return ""
    return f"; it says nothing of the {'rule in line' if len(lines) == 1 else 'rules in lines'} {', '.join(lines)}"


def _rows(file: str, colour: str, out: str | None) -> int:
    """Read the table of a file back; the exit code."""
    from seqcheck.circuit.reading import read_back
    from seqcheck.language import read
    from seqcheck.reports import screen, table

    try:
        found = read_back(read(text_of(file), file, used_text), file)
    except Problems as problems:
        return _mistaken(problems)
    report = table.report(found)
    painted = wants_colour(colour, sys.stdout) and not out
    code = deliver(screen.coloured(report) if painted else screen.plain(report), out)
    return _worse(code, FOUND if table.shorting(found) or any(row.amiss for row in found.rows) else PROVEN)


def _draw(asked: argparse.Namespace) -> int:
    """Draw a picture of a file; the exit code of its verdict."""
    from seqcheck.commands import draw

    form = one_of("--as", asked.form, draw.FORMS)
    if asked.trace in draw.RUNLESS:
        wrong(f"--trace: a finding of '{asked.trace}' is no run; those of {one_or_other(draw.TRACED)} are")
    if asked.trace is not None:
        one_of("--trace", asked.trace, draw.TRACED)
    if asked.trace is not None and (asked.modes or form == "mermaid"):
        wrong(f"--trace draws a timing diagram; it does not go with {'--modes' if asked.modes else '--as mermaid'}")
    limits = limits_of(asked)
    wanted = draw.Wanted(asked.trace, count("--run", asked.run), form)
    outcome, code = _one_file(asked, limits)
    if isinstance(outcome, Library):
        wrong(f"{printable(asked.file)} only serves 'use'; it has no modes")
    if not isinstance(outcome, Outcome):
        return code
    try:
        text = draw.drawn(outcome, wanted)
    except Problems as problems:
        return _mistaken(problems)
    except ValueError as why:
        wrong(str(why))
    return _worse(code, deliver(text, asked.out))


def _report(asked: argparse.Namespace, call: str) -> int:
    """Write the page about a file; the exit code of its verdict."""
    from seqcheck.commands.review import page
    from seqcheck.confirming import Fault

    limits = limits_of(asked)
    outcome, code = _one_file(asked, limits)
    if isinstance(outcome, Library):
        wrong(f"{printable(asked.file)} only serves 'use'; there is nothing to review")
    if not isinstance(outcome, Outcome):
        return code
    try:
        text = page(outcome, printable(call), _observer(limits))
    except Problems as problems:
        return _mistaken(problems)
    except Fault as fault:
        complain(f"{printable(asked.file)}: internal error, please report it with the file: {fault}")
        return FAULT
    return _worse(code, deliver(text, asked.out))


def _compare(asked: argparse.Namespace) -> int:
    """Hold two files against each other; the exit code."""
    form = one_of("--as", asked.form, COMPARE_FORMS)
    colour = one_of("--color", asked.color, ("auto", "always", "never"))
    observer = _observer(limits_of(asked))
    if asked.old == asked.new == STDIN:
        wrong("only one of two files can come from standard input; name the other")
    from seqcheck.commands.compare import run
    from seqcheck.confirming import Fault

    painted = wants_colour(colour, sys.stdout) and not asked.out
    try:
        text, code = run((asked.old, asked.new), (text_of, used_text), observer, form, painted)
    except Problems as problems:
        return _mistaken(problems)
    except Fault as fault:
        complain(f"internal error, please report it with both files: {fault}")
        return FAULT
    return _worse(code, deliver(text, asked.out))


def _margins(file: str, limits: Limits, form: str, colour: str, out: str | None) -> int:
    """Tell the margins of a file; the exit code."""
    from seqcheck.commands.margins import FORMS as FORMS_OF_MARGINS
    from seqcheck.commands.margins import run
    from seqcheck.confirming import Fault
    from seqcheck.language import read

    one_of("--as", form, FORMS_OF_MARGINS)
    painted = wants_colour(colour, sys.stdout) and not out
    try:
        text, code = run(read(text_of(file), file, used_text), file, _observer(limits), form, painted)
    except Problems as problems:
        return _mistaken(problems)
    except Fault as fault:
        complain(f"{printable(file)}: internal error, please report it with the file: {fault}")
        return FAULT
    return _worse(code, deliver(text, out))


def _size(asked: argparse.Namespace) -> int:
    """Tell the range of a quantity; the exit code."""
    from seqcheck.commands.size import FORMS as FORMS_OF_SIZES
    from seqcheck.commands.size import Asked, WrongCall, run
    from seqcheck.confirming import Fault

    form = one_of("--as", asked.form, FORMS_OF_SIZES)
    colour = one_of("--color", asked.color, ("auto", "always", "never"))
    observer = _observer(limits_of(asked))
    painted = wants_colour(colour, sys.stdout) and not asked.out
    try:
        text, code = run(Asked(asked.file, asked.name, asked.step, form, painted), (text_of, used_text), observer)
    except Problems as problems:
        return _mistaken(problems)
    except WrongCall as why:
        wrong(str(why))
    except Fault as fault:
        complain(f"{printable(asked.file)}: internal error, please report it with the file: {fault}")
        return FAULT
    return _worse(code, deliver(text, asked.out))


def _tidy(paths: list[str], only_say: bool) -> int:
    """Put files in order; the exit code."""
    from seqcheck.commands.tidy import World, run

    def write(text: str, file: str) -> int:
        if file != STDIN:
            return deliver(text, file)
        if hasattr(sys.stdout, "reconfigure"):
            sys.stdout.reconfigure(encoding="utf-8", newline="")  # what came in goes out, whatever the terminal speaks
        return deliver(text, None)

    return run(list(dict.fromkeys(files_of(paths))), only_say, World(data_of, used_text, write, _mistaken, complain))


def _start(kind: str | None) -> int:
    """Print the first file of a kind, or the kinds; the exit code."""
    from seqcheck.commands.start import first_file, listing

    try:
        return deliver(listing() if kind is None else first_file(kind), None)
    except KeyError as unknown:
        wrong(unknown.args[0])


def _exit_of(outcome: Outcome) -> int:
    from seqcheck.reports.waived import reason

    found: list[Unsafe | Finding] = [one for one in outcome.verdicts if isinstance(one, Unsafe)]
    found += (one for one in outcome.findings if one.check not in WARNINGS)
    if any(reason(outcome.drive, one) is None for one in found):
        return FOUND
    return UNDECIDED if any(isinstance(one, Undecided) for one in outcome.verdicts) else PROVEN


# Answering



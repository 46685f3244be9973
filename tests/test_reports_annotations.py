"""The form `annotations`: workflow commands; which characters are escaped is from memory of the hosts' toolkit."""

from dataclasses import replace
from pathlib import Path

import report_cases as cases
from report_cases import outcome, waiving

from seqcheck.messages import Problem
from seqcheck.reports import annotations
from seqcheck.reports.repository import Repository
from seqcheck.source import Place
from seqcheck.verdict import Answer, Failed, Unread

TOP = Path.cwd().anchor + "repo"


def said(*answers: Answer) -> list[str]:
    return annotations.report(answers, Repository(TOP, TOP)).splitlines()


def test_everything_at_once() -> None:
    drive = waiving("ambiguous", "open_cmd", "bench")
    found = outcome(cases.OVERLAP, cases.NOT_DECIDED, findings=(cases.NO_PATH, cases.AMBIGUOUS), drive=drive)
    assert said(found) == [
        "::error file=bench.dseq,line=1,col=1,title=A hazard is undecided [undecided]::undecided, not proven: P to N"
        " through VH and VL; the limit was reached: 200000 zones",
        "::warning file=bench.dseq,line=12,col=3,title=A switch has no delays [no-path]::switch VL has no path; give it"
        " one in `paths`",
        "::notice file=bench.dseq,line=25,col=3,title=Two moves hear the same event [ambiguous]::two moves out of idle"
        " hear open_cmd; waived because: bench",
        "::error file=bench.dseq,line=27,col=3,title=Switches overlap in passing [overlap]::P can be joined to N"
        " through UH and UL, for up to 5.1 us; to cure it: make this wait at least 10.1 us (5.1 us missing at"
        " bench.dseq:29:5)",
    ]


def test_a_proven_file_is_silent() -> None:
    assert said(outcome(cases.SAFE_U)) == []


def test_what_would_break_a_command_is_escaped() -> None:
    """A text can neither end its command nor begin another one."""
    place = Place("a,b:50%\n::x.dseq", 3, 7, 3, 9)
    finding = replace(cases.NO_PATH, place=place, text="50 %\r\n::error::x")
    (line,) = said(outcome(findings=(finding,)))
    assert line.startswith("::warning file=a%2Cb%3A50%25%0A%3A%3Ax.dseq,line=3,col=7,title=")
    assert line.endswith("::50 %25\\r\\n::error::x; give it one in `paths`")


def test_files_that_were_not_judged() -> None:
    problem = Problem(Place("w.dseq", 2, 4, 2, 5), "unknown-name", "unknown part 'q'", "")
    assert said(Unread("w.dseq", (problem,)), Failed("f.dseq", "it broke")) == [
        "::error file=w.dseq,line=2,col=4,title=The file cannot be judged [wrong-input]::unknown part 'q'"
        " (unknown-name)",
        "::error file=f.dseq,line=1,col=1,title=The program failed [internal-error]::internal error, please report it"
        " with the file: it broke",
    ]

"""The contents of an outcome by what they mean, and the last word on a file."""

from collections.abc import Sequence
from enum import Enum

from seqcheck.records import dataclass
from seqcheck.reports.pieces import counted
from seqcheck.reports.waived import reason
from seqcheck.reports.wording import NOTHING
from seqcheck.verdict import WARNINGS, Check, Finding, Outcome, Safe, Undecided, Unsafe


class Standing(Enum):
    """The last word on a file."""

    UNSAFE = "UNSAFE"
    AMISS = "not in order"
    UNDECIDED = "undecided"
    PROVEN = "proven"
    NOTHING = f"with {NOTHING}"


@dataclass(frozen=True, slots=True)
class Sorted:
    """The contents of an outcome by what they mean; `waived` has what a waiver lets pass, with the reason."""

    unsafe: tuple[Unsafe, ...]
    undecided: tuple[Undecided, ...]
    safe: tuple[Safe, ...]
    findings: tuple[Finding, ...]
    warnings: tuple[Finding, ...]
    waived: tuple[tuple[Unsafe | Finding, str], ...]

    @property
    def standing(self) -> Standing:
        """The last word; what is waived does not count."""
        if self.unsafe:
            return Standing.UNSAFE
        if self.findings:
            return Standing.AMISS
        return Standing.UNDECIDED if self.undecided else Standing.PROVEN


def worst(found: Sequence[Unsafe]) -> Unsafe:
    """The counterexample for a form that shows one: a short before all else, then the longest, the first of equals."""

    def badness(one: Unsafe) -> tuple[bool, bool, int]:
        return one.check is Check.SHORT, one.overlap is None, one.overlap or 0

    return max(found, key=badness)


def are(number: int) -> str:
    """How many counterexamples there are, after `there`."""
    return f"{'is' if number == 1 else 'are'} {counted(number, 'counterexample') if number else 'no counterexamples'}"


def sorted_out(outcome: Outcome) -> Sorted:
    """The contents of an outcome, sorted, each kind in its order."""
    unsafe = tuple(one for one in outcome.verdicts if isinstance(one, Unsafe))
    found: list[Unsafe | Finding] = [*unsafe, *outcome.findings]
    reasons = [(one, reason(outcome.drive, one)) for one in found]
    counting = [one for one, why in reasons if why is None]
    findings = [one for one in counting if isinstance(one, Finding)]
    return Sorted(
        tuple(one for one in counting if isinstance(one, Unsafe)),
        tuple(one for one in outcome.verdicts if isinstance(one, Undecided)),
        tuple(one for one in outcome.verdicts if isinstance(one, Safe)),
        tuple(one for one in findings if one.check not in WARNINGS),
        tuple(one for one in findings if one.check in WARNINGS),
        tuple((one, why) for one, why in reasons if why is not None),
    )

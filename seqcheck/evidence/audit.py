"""The audit of a file's evidence: every claim is checked again from the drive, by code that proved none of them."""

from dataclasses import dataclass

from seqcheck.drive import Drive
from seqcheck.evidence.certificate import Claim, Evidence, Fields, NoEvidence
from seqcheck.evidence.cover.behaviour import Behaviour
from seqcheck.evidence.cover.check import NotCovered, check
from seqcheck.evidence.cover.openings import first_unclaimed, opens
from seqcheck.evidence.cover.reading import entries
from seqcheck.evidence.cover.scope import scope
from seqcheck.evidence.cover.shorts import TooLarge, first_uncovered, shorts
from seqcheck.evidence.digest import digest
from seqcheck.evidence.replay import NotPermitted, replay
from seqcheck.hazards import Hazard
from seqcheck.verdict import Trace


class NotProven(Exception):  # noqa: N818 - it says what evidence is, not that the program failed
    """A claim that its evidence does not bear out; the text is a sentence."""


@dataclass(frozen=True, slots=True)
class Audited:
    """How many hazards are borne out as safe, in time only or however late the firmware is, and the rest."""

    safe: int
    however_late: int
    unsafe: int
    undecided: int


def audit(drive: Drive, evidence: Evidence) -> Audited:
    """Check all claims and that they are about all shorts and open windings of the stage.

    Raises NoEvidence where the evidence is of another drive or malformed, NotProven where it does not prove what it
    says.
    """
    if evidence.digest != digest(drive):
        raise NoEvidence("it is of a file that means something else")
    _require_all_hazards(drive, evidence)
    late = [_audited(drive, claim) for claim in evidence.claims]
    proofs = [claim.proof for claim in evidence.claims]
    return Audited(
        sum(isinstance(proof, Fields) for proof in proofs),
        sum(late),
        sum(isinstance(proof, Trace) for proof in proofs),
        sum(proof is None for proof in proofs),
    )


def _require_all_hazards(drive: Drive, evidence: Evidence) -> None:
    hazards = tuple(claim.hazard for claim in evidence.claims)
    for hazard in hazards:
        names = [one.switch for one in hazard.literals]
        if not names or len(set(names)) < len(names) or not set(names) <= set(drive.columns):
            raise NoEvidence("it names switches that the file has not, or none")
        if any(one.on == bool(hazard.currents) for one in hazard.literals):
            raise NoEvidence("it is about a hazard that is no short and no open winding")
    try:
        _require_all_shorts(drive, tuple(one for one in hazards if not one.currents))
        _require_all_openings(drive, tuple(one for one in hazards if one.currents))
    except TooLarge as why:
        raise NotProven("The stage has too many ways for current to be walked one by one.") from why


def _require_all_shorts(drive: Drive, hazards: tuple[Hazard, ...]) -> None:
    missing = first_uncovered(drive.stage, hazards)
    if missing is not None:
        raise NotProven(f"Nothing is said of the short through {' and '.join(sorted(missing.switches))}.")
    for hazard in hazards:
        if not shorts(drive.stage, hazard):
            raise NotProven(f"{_named(hazard)} together short nothing.")


def _require_all_openings(drive: Drive, hazards: tuple[Hazard, ...]) -> None:
    missing = first_unclaimed(drive.stage, hazards)
    if missing is not None and not missing.switches:
        raise NotProven("No current can flow through a winding that must flow.")
    if missing is not None:
        which = " and ".join(sorted(missing.switches))
        raise NotProven(f"Nothing is said of the winding that is open while none of {which} conducts.")
    for hazard in hazards:
        if not opens(drive.stage, hazard):
            raise NotProven(f"{_named(hazard)} together do not open what is said.")


def _audited(drive: Drive, claim: Claim) -> bool:
    """One claim; whether it holds however late the firmware is."""
    if claim.proof is None:
        return False
    if isinstance(claim.proof, Trace):
        try:
            replay(drive, claim.proof)
        except NotPermitted as why:
            raise NotProven(f"The run that shows {_named(claim.hazard)} does not replay. {why}") from why
        return False
    late = claim.proof.flag("however late")
    looking = scope(drive, claim.hazard, not late)
    try:
        check(Behaviour(looking), entries(claim.proof, looking))
    except NotCovered as why:
        raise NotProven(f"That {_named(claim.hazard)} never meet is not proven. {why}") from why
    return late


def _named(hazard: Hazard) -> str:
    return " and ".join(map(str, hazard.literals))

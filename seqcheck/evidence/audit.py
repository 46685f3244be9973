"""The audit of a file's evidence: every claim is checked again from the drive, by code that proved none of them."""

from dataclasses import dataclass

from seqcheck.drive import Drive, NeverRule
from seqcheck.evidence.certificate import Claim, Cover, Evidence, NoEvidence, Potentials
from seqcheck.evidence.cover.apart import Ground, require_apart
from seqcheck.evidence.cover.behaviour import Behaviour
from seqcheck.evidence.cover.check import NotCovered, check
from seqcheck.evidence.cover.openings import first_unclaimed, opens
from seqcheck.evidence.cover.reading import entries, points, stand
from seqcheck.evidence.cover.scope import Scope, scope
from seqcheck.evidence.cover.shorts import TooLarge, first_uncovered, shorts
from seqcheck.evidence.cover.stand import Firmware, Stand
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
    """Check all claims and that they are about all shorts and open windings of the stage, and all `never` rules.

    Margins, the mode graph and what rows mean are no part of evidence.

    Raises NoEvidence where the evidence is of another drive or malformed, NotProven where it does not prove what it
    says.
    """
    if evidence.digest != digest(drive):
        raise NoEvidence("it is of a file that means something else")
    _require_all_hazards(drive, evidence)
    auditor = _Auditor(drive, evidence)
    late = [auditor.holds_however_late(claim) for claim in evidence.claims]
    proofs = [claim.proof for claim in evidence.claims]
    return Audited(
        sum(isinstance(proof, Cover | Potentials) for proof in proofs),
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
    built_in = tuple(one for one in hazards if not _is_of_a_rule(drive, one))
    if any(one.on == bool(hazard.currents) for hazard in built_in for one in hazard.literals):
        raise NoEvidence("it is about a hazard that is no short, no open winding and in no rule")
    _require_all_rules(drive, hazards)
    try:
        _require_all_shorts(drive, tuple(one for one in built_in if not one.currents))
        _require_all_openings(drive, tuple(one for one in built_in if one.currents))
    except TooLarge as why:
        raise NotProven("The stage has too many ways for current to be walked one by one.") from why


def _is_of_a_rule(drive: Drive, hazard: Hazard) -> bool:
    """Whether a `never` rule of the drive is about just these literals, and the hazard about nothing else."""
    if hazard.joins or hazard.needs or hazard.currents:
        return False
    return {(one.switch, one.on) for one in hazard.literals} in [set(rule.literals) for rule in _nevers(drive)]


def _nevers(drive: Drive) -> list[NeverRule]:
    return [rule for rule in drive.rules if isinstance(rule, NeverRule)]


def _require_all_rules(drive: Drive, hazards: tuple[Hazard, ...]) -> None:
    claimed = [{(one.switch, one.on) for one in hazard.literals} for hazard in hazards if _is_of_a_rule(drive, hazard)]
    for rule in _nevers(drive):
        if set(rule.literals) not in claimed:
            raise NotProven(f"Nothing is said of the rule in line {rule.place.line}.")


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


class _Auditor:
    """The claims of one file's evidence, one by one; firmware is worked out once for those that share it."""

    def __init__(self, drive: Drive, evidence: Evidence) -> None:
        self._drive = drive
        self._evidence = evidence
        self._lists: dict[int, list[Stand]] = {}
        self._firmwares: dict[tuple[object, ...], Firmware] = {}
        self._grounds: dict[tuple[int, Firmware], Ground] = {}

    def holds_however_late(self, claim: Claim) -> bool:
        """Whether a claim holds however late the firmware is; NotProven if it does not hold at all."""
        proof = claim.proof
        try:
            if isinstance(proof, Trace):
                replay(self._drive, proof)
            elif isinstance(proof, Cover):
                late = proof.data.flag("however late")
                looking = scope(self._drive, claim.hazard, in_time=not late)
                check(Behaviour(looking, self._firmware(looking)), entries(proof.data, looking))
                return late
            elif isinstance(proof, Potentials):
                self._require_apart(claim.hazard, proof)
                return True
        except NotPermitted as why:
            raise NotProven(f"The run that shows {_named(claim.hazard)} does not replay. {why}") from why
        except NotCovered as why:
            raise NotProven(f"That {_named(claim.hazard)} never meet is not proven. {why}") from why
        return False

    def _require_apart(self, hazard: Hazard, proof: Potentials) -> None:
        looking = scope(self._drive, hazard, in_time=False)
        firmware = self._firmware(looking)
        if proof.stands not in self._lists:
            self._lists[proof.stands] = [stand(one) for one in self._evidence.stands[proof.stands]]
        if (proof.stands, firmware) not in self._grounds:
            self._grounds[proof.stands, firmware] = Ground(firmware, self._lists[proof.stands])
        pair, said = points(proof.data, len(hazard.literals))
        require_apart(looking, self._grounds[proof.stands, firmware], pair, said)

    def _firmware(self, looking: Scope) -> Firmware:
        key = looking.firmware()
        if key not in self._firmwares:
            self._firmwares[key] = Firmware(looking)
        return self._firmwares[key]


def _named(hazard: Hazard) -> str:
    return " and ".join(map(str, hazard.literals))

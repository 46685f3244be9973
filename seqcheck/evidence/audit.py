"""The audit of a file's evidence: every claim is checked again from the drive, by code that proved none of them."""

from dataclasses import dataclass, replace

from seqcheck.drive import Drive
from seqcheck.evidence.certificate import Claim, Cover, Evidence, NoEvidence, Potentials
from seqcheck.evidence.cover.apart import Ground, require_apart
from seqcheck.evidence.cover.behaviour import Behaviour
from seqcheck.evidence.cover.check import NotCovered, check
from seqcheck.evidence.cover.openings import first_unclaimed, opens
from seqcheck.evidence.cover.questions import first_unclaimed as unasked
from seqcheck.evidence.cover.questions import is_of_a_rule, margins
from seqcheck.evidence.cover.reading import entries, points, stand
from seqcheck.evidence.cover.scope import Scope, followed, scope
from seqcheck.evidence.cover.shorts import TooLarge, first_uncovered, shorts
from seqcheck.evidence.cover.stand import Firmware, Stand
from seqcheck.evidence.digest import digest
from seqcheck.evidence.replay import NotPermitted, replay
from seqcheck.hazards import Clearing, Following, Hazard, Lasting, Nearing
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
    """Check all claims, and that they are about all shorts and open windings of the stage and all rules of the file.

    Single faults, the mode graph and what rows mean are no part of evidence.

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
        nameless = not names and not isinstance(hazard.asks, Following)
        if nameless or len(set(names)) < len(names) or not set(names) <= set(drive.columns):
            raise NoEvidence("it names switches that the file has not, or none")
    near = tuple(one for one in hazards if isinstance(one.asks, Nearing))
    built_in = tuple(one for one in hazards if one not in near and not is_of_a_rule(drive, one))
    if any(one.asks is not None for one in built_in):
        raise NoEvidence("it is about a rule that the file has not")
    if any(one.on == bool(hazard.currents) for hazard in built_in for one in hazard.literals):
        raise NoEvidence("it is about a hazard that is no short, no open winding and in no rule")
    if (rule := unasked(drive, hazards)) is not None:
        raise NotProven(f"Nothing is said of the rule in line {rule.place.line}.")
    _require_all_margins(drive, evidence, set(near))
    try:
        _require_all_shorts(drive, tuple(one for one in built_in if not one.currents))
        _require_all_openings(drive, tuple(one for one in built_in if one.currents))
    except TooLarge as why:
        raise NotProven("The stage has too many ways for current to be walked one by one.") from why


def _require_all_margins(drive: Drive, evidence: Evidence, near: set[Hazard]) -> None:
    """Every rule about margins must be claimed of every short that is claimed safe, and of nothing else."""
    safe = [claim.hazard for claim in evidence.claims if isinstance(claim.proof, Cover | Potentials)]
    shorts_of = [one for one in safe if one.asks is None and not one.currents and not is_of_a_rule(drive, one)]
    required = {asked: rule for hazard in shorts_of for rule, asked in margins(drive, hazard)}
    for asked, rule in required.items():
        if asked not in near:
            raise NotProven(f"Nothing is said of {_named(asked)}, as line {rule.place.line} asks.")
    if not near <= required.keys():
        raise NoEvidence("it is about a margin that no rule asks for")


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
    """The claims of one file's evidence, one by one; what is worked out once for those that share it is kept."""

    def __init__(self, drive: Drive, evidence: Evidence) -> None:
        self._drive = drive
        self._evidence = evidence
        self._used = followed(drive)
        self._lists: dict[int, list[Stand]] = {}
        self._firmwares: dict[tuple[object, ...], Firmware] = {}
        self._grounds: dict[tuple[int, Firmware], Ground] = {}
        self._shown: dict[tuple[int, Hazard], dict[int, float]] = {}

    def holds_however_late(self, claim: Claim) -> bool:
        """Whether a claim holds however late the firmware is; NotProven if it does not hold at all."""
        proof = claim.proof
        try:
            if isinstance(proof, Trace):
                self._require_run(claim.hazard, proof)
            elif isinstance(proof, Cover):
                late = proof.data.flag("however late")
                looking = scope(self._drive, claim.hazard, not late, self._used)
                check(Behaviour(looking, self._firmware(looking)), entries(proof.data, looking))
                return late
            elif isinstance(proof, Potentials):
                self._require_apart(claim.hazard, proof)
                return True
        except NotPermitted as why:
            raise NotProven(f"The run that shows {_named(claim.hazard)} does not replay. {why}") from why
        except NotCovered as why:
            raise NotProven(f"It is not proven that this never happens: {_named(claim.hazard)}. {why}") from why
        return False

    def _require_run(self, hazard: Hazard, trace: Trace) -> None:
        """A run shows a hazard by its words; one that breaks a rule about margins needs no more than that."""
        asks, later = hazard.asks, trace.prolonged
        if isinstance(asks, Nearing) and (later is None or not 0 < later[1] <= asks.limit):
            raise NotPermitted("It is not of a margin that is too small.")
        replay(self._drive, trace)

    def _require_apart(self, hazard: Hazard, proof: Potentials) -> None:
        """Potentials of a short prove its margins too."""
        plain = replace(hazard, asks=None)
        if (proof.number, plain) not in self._shown:
            self._shown[proof.number, plain] = self._apart(plain, proof.number)
        shown = self._shown[proof.number, plain]
        asks = hazard.asks
        if isinstance(asks, Nearing):
            if shown.get(asks.after, asks.limit) < asks.limit:  # if neither is it, the others never meet at all
                raise NotCovered(f"Only {shown[asks.after]} ps are shown.")
        elif asks is not None:
            raise NotCovered("No length is proven by potentials.")

    def _apart(self, hazard: Hazard, number: int) -> dict[int, float]:
        """What the potentials of that number show of a hazard: the margins after two of its literals, by place."""
        data, stands = self._evidence.potentials[number]
        looking = scope(self._drive, hazard, False, self._used)
        firmware = self._firmware(looking)
        if stands not in self._lists:
            self._lists[stands] = [stand(one) for one in self._evidence.stands[stands]]
        if (stands, firmware) not in self._grounds:
            self._grounds[stands, firmware] = Ground(firmware, self._lists[stands])
        pair, said = points(data, len(hazard.literals))
        return dict(zip(pair, require_apart(looking, self._grounds[stands, firmware], pair, said), strict=True))

    def _firmware(self, looking: Scope) -> Firmware:
        key = looking.firmware()
        if key not in self._firmwares:
            self._firmwares[key] = Firmware(looking)
        return self._firmwares[key]


def _named(hazard: Hazard) -> str:
    """What must not happen, in words."""
    together = " and ".join(map(str, hazard.literals))
    match hazard.asks:
        case Lasting(longer=longer):
            (literal,) = hazard.literals
            return f"{literal.switch} {'on' if literal.on else 'off'} for too {'long' if longer else 'short'}"
        case Following(left=left, entered=entered):
            return f"{entered} too soon after {left}"
        case Clearing(trip=trip):
            return f"{together} too late after {trip}"
        case Nearing(after=after):
            return f"{together} too soon after {hazard.literals[after]}"
    return f"{together} together"

"""How long the audit of evidence takes, as a multiple of the proofs that it is evidence of.

    .venv/bin/python tests/scripts/audit_ratio.py [--rounds N] FILE...

In one process and by turns, from the drive on: all proofs of its hazards and rules (without keeping them, without
cures, interlock warnings and the graph) against reading the evidence and auditing it. Processor time, the least of all
rounds. With it the size of the evidence.
"""

import argparse
import gc
from collections.abc import Callable
from pathlib import Path
from time import process_time

from seqcheck.checking import Kept, asked, check, margin_rules
from seqcheck.drive import Drive
from seqcheck.evidence.audit import audit
from seqcheck.evidence.certificate import read as read_evidence
from seqcheck.evidence.certificate import written
from seqcheck.language import read
from seqcheck.margins import thin
from seqcheck.proving.prove import Proven, Prover


def unobserved(_: int) -> None:
    """No limit."""


def proved(drive: Drive) -> None:
    """Prove or refute everything that the evidence of a drive speaks of."""
    prover = Prover(drive)
    for hazard, _ in asked(drive):
        if hazard is None:  # evidence does not speak of what must be tolerated
            continue
        proof = prover.prove(hazard, True, unobserved)
        if isinstance(proof, Proven) and hazard.joins:
            for rule in margin_rules(drive):
                list(thin(prover, rule, hazard, unobserved))


def evidence_of(drive: Drive, file: str) -> str:
    """The evidence that `lint --evidence` writes."""
    kept: list[Kept] = []
    check(drive, file, frozenset(), unobserved, kept)
    return written(drive, kept)


def seconds(work: Callable[[], object]) -> float:
    """The processor time that something takes."""
    gc.collect()
    start = process_time()
    work()
    return process_time() - start


def measured(file: str, rounds: int) -> str:
    """Both times of a file, their ratio and the size of its evidence."""
    drive = read(Path(file).read_text("utf-8"), file, lambda name: Path(name).read_text("utf-8"))
    text = evidence_of(drive, file)
    times = [
        (seconds(lambda: proved(drive)), seconds(lambda: audit(drive, read_evidence(text)))) for _ in range(rounds)
    ]
    proofs, audits = min(one for one, _ in times), min(one for _, one in times)
    ratio = f"ratio {audits / proofs:.2f}"
    return f"{ratio}: proofs {proofs * 1000:.1f} ms, audit {audits * 1000:.1f} ms, {len(text)} bytes: {file}"


def main() -> None:
    """Print both times, their ratio and the size for each file."""
    asked = argparse.ArgumentParser()
    asked.add_argument("files", nargs="+", metavar="FILE")
    asked.add_argument("--rounds", type=int, default=9)
    given = asked.parse_args()
    gc.disable()  # as the command does
    for file in given.files:
        print(measured(file, given.rounds))


if __name__ == "__main__":
    main()

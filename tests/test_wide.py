"""Drives with more than a hundred of a thing: the clocks of a location keep their names apart."""

import json

import pytest
from proofs import answer, judged, leg, silent
from reading import drive_of

from seqcheck.checking import Kept, check
from seqcheck.drive import Drive
from seqcheck.evidence.audit import Audited, audit
from seqcheck.evidence.certificate import Fields, NoEvidence, read, written
from seqcheck.evidence.cover.reading import entries
from seqcheck.evidence.cover.scope import followed, scope
from seqcheck.firmware import Firmware, State
from seqcheck.hazards import Hazard, delays
from seqcheck.proving import keys
from seqcheck.proving.certify import Data, cover
from seqcheck.proving.clocks import Manner
from seqcheck.proving.keys import Key
from seqcheck.proving.projection import Projection, _holds
from seqcheck.proving.search import first_hazard
from seqcheck.proving.views import view
from seqcheck.writing import Holds

MANY = 120


def locked(dead: int, more: int) -> str:
    """B, held back by the last of its interlocks while A is on for a while; the partners of the others stay off."""
    names = [f"S{place}" for place in range(more + 1)]
    quiet = " off" * more
    text = leg(
        f"i off off{quiet} off\nw off on{quiet} on\ne off on{quiet} off",
        "  start i\n  i -> w when go earliest 100 ps\n  w -> e when turn\n"
        f"    set {names[-1]} off\n    wait 1 ps\n    set A on\n    wait 2 ps",
        columns=f"A B {' '.join(names)}",
        paths="A B through p" + "".join(f"\ninterlock B {one}" for one in names) + f" dead time {dead} ps",
    )
    others = "".join(f"  switch {one} from U to Z\n" for one in names)
    return text.replace("  leg U A B\n", f"  leg U A B\n{others}")


@pytest.mark.parametrize("dead", [6, 7, 8])
def test_many_interlocks_change_no_verdict(dead: int) -> None:
    """Interlocks of switches that are never on; from 8 ps on B comes late enough."""
    few = judged(locked(dead, 0))
    assert few == ("safe" if dead > 7 else 8 - dead)
    assert answer(locked(dead, 0)) == few
    assert answer(locked(dead, 100)) == few


def kept_of(drive: Drive) -> list[Kept]:
    kept: list[Kept] = []
    check(drive, "t.dseq", frozenset(), silent, kept)
    return kept


def cover_of(drive: Drive, hazard: Hazard) -> Data:
    """The zones of a hazard that the screen settles as well."""
    looking = view(drive, hazard, delays(hazard, drive.paths), interlocks=True)
    firmware = Firmware(drive, frozenset(), frozenset(), punctual=False)
    projection = Projection(looking, firmware, Manner(forget=True, cut=True, measure=False))
    assert first_hazard(projection.initial(), silent) is None
    return cover(projection, however_late=True)


def test_many_carriers_have_evidence_that_is_borne_out() -> None:
    """A follows each carrier in a mode of its own."""
    every = range(MANY)
    rows = ["i off off", *(f"m{place} c{place} off" for place in every), "e off on"]
    moves = ["  start i", *(f"  i -> m{place} when go{place}" for place in every)]
    moves.append(f"  {', '.join(f'm{place}' for place in every)} -> e when stop\n    set A off\n    wait 30 ps")
    carriers = [f"  c{place} 50 GHz duty 20 % to 80 %" for place in every]
    drive = drive_of(leg("\n".join(rows), "\n".join(moves), more="\n".join(["carriers", *carriers])))
    ((hazard, _),) = kept_of(drive)
    text = written(drive, [(hazard, cover_of(drive, hazard))])
    clocks = {name for entry in json.loads(text)["claims"][0]["cover"]["entries"] for name in entry["clocks"]}
    assert {f"carrier {place}" for place in every} <= clocks
    assert audit(drive, read(text)) == Audited(1, 1, 0, 0)


def test_kinds_of_clocks_are_far_apart() -> None:
    """So many names fit between two kinds that no drive comes near it."""
    kinds = (keys.CARRIER, keys.HOLD, keys.PIN, keys.LOCK, keys.RISE, keys.FALL)
    assert len({kind + place for kind in kinds for place in range(1000)}) == 6000
    assert min(kinds) > max(keys.X, keys.Y, keys.Z, keys.PAUSE, keys.GAP)


def holding(holds: Holds) -> Key:
    return Key(State("m", -1, 0, (), 0, None, -1, ((), (), holds)), (), (), (), ())


def test_many_held_groups_keep_their_clocks() -> None:
    """A proof with so many takes too long for a test: here one write is added to those held."""
    held: Holds = tuple((0, 1 << place) for place in range(MANY))
    before, after = holding(held[:-1]), holding(held)
    renaming = _holds(before, after, 1 << MANY - 1)
    come_from = [renaming[keys.HOLD + place] for place in range(MANY)]
    assert come_from[:-1] == [keys.HOLD + place for place in range(MANY - 1)]
    assert come_from[-1] not in come_from[:-1]


def test_evidence_may_name_a_held_group_for_every_switch() -> None:
    """One more is none that the drive can have."""
    spare = [f"S{place}" for place in range(MANY)]
    cells = " off" * MANY
    text = leg(
        f"i off off{cells}\nm c off{cells}",
        "  start i\n  i -> m when go",
        columns=f"A B {' '.join(spare)}",
        more="carriers\n  c 1 MHz duty 20 % to 80 % updates within a period",
    )
    others = "".join(f"  switch {one} from U to Z\n" for one in spare)
    drive = drive_of(text.replace("  leg U A B\n", f"  leg U A B\n{others}"))
    ((hazard, _),) = kept_of(drive)
    data = json.loads(json.dumps(cover_of(drive, hazard)))
    for group, fits in ((MANY + 1, True), (MANY + 2, False)):
        data["entries"][0]["clocks"] = [f"held {group}"]
        data["entries"][0]["zones"] = []
        if fits:
            assert entries(Fields(data, "a cover"), scope(drive, hazard, False, followed(drive)))
        else:
            with pytest.raises(NoEvidence):
                entries(Fields(data, "a cover"), scope(drive, hazard, False, followed(drive)))

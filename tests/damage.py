"""Evidence damaged in one place, and proofs forged for hazards that are not safe."""

import json
from collections.abc import Callable
from copy import deepcopy
from dataclasses import replace
from random import Random
from typing import Any

from proofs import at_most

from seqcheck.drive import Drive, Update
from seqcheck.evidence.certificate import written
from seqcheck.firmware import Firmware
from seqcheck.hazards import Clearing, Hazard, Nearing, delays
from seqcheck.proving.certify import cover
from seqcheck.proving.clocks import Manner
from seqcheck.proving.potentials import potentials, stands
from seqcheck.proving.projection import Projection
from seqcheck.proving.screen import Map, Pairing, Places
from seqcheck.proving.search import nodes
from seqcheck.proving.views import View, view

Data = dict[str, Any]
Damage = Callable[[Random, Data, Data], str]
"""Changes a claim of the whole evidence in one place; says what it did, nothing where there is no such place."""


def whole(drive: Drive, claims: list[tuple[Hazard, Any]]) -> Data:
    """Evidence as JSON that can be changed."""
    data: Data = json.loads(written(drive, claims))
    return data


def looked_at(drive: Drive, hazard: Hazard) -> View:
    """A hazard's view of a drive, interlocks included."""
    return view(drive, hazard, delays(hazard, drive.paths), True)


def late_firmware(looking: View) -> Firmware:
    """The firmware of a view, without its upper bounds."""
    carriers = looking.drive.carriers
    waiting = frozenset(name for name in looking.carriers if carriers[name].update is not Update.AT_ONCE)
    early = looking.hazard.asks.trip if isinstance(looking.hazard.asks, Clearing) else None
    return Firmware(looking.drive, waiting, looking.held if waiting else frozenset(), punctual=False, early=early)


# Damages

def _entry(rng: Random, claim: Data) -> Data | None:
    entries = claim.get("cover", {}).get("entries")
    return rng.choice(entries) if entries else None


def bound_tightened(rng: Random, _: Data, claim: Data) -> str:
    """A bound of a zone made smaller by 1 ps."""
    entry = _entry(rng, claim)
    bounds = [bound for zone in entry["zones"] for bound in zone] if entry else []
    if not bounds:
        return ""
    rng.choice(bounds)[2] -= 1
    return "a bound tightened"


def bound_raised(rng: Random, _: Data, claim: Data) -> str:
    """A bound of a zone made greater by 1 ps."""
    entry = _entry(rng, claim)
    bounds = [bound for zone in entry["zones"] for bound in zone] if entry else []
    if not bounds:
        return ""
    rng.choice(bounds)[2] += 1
    return "a bound raised"


def zone_dropped(rng: Random, _: Data, claim: Data) -> str:
    """A zone left out."""
    entry = _entry(rng, claim)
    if not entry or not entry["zones"]:
        return ""
    del entry["zones"][rng.randrange(len(entry["zones"]))]
    return "a zone dropped"


def entry_dropped(rng: Random, _: Data, claim: Data) -> str:
    """An entry of a cover left out."""
    entry = _entry(rng, claim)
    if not entry:
        return ""
    claim["cover"]["entries"].remove(entry)
    return "an entry dropped"


def state_changed(rng: Random, _: Data, claim: Data) -> str:
    """What is said of a literal, or of what is watched, changed to another state."""
    entry = _entry(rng, claim)
    if not entry or not entry["state"]["literals"]:
        return ""
    words = entry["state"]["literals"]
    place = rng.randrange(len(words))
    words[place] = rng.choice([one for one in STATES if one != words[place]])
    return "a state changed"


STATES = (
    *("out", "entering", "in", "leaving", "blip", "idle", "young", "long", "struck"),
    *("arrived", "late", "never", "ended"),
)


def _points(data: Data, claim: Data) -> list[list[Any]]:
    """The points of the potentials that a claim rests on."""
    if "potentials" not in claim:
        return []
    points: list[list[Any]] = data["potentials"][claim["potentials"]]["points"]
    return points


def potential_raised(rng: Random, data: Data, claim: Data) -> str:
    """A least time made longer by 1 ps."""
    places = [(times, cell) for point in _points(data, claim) for times in point[3:] for cell in times]
    if not places:
        return ""
    times, cell = rng.choice(places)
    times[cell] += 1
    return "a potential raised"


def potential_dropped(rng: Random, data: Data, claim: Data) -> str:
    """A least time left out, which says that the command never went away so."""
    places = [(times, cell) for point in _points(data, claim) for times in point[3:] for cell in times]
    if not places:
        return ""
    times, cell = rng.choice(places)
    del times[cell]
    return "a potential dropped"


def point_dropped(rng: Random, data: Data, claim: Data) -> str:
    """A point left out."""
    points = _points(data, claim)
    if not points:
        return ""
    del points[rng.randrange(len(points))]
    return "a point dropped"


def command_changed(rng: Random, data: Data, claim: Data) -> str:
    """A command of a point changed to another."""
    points = _points(data, claim)
    if not points:
        return ""
    point, place = rng.choice(points), rng.choice((1, 2))
    point[place] = rng.choice([one for one in ("off", "on", "unknown") if one != point[place]])
    return "a command changed"


def stand_changed(rng: Random, data: Data, claim: Data) -> str:
    """A cell of a stand changed to another."""
    if "potentials" not in claim:
        return ""
    stand = rng.choice(data["stands"][data["potentials"][claim["potentials"]]["stands"]])
    row = stand[rng.choice(("written", "effective"))]
    place = rng.randrange(len(row))
    row[place] = rng.choice([one for one in ("off", "on", "free") if one != row[place]])
    return "a stand changed"


def event_moved(rng: Random, _: Data, claim: Data) -> str:
    """An event of a run moved by 1 ps."""
    events = claim.get("run", {}).get("events")
    if not events:
        return ""
    rng.choice(events)["time"] += rng.choice((-1, 1))
    return "an event moved"


def overlap_moved(rng: Random, _: Data, claim: Data) -> str:
    """An end of a run's overlap moved by 1 ps."""
    overlap = claim.get("run", {}).get("overlap")
    places = [place for place, time in enumerate(overlap or ()) if time is not None]
    if not places:
        return ""
    overlap[rng.choice(places)] += rng.choice((-1, 1))
    return "an overlap moved"


def later_changed(rng: Random, _: Data, claim: Data) -> str:
    """A run that breaks a rule about margins says that a literal lasts longer, or less long, by 1 ps."""
    if "later" not in claim.get("run", {}):
        return ""
    claim["run"]["later"] += rng.choice((-1, 1))
    return "a literal longer"


def question_changed(rng: Random, _: Data, claim: Data) -> str:
    """The limit of a rule changed by 1 ps."""
    if "asks" not in claim:
        return ""
    claim["asks"][-1] += rng.choice((-1, 1))
    return "a question changed"


DAMAGES: tuple[Damage, ...] = (
    bound_tightened, bound_raised, zone_dropped, entry_dropped, state_changed, potential_raised, potential_dropped,
    point_dropped, command_changed, stand_changed, event_moved, overlap_moved, later_changed, question_changed,
)  # fmt: skip


def damaged(rng: Random, data: Data, number: int) -> tuple[Data, str]:
    """The evidence with one place of one of its claims changed, and what was done to it; "" if it has no place."""
    for damage in rng.sample(DAMAGES, len(DAMAGES)):
        copy = deepcopy(data)
        what = damage(rng, copy, copy["claims"][number])
        if what:
            return copy, what
    return data, ""


# Forgeries

def forged_cover(drive: Drive, hazard: Hazard, zones: int) -> Data:
    """All that can be reached as if it were a cover, but for what shows the hazard; LimitReached where it is much."""
    asks = hazard.asks
    manner = Manner(forget=False, cut=False, measure=False)
    if isinstance(asks, Nearing):
        hazard, manner = replace(hazard, asks=None), replace(manner, gap=asks.after, cap=asks.limit)
    looking = looked_at(drive, hazard)
    projection = Projection(looking, late_firmware(looking), manner)
    for _ in nodes(projection.initial(), at_most(zones)):
        pass
    data = cover(projection, however_late=True)
    entries: list[Data] = data["entries"]  # type: ignore[assignment]
    for entry in entries:
        words = entry["state"]["literals"]
        if isinstance(asks, Nearing):
            words[-1] = "never"
        elif all(word in ("in", "leaving", "late", "struck") for word in words):
            words[-1] = "out" if words[-1] in ("in", "leaving") else "idle"
    return data


def forged_potentials(drive: Drive, hazard: Hazard, places: Places, more: int) -> Data | None:
    """Potentials of two literals, each `more` than it is; None where some state commands both."""
    looking = looked_at(drive, hazard)
    here = Map(late_firmware(looking), lambda count: None)
    if Pairing(looking, here, *places).points() is None:
        return None
    data: Data = {**potentials(looking, here, places), "stands": stands(here)}
    for point in data["points"]:
        for times in point[3:]:
            times.update({cell: time + more for cell, time in times.items()})
    return data

"""What an editor is shown of margins, and that measuring them stands in nobody's way."""

import threading
from dataclasses import replace
from typing import Any

import pytest
from editor import PATIENCE, ROOT, at
from proofs import leg
from reading import drive_of
from test_serving import HEAVY, SAFE, UNSAFE, URI, VENT
from test_serving_inside import Wire

from seqcheck import checking, margins
from seqcheck.proving.search import LimitReached
from seqcheck.serving.proofs import Limits, Proofs
from seqcheck.verdict import Budget


def hovered(wire: Wire, text: str, word: str, inside: str = "") -> list[str]:
    """The lines of a hover."""
    params = {"textDocument": {"uri": URI}, "position": at(text, word, inside)}
    found = wire.ask("textDocument/hover", params)["result"]
    return str(found["contents"]["value"]).split("\n") if found else []


def measured(wire: Wire) -> None:
    """Wait until the margins of the open text are there."""
    step = threading.Event()
    for _ in range(int(PATIENCE * 50)):
        if wire.server._desk.open[URI].margins is not None:
            return
        step.wait(0.02)
    pytest.fail("no margins came")


def opened(text: str, wire: Wire | None = None) -> Wire:
    """A server with one text whose margins are measured."""
    wire = wire or Wire()
    wire.open(text)
    measured(wire)
    return wire


def test_a_switch_shows_its_margins_and_who_sets_them() -> None:
    """The figures of `margins` in the README, of which a test holds the output."""
    wire = opened(VENT)
    assert hovered(wire, VENT, "UH", "leg U")[-2:] == [
        "margin UH off, then UL on: 5.231584 us, set by line 61: trip gust",
        "margin UL off, then UH on: 38.89495 us, set by line 47: idle -> open",
    ]
    trip = ["sets the margin UH off, then UL on: 5.231584 us", "sets the margin VH off, then VL on: 5.231584 us"]
    assert hovered(wire, VENT, "gust", "gust")[-2:] == trip
    assert hovered(wire, VENT, "->", "gust")[-2:] == trip
    assert hovered(wire, VENT, "->", "reverse_cmd")[-1] == "sets the margin VL off, then VH on: 5.231584 us"
    assert not [one for one in hovered(wire, VENT, "coupler", "through") if "margin" in one]


def test_a_row_shows_the_margin_that_it_sets() -> None:
    """From off to on 20 ns pass, the dead time, and 12 ns of them are asked for: 20 ns off less 8 ns on."""
    text = leg(
        "i off off\nw k ~k",
        "  start i\n  i -> w when go\n  w -> i when stop",
        head="clock 1 GHz, late by at most 0 ps\nwrites together",
        parts="p on 8 ns off 20 ns",
        more="carriers\n  k 1 MHz duty 50 % dead time 20 ns",
    )
    wire = opened(text)
    assert hovered(wire, text, "w", "w k ~k")[-2:] == [
        "sets the margin A off, then B on: 8 ns",
        "sets the margin B off, then A on: 8 ns",
    ]
    assert not [one for one in hovered(wire, text, "i", "i off") if "margin" in one]


def test_what_is_unsafe_or_undecided_has_no_margin() -> None:
    assert hovered(opened(UNSAFE), UNSAFE, "A", "leg")[-1] == "no margin with B: they overlap for up to 1 ps"
    limited = Wire(seconds=0)
    assert hovered(opened(VENT, limited), VENT, "UH", "leg U")[-1].startswith("margin")


def test_before_they_are_measured_nothing_is_pretended() -> None:
    wire = Wire(pause=3600)
    wire.open(SAFE)
    assert hovered(wire, SAFE, "A", "leg")[-1] == "margins: not measured yet"


def test_an_edit_takes_them_away() -> None:
    wire = opened(SAFE)
    assert hovered(wire, SAFE, "A", "leg")[-2].startswith("margin A off, then B on: ")
    wire.server._proofs._limits = type(wire.server._proofs._limits)(pause=3600)
    wire.open(SAFE.replace("wait 5 ps", "wait 6 ps"), 2)
    assert hovered(wire, SAFE, "A", "leg")[-1] == "margins: not measured yet"


def test_a_fault_while_measuring_is_told_and_no_end(monkeypatch: pytest.MonkeyPatch) -> None:
    real = margins.budget
    monkeypatch.setattr(margins, "budget", lambda *_: 1 // 0)
    wire = opened(SAFE)
    assert hovered(wire, SAFE, "A", "leg")[-1].startswith("margins: not measured, ZeroDivisionError")
    monkeypatch.setattr(margins, "budget", real)
    assert hovered(opened(SAFE, wire), SAFE, "A", "leg")[-1].startswith("margin")


def test_a_proof_goes_before_margins(monkeypatch: pytest.MonkeyPatch) -> None:
    """While margins of one text are measured without end another is opened: it is judged, then they are begun again."""
    begun, real = threading.Event(), margins.budget
    times = []

    def slow(drive: Any, file: str, observer: Any, known: Any) -> Budget:
        times.append(drive.title)
        begun.set()
        while times == ["leg"]:
            observer(1)
        return real(drive, file, observer, known)

    monkeypatch.setattr(margins, "budget", slow)
    wire = Wire()
    wire.open(SAFE)
    assert begun.wait(PATIENCE)
    item = {"uri": "file:///drives/other.dseq", "version": 7, "text": UNSAFE.replace('"leg"', '"other"')}
    wire.server._take({"jsonrpc": "2.0", "method": "textDocument/didOpen", "params": {"textDocument": item}})
    assert wire.judged(7) == ["overlap"]
    measured(wire)
    assert times.count("leg") == 2


# Margins of what was proven already


FASTENED = SAFE.replace("paths\n", "paths\n  interlock A B dead time 9 ps\n").replace("wait 5 ps", "wait 1 ps")
KNOWN = {
    "safe": SAFE,
    "unsafe": UNSAFE,
    "interlock": FASTENED,
    "thin margin": SAFE + "\nrules\n  margin at least 1 us\n",
    "three switches": (ROOT / "samples/faulty/pump_short_pause.dseq").read_text(encoding="utf-8"),
    "undecided": HEAVY,
}


@pytest.mark.parametrize("text", KNOWN.values(), ids=KNOWN.keys())
def test_margins_are_the_same_after_a_proof(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """What is handed on is what would have been proven; and nothing is proven again."""
    drive = drive_of(text)
    outcome = checking.check(drive, "t.dseq", frozenset(), _few)
    fresh = margins.budget(drive, "t.dseq", _few)
    assert fresh.margins or fresh.unsafe or fresh.undecided
    monkeypatch.setattr(margins.Prover, "prove", lambda *_: pytest.fail("it is proven again"))
    again = margins.budget(drive, "t.dseq", _few, outcome.verdicts)
    assert replace(again, undecided=()) == replace(fresh, undecided=())
    assert [one.hazard for one in again.undecided] == [one.hazard for one in fresh.undecided]


def _few(zones: int) -> None:
    if zones > 60:
        raise LimitReached("60 zones")


def test_when_nobody_listens_any_more_the_thread_goes_on_to_the_margins_and_ends_there() -> None:
    """A text whose answer could not be said is not proven again and again."""
    told, over = [], threading.Event()

    def broken(task: Any, answer: Any) -> None:
        told.append(answer)
        raise BrokenPipeError

    proofs = Proofs(Limits(10**6, PATIENCE, 0.0), broken, lambda *_: over.set())
    proofs.ask("key", "t.dseq", drive_of(SAFE))
    assert over.wait(PATIENCE)
    assert len(told) == 1

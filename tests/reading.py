"""Shared by tests: reading a drive from a text."""

from seqcheck.drive import Drive
from seqcheck.language import read
from seqcheck.messages import Problems

FILE = "t.dseq"

VENT = """\
drive "Greenhouse vent actuator, 24 V brushed motor"

clock 48 MHz within 1 %, late by at most 2 us
let settle = 16 us
writes one at a time, 0.4 us to 1.5 us apart, turn-offs first
loop at least 50 us

stage
  rails P N
  leg U  UH UL
  leg V  VH VL
  winding U V

parts
  coupler   on 1.5 us to 4 us    off 3 us to 12 us
  fet       on 20 ns to 60 ns    off 40 ns to 130 ns

paths
  UH UL VH VL  through coupler, fet

pins
  UH  PA8   active high  rests low
  UL  PB13  active high  rests low
  VH  PA9   active high  rests low  after 5 us to 40 us
  VL  PB14  active low   rests high

carriers
  main  20 kHz  duty 5 % to 95 %

modes     UH     UL     VH     VL
  idle    off    off    off    off
  open    main   off    off    on
  close   off    on     main   off
  hold    off    on     off    on

moves
  start reset
  reset -> idle        when boot  earliest 1 ms
  idle  -> open        when open_cmd
  idle  -> close       when close_cmd
  open  -> close       when reverse_cmd
    set all off
    wait settle
  open, close -> idle  when stop
  idle  -> hold        when windy       earliest 2 ms
  hold  -> idle        after 2 s

trips
  overcurrent  from any -> idle   at once
  overheat     from open, close -> idle   within 30 us
  watchdog     from any -> reset

rules
  margin at least 200 ns
  overheat clears UH UL VH VL within 60 us
  open and close at least 10 us apart
"""


def no_file(path: str) -> str:
    """A fetch that finds nothing."""
    raise FileNotFoundError(2, "No such file or directory", path)


def drive_of(text: str) -> Drive:
    """The drive of a text that uses no other file."""
    return read(text, FILE, no_file)


def mistakes_of(text: str) -> list[str]:
    """The mistakes of a text, a line each; empty if there are none."""
    try:
        drive_of(text)
    except Problems as problems:
        return [one.line() for one in problems.found]
    return []


def vent(*changes: tuple[str, str]) -> str:
    """The vent actuator with some texts replaced, each of which must be there."""
    text = VENT
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text


def row_drive(switches: str, rows: str, moves: str, head: str = "writes together", more: str = "") -> str:
    """A small drive of single switches between P and N, for what concerns only table and moves."""
    lines = [f"  switch {one} from P to N" for one in switches.split()]
    stage = "\n".join(["stage", "  rails P N", *lines])
    return f'drive "rows"\n{head}\n{stage}\n{more}\nmodes {switches}\n{rows}\nmoves\n{moves}\n'

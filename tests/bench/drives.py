"""Drives for measuring, as texts: typical ones, one that needs a search, and tables of any length."""

from random import Random

H_BRIDGE = """\
drive "typical H-bridge"
clock 64 MHz within 1 %, late by at most 2 us
let settle = 4 us
writes one at a time, 0.2 us to 0.6 us apart, turn-offs first
loop at least 20 us
stage
  rails P N
  leg U  UH UL
  leg V  VH VL
  winding U V
parts
  driver  on 60 ns to 140 ns  off 60 ns to 160 ns
  fet     on 20 ns to 60 ns   off 40 ns to 130 ns
paths
  UH UL VH VL  through driver, fet
carriers
  main  20 kHz  duty 5 % to 95 %  dead time 500 ns
modes    UH     UL   VH     VL
  idle   off    off  off    off
  ahead  main   off  off    on
  back   off    on   main   off
  brake  off    on   off    on
moves
  start idle
  idle -> ahead         when ahead_cmd
  idle -> back          when back_cmd
  ahead -> back         when turn_cmd
    set all off
    wait settle
  back -> ahead         when turn_cmd
    set all off
    wait settle
  ahead, back -> idle   when stop_cmd
  idle -> brake         when brake_cmd
  brake -> idle         after 50 ms
trips
  overcurrent  from any -> idle          at once
  overheat     from ahead, back -> idle  within 30 us
"""
"""Settled by the screen."""


def unsafe_h_bridge() -> str:
    """The same without a carrier, its pause too short: small enough for a solver to come to the run."""
    rows = {"main   off  off    on": "on off off on", "off    on   main   off": "off on on off"}
    text = H_BRIDGE.replace("let settle = 4 us", "let settle = 20 ns")
    for old, new in rows.items():
        assert old in text
        text = text.replace(old, new)
    return text


_SIX_STEP = ("main off off on off off", "main off off off off on", "off off main off off on")
_SIX_STEP += ("off on main off off off", "off on off off main off", "off off off on main off")

THREE_PHASE_STAGE = """\
stage
  rails P N
  leg U  UH UL
  leg V  VH VL
  leg W  WH WL
  winding U star
  winding V star
  winding W star
parts
  driver  on 60 ns to 140 ns  off 60 ns to 160 ns
  igbt    on 80 ns to 200 ns  off 200 ns to 600 ns
paths
  UH UL VH VL WH WL  through driver, igbt
carriers
  main  16 kHz  duty 5 % to 95 %  dead time 1.5 us
"""


def three_phase() -> str:
    """Six steps that follow each other, settled by the screen."""
    rows = "".join(f"  s{number}  {row}\n" for number, row in enumerate(_SIX_STEP))
    moves = "".join(
        f"  s{number} -> s{(number + 1) % 6}  when hall\n    set all off\n    wait dead\n" for number in range(6)
    )
    return (
        'drive "typical three-phase bridge"\n'
        "clock 72 MHz within 200 ppm, late by at most 1 us\n"
        "let dead = 2 us\n"
        "writes one at a time, 0.1 us to 0.3 us apart, turn-offs first\n"
        "loop at least 20 us\n"
        f"{THREE_PHASE_STAGE}"
        f"modes UH UL VH VL WH WL\n  idle off off off off off off\n{rows}"
        f"moves\n  start idle\n  idle -> s0 when run\n{moves}"
        "  any -> idle  when stop\n"
        "trips\n  fault  from any -> idle  within 10 us\n  desat  from any -> idle  at once\n"
    )


SEARCHED = """\
drive "pins one at a time, a carrier, 12 moves, 2 trips"
clock 64 MHz within 1 %, late by at most 3 us
let settle = 16 us
writes one at a time, 0.4 us to 1.5 us apart, turn-offs first
loop at least 50 us
stage
  rails P N
  leg U  UH UL
  leg V  VH VL
  leg W  WH WL
parts
  coupler  on 1.5 us to 4 us  off 3 us to 12 us
  fet      on 20 ns to 60 ns  off 40 ns to 130 ns
paths
  UH UL VH VL WH WL  through coupler, fet
carriers
  main  20 kHz  duty 5 % to 95 %  dead time 20 us
modes     UH    UL     VH    VL     WH    WL
  idle    off   off    off   off    off   off
  one     main  ~main  off   on     off   off
  two     main  ~main  off   off    off   on
  three   off   off    main  ~main  off   on
  four    off   on     main  ~main  off   off
  five    off   on     off   off    main  ~main
  six     off   off    off   on     main  ~main
moves
  start idle
  idle -> one     when run
  one -> two      when hall
    set all off
    wait settle
  two -> three    when hall
    set all off
    wait settle
  three -> four   when hall
    set all off
    wait settle
  four -> five    when hall
    set all off
    wait settle
  five -> six     when hall
    set all off
    wait settle
  six -> one      when hall
    set all off
    wait settle
  one -> six      when back
    set all off
    wait settle
  three -> two    when back
    set all off
    wait settle
  one, two, three, four, five, six -> idle  when stop
  idle -> four    when kick     earliest 1 ms
  four -> one     when jump
    set all off
    wait settle
trips
  overcurrent  from any -> idle                                within 20 us
    set all off
    wait settle
  overheat     from one, two, three, four, five, six -> idle   within 50 us
"""
"""Twelve moves and two trips. The legs are proven with exact zones where the screen is left out."""

_STATES = ("off off", "on off", "off on")


def table(modes: int) -> str:
    """A three-phase drive of so many modes, six switches, a move on from every mode and a trip from all of them.

    A number in front of the rows of one length draws them, so that equal calls give equal texts.
    """
    draw = Random(modes)
    rows = [" ".join(draw.choice(_STATES) for _ in range(3)) for _ in range(modes - 1)]
    lines = [
        'drive "a long table"',
        "clock 72 MHz within 200 ppm, late by at most 1 us",
        "let dead = 2 us",
        "writes together",
        "loop at least 20 us",
        THREE_PHASE_STAGE.replace("igbt    on 80 ns to 200 ns", "igbt    on 80 ns to 300 ns").rstrip("\n"),
        "modes UH UL VH VL WH WL",
        "  m0 off off off off off off",
        *(f"  m{number} {row}" for number, row in enumerate(rows, 1)),
        "moves",
        "  start m0",
    ]
    for number in range(modes):
        lines += [f"  m{number} -> m{(number + 1) % modes} when step", "    set all off", "    wait dead"]
    return "\n".join([*lines, "trips", "  fault from any -> m0 at once", ""])


def long_file(lines: int) -> str:
    """A drive whose file has so many lines, a quarter of them rows, the rest moves with their steps."""
    frame = table(4).count("\n") - 4 * 4
    text = table((lines - frame) // 4)
    return text + "\n" * (lines - text.count("\n"))

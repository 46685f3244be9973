# ruff: noqa: E501 - whole messages stand on one line, as they are printed
"""Every mistake by its whole message: place, words, way out and kind; and none that only follows from another."""

import pytest
from reading import VENT, mistakes_of, row_drive, vent

from seqcheck.language.words import CHECKS
from seqcheck.verdict import Check

Case = tuple[str, str, str | list[str]]

SYNTAX: list[Case] = [
    ("leg U  UH UL", "legg U UH UL", "10:3: 'legg' does not fit here; did you mean 'leg'? [syntax]"),
    ("leg U  UH UL", "legU UH UL", "10:3: 'legU' does not fit here; did you mean 'leg'? [syntax]"),
    ("leg U  UH UL", "leg U UH", "10:11: the line ends too soon; expected a name [syntax]"),
    ("stage\n", "stage foo\n", "8:7: 'foo' does not fit here; expected the end of the line [syntax]"),
    ("loop at least", "loop at most", "6:9: 'most' does not fit here; expected 'least' [syntax]"),
    ("1 %, late", "1 % late", "3:25: 'late' does not fit here; expected ',' or the end of the line [syntax]"),
    ("= 16 us", "= (16 us", "4:20: the line ends too soon; expected ')', '+' or '-' [syntax]"),
    ("= 16 us", "= 16 us)", "4:19: ')' does not fit here; expected '+', '-' or the end of the line [syntax]"),
    ("idle  -> open", "idle  => open", "39:9: '=' does not fit here; expected ',' or '->' [syntax]"),
    ("wait settle", "wiat settle", "43:5: 'wiat' does not fit here; did you mean 'wait'? [syntax]"),
    ("set all off", "sett all off", "42:5: 'sett' does not fit here; did you mean 'set'? [syntax]"),
    ("wait settle", "wait §", "43:10: the character U+00A7 (SECTION SIGN) has no meaning here; take it out [syntax]"),
    ("wait settle", "wait & settle", "43:10: the character '&' has no meaning here; take it out [syntax]"),
    (
        "wait settle",
        "wait 5\u00a0us",
        "43:11: the character U+00A0 (NO-BREAK SPACE) has no meaning here; take it out [syntax]",
    ),
    ('motor"', "motor", "1:7: this text has no closing quote; close it with '\"' on the same line [syntax]"),
    ('motor"', 'motor" "x"', "1:54: a text does not fit here; expected the end of the line [syntax]"),
    (
        "16 us",
        ".5 us",
        "4:14: the character '.' has no meaning here; write a number with digits on both sides of the point, "
        "such as 0.5 [syntax]",
    ),
    (
        "idle  -> open",
        "idle  \u2192 open",
        "39:9: the character U+2192 (RIGHTWARDS ARROW) has no meaning here; write '->' [syntax]",
    ),
    (
        '"Greenhouse',
        "\u201cGreenhouse",
        "1:7: the character U+201C (LEFT DOUBLE QUOTATION MARK) has no meaning here; put a text in straight double quotes "
        "[syntax]",
    ),
    (
        "stage\n",
        "\ufeffstage\n",
        "8:1: the character U+FEFF (ZERO WIDTH NO-BREAK SPACE) has no meaning here; take it out [syntax]",
    ),
    ("stage\n", "\x0cstage\n", "8:1: the character U+000C has no meaning here; take it out [syntax]"),
    ("paths\n", "foo\npaths\n", "18:4: the line ends too soon; expected 'on' [syntax]"),
    ("16 us", "16 uss", "4:17: 'uss' is no unit; did you mean 'us'? [unknown-unit]"),
    ("16 us", "16 km", "4:17: 'km' is no unit; units are ps ns us ms s ticks, Hz kHz MHz GHz, % ppm [unknown-unit]"),
    ("stage\n", "stge\n", "8:1: no line begins with 'stge'; did you mean 'stage'? [unknown-section]"),
    ("moves\n", "movs\n", "36:1: no line begins with 'movs'; did you mean 'moves'? [unknown-section]"),
    ("modes ", "mode ", "30:1: no line begins with 'mode'; did you mean 'modes'? [unknown-section]"),
    ("drive ", "dirve ", "1:1: no line begins with 'dirve'; did you mean 'drive'? [unknown-section]"),
    (
        "clock 48",
        "48 MHz is right\nclock 48",
        "3:1: this line belongs to no section; put it under the section that it belongs to: 'stage', 'parts', 'paths', "
        "'pins', 'carriers', 'modes', 'moves', 'trips', 'rules' [no-section]",
    ),
]

CIRCLE = """
drive "t"
writes together
stage
  sources a b c
  switch A from a to X one way
  switch B from X to b one way
  switch C from X to c one way
modes A B C
  i off off off {}
  m on on off
moves
  start i
  i -> m when e {}
"""


@pytest.mark.parametrize("said", ["a above b, b above c, c above a", "b above c, a above b with c above a"])
def test_sources_that_would_stand_above_themselves(said: str) -> None:
    """Under such facts no short would be asked for."""
    (row,) = mistakes_of(CIRCLE.format(f"with {said}", ""))
    assert (
        row
        == "t.dseq:10:"
        + f"{row.split(':')[2]}: error: this contradicts what is said before it; take one out [contradiction]"
    )
    (move,) = mistakes_of(CIRCLE.format("", f"with {said}"))
    assert "t.dseq:14:" in move
    assert mistakes_of(CIRCLE.format("with a above b, b above c, a above c", "")) == []


RESERVED: list[Case] = [
    (
        "idle    off ",
        "off    off ",
        "31:3: 'off' is a reserved word and cannot be a name; choose another name, such as 'off_'",
    ),
    (
        "idle    off ",
        "any    off ",
        "31:3: 'any' is a reserved word and cannot be a name; choose another name, such as 'any_'",
    ),
    (
        "idle    off ",
        "drive    off ",
        "31:3: 'drive' is a reserved word and cannot be a name; choose another name, such as 'drive_'",
    ),
    (
        "idle    off ",
        "stage    off ",
        "31:3: 'stage' is a reserved word and cannot be a name; choose another name, such as 'stage_'",
    ),
    (
        "idle    off ",
        "reset   off ",
        "31:3: 'reset' is a reserved word and cannot be a name; choose another name, such as 'reset_'",
    ),
    (
        "  idle  -> open ",
        "  loop  -> open ",
        "39:3: 'loop' is a reserved word and cannot be a name; choose another name, such as 'loop_'",
    ),
    (
        "leg U  UH UL",
        "leg off UH UL",
        "10:7: 'off' is a reserved word and cannot be a name; choose another name, such as 'off_'",
    ),
    (
        "when windy",
        "when set",
        "45:29: 'set' is a reserved word and cannot be a name; choose another name, such as 'set_'",
    ),
    (
        "when windy",
        "when reset",
        "45:29: 'reset' is a reserved word and cannot be a name; choose another name, such as 'reset_'",
    ),
    (
        "let settle",
        "let up",
        "4:5: 'up' is a reserved word and cannot be a name; choose another name, such as 'up_'",
    ),
    (
        "let settle",
        "let wait",
        "4:5: 'wait' is a reserved word and cannot be a name; choose another name, such as 'wait_'",
    ),
    (
        "  overcurrent  from",
        "  carriers  from",
        "49:3: 'carriers' is a reserved word and cannot be a name; choose another name, such as 'carriers_'",
    ),
]

QUANTITIES: list[Case] = [
    (
        "= 16 us",
        "= 16",
        "43:10: a duration is needed here, but 'settle' is a plain number; write it in ps, ns, us, ms, s or ticks [wrong-unit]",
    ),
    (
        "clock 48 MHz",
        "clock 48 us",
        "3:7: a frequency is needed here, but '48 us' is a duration; write it in Hz, kHz, MHz or GHz [wrong-unit]",
    ),
    (
        "within 1 %",
        "within 1 us",
        "3:21: a ratio is needed here, but '1 us' is a duration; write it in % or ppm [wrong-unit]",
    ),
    (
        "duty 5 %",
        "duty settle",
        "28:22: a ratio is needed here, but 'settle' is a duration; write it in % or ppm [wrong-unit]",
    ),
    (
        "0.4 us to",
        "0.4 to",
        "5:23: a duration is needed here, but '0.4' is a plain number; write it in ps, ns, us, ms, s or ticks [wrong-unit]",
    ),
    (
        "0.4 us to",
        "4 us to",
        "5:23: the range runs backwards, from 4 us to 1.5 us; put the smaller one first [backwards-range]",
    ),
    (
        "3 us to 12 us",
        "at least 3 us",
        "15:47: the turn-off time of a part needs an upper bound; write 'D to D' or 'up to D' [no-upper-bound]",
    ),
    (
        "1.5 us to 4 us ",
        "at least 3 us ",
        "15:25: the turn-on time of a part needs an upper bound; write 'D to D' or 'up to D' [no-upper-bound]",
    ),
    (
        "5 us to 40 us",
        "at least 5 us",
        "24:52: the time to rest needs an upper bound; write 'D to D' or 'up to D' [no-upper-bound]",
    ),
    (
        "5 % to 95 %",
        "5 % dead time at least 1 us",
        "28:45: a dead time needs an upper bound; write 'D to D' or 'up to D' [no-upper-bound]",
    ),
    ("5 % to 95 %", "95 % to 5 %", "28:22: the duty runs backwards; put the smaller one first [backwards-range]"),
    ("5 % to 95 %", "5 % to 950 %", "28:29: a duty above 100 % has no meaning; make it smaller [out-of-range]"),
    (
        "5 % to 95 %",
        "1 ppm",
        "28:22: the high pulse lasts at most 51 ps, less than a tick of 20.627 ns; widen the duty or lower the frequency [out-of-range]",
    ),
    (
        "5 % to 95 %",
        "999999 ppm",
        "28:22: the low pulse lasts at most 51 ps, less than a tick of 20.627 ns; widen the duty or lower the frequency [out-of-range]",
    ),
    ("20 kHz", "0 Hz", "28:9: a frequency above zero is needed here; make it greater [out-of-range]"),
    ("within 1 %", "within 100 %", "3:21: a tolerance must be below 100 %; make it smaller [out-of-range]"),
    ("= 16 us", "= 6 us - 16 us", "43:10: a duration below zero has no meaning here; make it greater [out-of-range]"),
    ("= 16 us", "= foo * 2", "4:14: unknown quantity 'foo'; define it with 'let' [unknown-name]"),
    ("wait settle", "wait setle", "43:10: unknown quantity 'setle'; did you mean 'settle'? [unknown-name]"),
    ("= 16 us", "= settle", "4:14: 'settle' is defined by itself; define it on a line above its use [defined-later]"),
    (
        "= 16 us",
        "= foo * 2\nlet foo = 3 us",
        "4:14: 'foo' is only defined in line 5; define it on a line above its use [defined-later]",
    ),
    (
        "let settle",
        "let settle = 3 us\nlet settle",
        "5:5: quantity 'settle' is named twice, first in line 4; leave out or rename one of them [duplicate-name]",
    ),
]

STAGE: list[Case] = [
    (
        "  rails P N\n",
        "",
        [
            "9:3: this leg has no rails to be between; add a line 'rails P N', or end this one with 'between NODE and NODE' [missing-rails]",
            "10:3: this leg has no rails to be between; add a line 'rails P N', or end this one with 'between NODE and NODE' [missing-rails]",
        ],
    ),
    (
        "rails P N",
        "rails P N\n  rails Q R",
        [
            "11:3: this leg could be on any of 2 supplies; end the line with 'between RAIL and RAIL' [missing-rails]",
            "12:3: this leg could be on any of 2 supplies; end the line with 'between RAIL and RAIL' [missing-rails]",
        ],
    ),
    (
        "rails P N",
        "rails P N\n  sources a P",
        "10:13: node 'P' is in a supply twice, first in line 9; each line is a supply of its own; leave out one of them [duplicate-name]",
    ),
    (
        "rails P N",
        "rails P N\n  sources a",
        "10:3: a supply has at least two nodes, 'sources' names one; write 'sources a OTHER' [missing-node]",
    ),
    (
        "leg U  UH UL",
        "leg U UH UL between N and P",
        "10:23: rail 'N' lies below rail 'P'; write 'between P and N' [backwards-rails]",
    ),
    ("leg U  UH UL", "leg U UH UL between P and Q", "10:29: unknown stiff node 'Q'; known are 'N', 'P' [unknown-name]"),
    ("leg U  UH UL", "leg U UH UL between P and P", "10:29: both ends of a leg are 'P'; name two nodes [same-name]"),
    (
        "leg U  UH UL",
        "leg P UH UL",
        "10:7: leg 'P' would tie its output to its own rail; give the leg a node of its own [same-name]",
    ),
    (
        "leg V ",
        "leg U ",
        "11:7: leg 'U' is named twice, first in line 10; leave out or rename one of them [duplicate-name]",
    ),
    (
        "VH VL\n  winding",
        "VH VL\n  switch UH from P to U\n  winding",
        "12:10: switch 'UH' is named twice, first in line 10; leave out or rename one of them [duplicate-name]",
    ),
    ("winding U V", "winding U U", "12:13: both ends of a winding are 'U'; name two nodes [same-name]"),
    ("winding U V", "diode from U to U", "12:19: both ends of a diode are 'U'; name two nodes [same-name]"),
    ("winding U V", "capacitor U U", "12:15: both ends of a capacitor are 'U'; name two nodes [same-name]"),
    (
        "winding U V",
        "switch T from U to U",
        [
            "12:22: both ends of a pole are 'U'; name two nodes [same-name]",
            "30:1: the table has no column for 'T'; every switch is a column of the table once [missing-column]",
            "37:9: 'reset' releases every pin, but 'pins' has no line for 'T'; add a line 'SWITCH PIN active LEVEL rests LEVEL' for each [missing-pins]",
        ],
    ),
]

SIGNALS: list[Case] = [
    ("VL  through", "VX  through", "19:12: unknown switch 'VX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]"),
    ("coupler, fet", "coupler, fot", "19:33: unknown part 'fot'; did you mean 'fet'? [unknown-name]"),
    (
        "VL  through",
        "UH  through",
        "19:12: the path of switch 'UH' is given twice, first in line 19; leave out one of them [duplicate-name]",
    ),
    (
        "paths\n",
        "paths\n  interlock UH UH\n",
        "19:16: an interlock of 'UH' with itself; name the two switches that the driver keeps apart [same-name]",
    ),
    (
        "paths\n",
        "paths\n  interlock UH UL\n  interlock UL UH\n",
        "20:13: the interlock of 'UL' and 'UH' is given twice, first in line 19; leave out one of them [duplicate-name]",
    ),
    (
        "paths\n",
        "paths\n  interlock UH UX\n",
        "19:16: unknown switch 'UX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]",
    ),
    (
        "  fet ",
        "  coupler ",
        [
            "16:3: part 'coupler' is named twice, first in line 15; leave out or rename one of them [duplicate-name]",
            "19:33: unknown part 'fet'; known are 'coupler' [unknown-name]",
        ],
    ),
    (
        "UL  PB13",
        "UX  PB13",
        [
            "23:3: unknown switch 'UX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]",
            "37:9: 'reset' releases every pin, but 'pins' has no line for 'UL'; add a line 'SWITCH PIN active LEVEL rests LEVEL' for each [missing-pins]",
        ],
    ),
    (
        "UL  PB13",
        "UL  PA8 ",
        "23:7: pin 'PA8' is named twice, first in line 22; leave out or rename one of them [duplicate-name]",
    ),
    (
        "UL  PB13",
        "UH  PC1   active low   rests low\n  UL  PB13",
        "23:3: the pin of switch 'UH' is given twice, first in line 22; leave out one of them [duplicate-name]",
    ),
    (
        "modes ",
        "  main 10 kHz duty 1 %\nmodes ",
        "30:3: carrier 'main' is named twice, first in line 28; leave out or rename one of them [duplicate-name]",
    ),
]

TABLE: list[Case] = [
    (
        "idle    off    off    off    off",
        "idle    off    off    off",
        "31:3: row 'idle' has 3 cells for 4 columns; add cells for 'VL' [missing-cell]",
    ),
    (
        "idle    off    off    off    off",
        "idle    off    off    off off off on",
        "31:33: row 'idle' has 6 cells for 4 columns; take out what is too many [extra-cell]",
    ),
    (
        "main   off    off    on",
        "man    off    off    on",
        "32:11: 'man' is neither on, off, keep, free nor a carrier; did you mean 'main'? [wrong-cell]",
    ),
    (
        "main   off    off    on",
        "~man   off    off    on",
        "32:12: 'man' is no carrier; did you mean 'main'? [wrong-cell]",
    ),
    (
        "VH     VL\n  idle",
        "VH     VX\n  idle",
        [
            "30:1: the table has no column for 'VL'; every switch is a column of the table once [missing-column]",
            "30:32: unknown switch 'VX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]",
        ],
    ),
    (
        "VH     VL\n  idle",
        "UL     VL\n  idle",
        [
            "30:1: the table has no column for 'VH'; every switch is a column of the table once [missing-column]",
            "30:25: column 'UL' is named twice, first in line 30; leave out or rename one of them [duplicate-name]",
        ],
    ),
    (
        "  hold    off",
        "  idle    off",
        [
            "34:3: mode 'idle' is named twice, first in line 31; leave out or rename one of them [duplicate-name]",
            "45:12: unknown mode 'hold'; known are 'close', 'idle', 'open' [unknown-name]",
            "46:3: unknown mode 'hold'; known are 'close', 'idle', 'open' [unknown-name]",
        ],
    ),
    (
        "off    off\n  open",
        "off    off with current out of W\n  open",
        "31:56: unknown node 'W'; known are 'N', 'P', 'U', 'V' [unknown-name]",
    ),
    (
        "off    off\n  open",
        "off    off with a above b\n  open",
        ["31:41: unknown source 'a' [unknown-name]", "31:49: unknown source 'b' [unknown-name]"],
    ),
    (
        "off    off\n  open",
        "off    off with current out of U, current into U\n  open",
        "31:59: this contradicts what is said before it; take one out [contradiction]",
    ),
    (
        "off    off\n  open",
        "off    off with current out of U, current out of V\n  open",
        "31:59: this contradicts what is said before it; take one out [contradiction]",
    ),
    (
        "off    off\n  open",
        "off    off means level U\n  open",
        "31:48: unknown stiff node 'U'; known are 'N', 'P' [unknown-name]",
    ),
    (
        "off    off\n  open",
        "off    off means drive U to U\n  open",
        "31:36: a drive from 'U' to itself; name two nodes [same-name]",
    ),
    (
        "off    off\n  open",
        "off    off means coast means brake\n  open",
        "31:48: a second 'means' in one row; leave out one of them [duplicate-name]",
    ),
]

MOTION: list[Case] = [
    ("  start reset\n", "", "36:1: no mode to start in; add a line 'start MODE' [missing-start]"),
    (
        "start reset",
        "start reste",
        "37:9: unknown mode 'reste'; known are 'close', 'hold', 'idle', 'open' [unknown-name]",
    ),
    (
        "start reset",
        "start open",
        "37:9: the start row 'open' has for 'UH' the carrier 'main'; start in a row of 'on', 'off' and 'free' only [wrong-start]",
    ),
    (
        "start reset",
        "start reset\n  start idle",
        "38:3: a second 'start'; the first is in line 37; leave out one of them [duplicate-name]",
    ),
    (
        "start reset",
        "start reset\n    set all off",
        "38:5: this step belongs to no move; put it under the line of its move [stray-step]",
    ),
    (
        "trips\n",
        "trips\n  wait 3 us\n",
        "49:3: this step belongs to no trip; put it under the line of its trip [stray-step]",
    ),
    ("idle  -> open", "idle  -> opne", "39:12: unknown mode 'opne'; did you mean 'open'? [unknown-name]"),
    (
        "idle  -> open",
        "idle, idle -> open",
        "39:9: mode 'idle' is named twice, first in line 39; leave out or rename one of them [duplicate-name]",
    ),
    (
        "any -> idle",
        "any but open, close, hold, idle -> idle",
        "49:21: no mode is left to come from; name the modes [empty-origin]",
    ),
    ("any -> idle", "any but opne -> idle", "49:29: unknown mode 'opne'; did you mean 'open'? [unknown-name]"),
    (
        "earliest 2 ms",
        "earliest 2 ms latest 1 ms",
        "45:62: 'latest' 1 ms lies before 'earliest' 2 ms; make 'latest' the greater one [backwards-range]",
    ),
    ("set all off", "set UX off", "42:9: unknown switch 'UX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]"),
    (
        "set all off",
        "set UH off, UH on",
        "42:17: switch 'UH' is named twice, first in line 42; leave out or rename one of them [duplicate-name]",
    ),
    (
        "set all off",
        "set UH man",
        "42:12: 'man' is neither on, off, keep, free nor a carrier; did you mean 'main'? [wrong-cell]",
    ),
    (
        "hold  -> idle        after 2 s",
        "hold -> reset\n    set all off",
        "47:5: a step under a move to 'reset', which hardware does at once; take the steps out [stray-step]",
    ),
    (
        "any -> reset",
        "any -> reset\n    set all off",
        "52:5: a step under a trip to 'reset', which hardware does at once; take the steps out [stray-step]",
    ),
    (
        "any -> reset",
        "any -> reset within 5 us",
        "51:41: a trip to 'reset' is taken by hardware, at once; take 'within' out [contradiction]",
    ),
    (
        "within 30 us",
        "within 30 us at once",
        "50:50: 'within' and 'at once' exclude each other; take one of them out [contradiction]",
    ),
    (
        "idle   at once",
        "idle   at once\n    wait 3 us",
        "50:5: a trip that is 'at once' cannot begin with a wait; set something first, or take 'at once' out [leading-wait]",
    ),
    (
        "from open, close",
        "from open, reset",
        "50:21: no firmware trip is taken in 'reset'; leave 'reset' out [wrong-origin]",
    ),
    (
        "watchdog  ",
        "overheat  ",
        "51:3: trip 'overheat' is named twice, first in line 50; leave out or rename one of them [duplicate-name]",
    ),
]

RULES: list[Case] = [
    ("overheat clears", "overheet clears", "55:3: unknown trip 'overheet'; did you mean 'overheat'? [unknown-name]"),
    (
        "clears UH UL VH VL",
        "clears UH UX",
        "55:22: unknown switch 'UX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]",
    ),
    ("open and close", "open and clos", "56:12: unknown mode 'clos'; did you mean 'close'? [unknown-name]"),
    ("open and close", "open and open", "56:12: mode 'open' cannot be apart from itself; name two modes [same-name]"),
    (
        "margin at least 200 ns",
        "UX on at most 1 us",
        "54:3: unknown switch 'UX'; known are 'UH', 'UL', 'VH', 'VL' [unknown-name]",
    ),
    (
        "margin at least 200 ns",
        "never UH and UH off",
        "54:16: switch 'UH' is named twice, first in line 54; leave out or rename one of them [duplicate-name]",
    ),
    ("margin at least 200 ns", "never UH", "54:11: the line ends too soon; expected 'and' [syntax]"),
    (
        "margin at least 200 ns",
        "margin at least 2 Hz",
        "54:19: a duration is needed here, but '2 Hz' is a frequency; write it in ps, ns, us, ms, s or ticks [wrong-unit]",
    ),
    (
        "margin at least 200 ns",
        'waive shortt for U because "x"',
        "54:9: unknown check 'shortt'; did you mean 'short'? [unknown-name]",
    ),
    (
        "margin at least 200 ns",
        'waive short for open_cm because "x"',
        "54:19: 'open_cm' is no leg, switch, mode, event or trip; did you mean 'open_cmd'? [unknown-name]",
    ),
    (
        "margin at least 200 ns",
        'waive short for U because " "',
        "54:29: a waiver needs a reason; say why it may pass [missing-reason]",
    ),
    (
        "margin at least 200 ns",
        'waive short for U because "x"\n  waive short for U because "y"',
        "55:19: 'short' for 'U' is waived twice, first in line 54; leave out one of them [duplicate-name]",
    ),
]

WHOLE: list[Case] = [
    (
        "rules\n",
        "clock 1 MHz\nrules\n",
        "53:1: a second line 'clock'; the first is in line 3; join them [duplicate-section]",
    ),
    (
        "rules\n",
        "writes together\nrules\n",
        "53:1: a second line 'writes'; the first is in line 5; join them [duplicate-section]",
    ),
    (
        "rules\n",
        "loop at least 1 us\nrules\n",
        "53:1: a second line 'loop'; the first is in line 6; join them [duplicate-section]",
    ),
    (
        "rules\n",
        'drive "x"\nrules\n',
        "53:1: a second line 'drive'; the first is in line 1; join them [duplicate-section]",
    ),
    (
        "rules\n",
        "stage\n  winding U\nrules\n",
        "53:1: a second section 'stage'; the first is in line 8; join them [duplicate-section]",
    ),
    (
        "rules\n",
        "modes UH\n  odd off\nrules\n",
        "53:1: a second section 'modes'; the first is in line 30; join them [duplicate-section]",
    ),
    (
        'drive "Greenhouse vent actuator, 24 V brushed motor"\n',
        "",
        "1:1: the line 'drive' is missing; begin the file with 'drive \"TITLE\"' [missing-section]",
    ),
    (
        'drive "Greenhouse vent actuator, 24 V brushed motor"\n',
        'let x = 1\ndrive "x"\n',
        "2:1: the line 'drive' is not the first of the file; move it to the top [misplaced-line]",
    ),
    (
        "writes one at a time, 0.4 us to 1.5 us apart, turn-offs first\n",
        "",
        "37:3: 'UH' and 'UL' change in one step here, but no line 'writes' says how; add a line 'writes', such as 'writes together' [missing-writes]",
    ),
    (
        "  UL  PB13  active high  rests low\n",
        "",
        "36:9: 'reset' releases every pin, but 'pins' has no line for 'UL'; add a line 'SWITCH PIN active LEVEL rests LEVEL' for each [missing-pins]",
    ),
]


@pytest.mark.parametrize(
    ("old", "new", "expected"), [*SYNTAX, *RESERVED, *QUANTITIES, *STAGE, *SIGNALS, *TABLE, *MOTION, *RULES, *WHOLE]
)
def test_mistakes_of_the_vent_actuator(old: str, new: str, expected: str | list[str]) -> None:
    lines = [expected] if isinstance(expected, str) else expected
    assert mistakes_of(vent((old, new))) == [_whole(line) for line in lines]


def _whole(line: str) -> str:
    """A message with the file, and with the kind of reserved words."""
    at_line, column, text = line.split(":", 2)
    kind = " [reserved-word]" if "is a reserved word" in text else ""
    return f"t.dseq:{at_line}:{column}: error:{text}{kind}"


def test_all_mistakes_are_reported_at_once() -> None:
    changes = [(old, new) for old, new, _ in (SYNTAX[4], STAGE[10], SIGNALS[1], TABLE[2], MOTION[10], RULES[0])]
    expected = [line for _, _, line in (SYNTAX[4], STAGE[10], SIGNALS[1], TABLE[2], MOTION[10], RULES[0])]
    assert mistakes_of(vent(*changes)) == [_whole(line) for line in expected if isinstance(line, str)]


@pytest.mark.parametrize(
    "section", ["stage", "modes UH     UL     VH     VL", "moves", "trips", "carriers", "pins", "parts", "paths"]
)
def test_a_broken_line_in_a_section_hides_what_would_follow_from_it(section: str) -> None:
    head = section.split()[0]
    place = VENT.index(f"\n{head}") + 1
    end = VENT.index("\n", place) + 1
    lines = VENT[end:].split("\n")
    broken = VENT[:end] + "\n".join([f"{lines[0]} ! ! !", *lines[1:]])
    found = mistakes_of(broken)
    assert len(found) == 1
    assert "the character '!' has no meaning here" in found[0]


def test_missing_sections() -> None:
    assert mistakes_of('drive "x"\n') == [
        f"t.dseq:1:1: error: the section '{one}' is missing; add a section '{one}' [missing-section]"
        for one in ("modes", "moves", "stage")
    ]


def test_empty_sections() -> None:
    found = mistakes_of('drive "x"\nstage\nmodes A\nmoves\n')
    assert found == [
        "t.dseq:2:1: error: the stage has no switch; add a line 'leg' or 'switch' [missing-switch]",
        "t.dseq:3:1: error: the table has no row; add a row 'MODE CELL CELL ...' [missing-row]",
        "t.dseq:3:7: error: unknown switch 'A' [unknown-name]",
        "t.dseq:4:1: error: no mode to start in; add a line 'start MODE' [missing-start]",
    ]


def test_free_cells_need_pins() -> None:
    found = mistakes_of(row_drive("A B", "m off free", "start m"))
    text = "'free' releases every pin, but 'pins' has no line for 'A', 'B'; add a line 'SWITCH PIN active LEVEL rests LEVEL'"
    assert found == [f"t.dseq:9:7: error: {text} for each [missing-pins]"]


def test_a_start_row_cannot_keep() -> None:
    found = mistakes_of(row_drive("A", "m keep", "start m"))
    text = (
        "the start row 'm' has for 'A' 'keep', but nothing was before it; start in a row of 'on', 'off' and 'free' only"
    )
    assert found == [f"t.dseq:10:7: error: {text} [wrong-start]"]


def test_sources_of_two_supplies_cannot_be_compared() -> None:
    text = row_drive("A", "m off with a above c", "start m").replace(
        "rails P N", "rails P N\n  sources a b\n  sources c d"
    )
    way_out = "'a' and 'c' are not two nodes of one 'sources' line; compare two sources of one supply"
    assert mistakes_of(text) == [f"t.dseq:10:12: error: {way_out} [same-name]"]


def test_a_number_where_a_ratio_is_needed_shows_the_way() -> None:
    text = row_drive("A", "m off", "start m", "let d = 1 us / 4 us", "carriers\n  c 10 kHz duty d")
    way_out = "a ratio is needed here, but 'd' is a plain number; multiply it by 100 %"
    assert mistakes_of(text) == [f"t.dseq:7:17: error: {way_out} [wrong-unit]"]
    assert mistakes_of(text.replace("4 us", "4 us * 100 %")) == []


# Writes, where they are needed


@pytest.mark.parametrize(
    ("rows", "moves", "line"),
    [
        ("a off off\nb on on", "start a\na -> b when x", 13),
        ("a off off\nb on off", "start a\na -> b when x\nset A on, B on", 13),
        ("a off off\nb on keep\nc keep on", "start a\na -> b when x\nb -> c when y\nc -> a when z", 16),
    ],
)
def test_writes_are_needed(rows: str, moves: str, line: int) -> None:
    text = "'A' and 'B' change in one step here, but no line 'writes' says how"
    way_out = "add a line 'writes', such as 'writes together'"
    expected = [f"t.dseq:{line}:1: error: {text}; {way_out} [missing-writes]"]
    assert mistakes_of(row_drive("A B", rows, moves, "")) == expected


def test_writes_are_needed_where_a_trip_cuts_into_a_move() -> None:
    text = row_drive(
        "A B", "a off off\nb off off", "start a\na -> b when x\nset A on\nset B on\nset A off\nset B off", ""
    )
    assert mistakes_of(text) == []
    found = mistakes_of(text + "trips\n  t from any -> b\n")
    assert [one.split(" error:")[0] for one in found] == ["t.dseq:19:3:"]


def test_writes_are_needed_after_what_a_row_keeps() -> None:
    rows = "a off off\nb on keep\nc keep on\nd off keep"
    moves = "start a\na -> b when x\nb -> c when y\nc -> d when z"
    assert mistakes_of(row_drive("A B", rows, moves, "")) == []
    found = mistakes_of(row_drive("A B", rows, moves + "\nc -> a when home", ""))
    assert [one.split(" error:")[0] for one in found] == ["t.dseq:18:1:"]


def test_writes_are_needed_where_a_break_input_cancels_held_writes() -> None:
    """A is written off but still follows the carrier; cancelled, its write is to be made again, with that of B."""
    rows, moves = "a off off\nb k off\nc off on", "start a\na -> b when x\nb -> a when y\nc -> a when z"
    more = "carriers\n  k 10 kHz duty 50 % {}\ntrips\n  t from a -> c at once\n    set B on\n    set B off\n"
    assert mistakes_of(row_drive("A B", rows, moves, "", more.format(""))) == []
    (found,) = mistakes_of(row_drive("A B", rows, moves, "", more.format("updates at rise")))
    assert "'t' cancels held writes, so that more may change in one step, but no line 'writes' says how" in found
    assert found.endswith("add a line 'writes', such as 'writes together' [missing-writes]")


def test_writes_are_needed_in_the_wait_of_a_cut_move() -> None:
    moves = "start a\na -> b when x\nset A on\nwait 1 us\nset A off\nset B on\ntrips\nt from any -> a"
    assert mistakes_of(row_drive("A B", "a off off\nb off on", moves, "")) == []
    moves = moves.replace("set A off\nset B on", "set B on\nset A off")
    found = mistakes_of(row_drive("A B", "a off off\nb off on", moves, ""))
    assert [one.split(" error:")[0] for one in found] == ["t.dseq:19:1:"]


def test_very_many_states_ask_for_writes() -> None:
    switches = [f"S{one}" for one in range(16)]
    rows = [f"m {' '.join(['off'] * 16)}", f"k {' '.join(['keep'] * 16)}"]
    moves = [
        "start m",
        "m -> k when go",
        *(f"k -> k when e{one}\nset {one} {cell}" for one in switches for cell in ("on", "off")),
    ]
    found = mistakes_of(row_drive(" ".join(switches), "\n".join(rows), "\n".join(moves), ""))
    text = "whether a step changes two switches is not settled, since the rows keep too many"
    assert found == [f"t.dseq:1:1: error: {text}; add a line 'writes', such as 'writes together' [missing-writes]"]


# Circles of moves that take no time


def circle(text: str, place: str) -> list[str]:
    words = f"the moves {text} can take no time and hear no event, so they could go round for ever"
    return [
        f"t.dseq:{place}: error: {words}; give one of them a wait, 'after' some time or 'when' an event [timeless-circle]"
    ]


@pytest.mark.parametrize(
    ("head", "moves", "way", "place"),
    [
        ("writes together", "a -> b\nb -> a", "a -> b -> a", "14:1"),
        ("writes together", "a -> b after up to 1 us\nwait up to 3 us\nb -> a", "a -> b -> a", "14:1"),
        ("writes together", "b -> b", "b -> b", "14:1"),
        ("writes one at a time, up to 1 us apart", "a -> b\nb -> a", "a -> b -> a", "14:1"),
        ("writes one at a time, 1 us apart", "a -> c\nc -> a", "a -> c -> a", "14:1"),
        ("writes together", "a -> b when x\nb -> c\nc -> b", "b -> c -> b", "15:1"),
        ("writes together", "a -> b\nb -> c\nc -> a", "a -> b -> c -> a", "14:1"),
    ],
)
def test_circles_that_take_no_time(head: str, moves: str, way: str, place: str) -> None:
    text = row_drive("A B", "a off off\nb on on\nc off on", f"start a\n{moves}", head)
    assert mistakes_of(text) == circle(way, place)


def test_a_circle_by_port_takes_no_time_where_all_pins_are_of_one_port() -> None:
    pins = "pins\n  A P1 active high rests low port X\n  B P2 active high rests low port {}"
    text = row_drive("A B", "a off off\nb on on", "start a\na -> b\nb -> a", "writes by port, 1 us apart", pins)
    assert mistakes_of(text.format("X")) == circle("a -> b -> a", "15:1")
    assert mistakes_of(text.format("Y")) == []


def test_checks_that_can_be_waived_are_the_verdicts() -> None:
    assert set(CHECKS) == {one.value for one in Check}

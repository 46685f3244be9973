"""The form `screen`: whole texts for a run worked out by hand, and what holds of every report."""

import re
from dataclasses import replace

import pytest
import report_cases as cases
from report_cases import DRIVE, FILE, MS, NS, US, at, modulated, outcome, renamed, waiving

from seqcheck.drive import Above, Command, Fixed, Interlock
from seqcheck.hazards import Hazard, Literal
from seqcheck.quantities import Interval
from seqcheck.reports import screen
from seqcheck.reports.pieces import Tone, visible, wrapped
from seqcheck.verdict import Act, Check, Event, Outcome, Replayed, Span, Trace, Undecided, Unsafe

LONG_HIGH, LONG_LOW = "a_very_long_switch_name_for_the_upper_side_of_leg_U", "another_very_long_switch_name"
REVERSAL = r"""bench.dseq  "Bench actuator, 24 V"
UNSAFE: 1 counterexample, 1 hazard proven, 1 warning

OVERLAP  bench.dseq:27:3
  P can be joined to N through UH and UL, for up to 5.1 us.
  To cure it: make this wait at least 10.1 us (5.1 us missing at
  bench.dseq:29:5).

  The run. t = 0 is where line 27 begins (on reverse_cmd: open -> close), 1.1 ms
  after the start.

                                                            command  conducts
      t / us  since    line  what happens                   UH  UL   UH  UL
   1   start                 settled in idle                off off  no  no
   2  -100    +1 ms      25  on open_cmd: idle -> open      on  off  no  no
                         20  set UH on
   3   -99.6  +400 ns    20  set VL on                      on  off  no  no
                         20  open is entered
   4   -98.5  +1.1 us        UH can conduct                 on  off  may no
   5   -96    +2.5 us        UH surely conducts             on  off  yes no
   6     0    +96 us     27  on reverse_cmd: open -> close  off off  may no
                         28  set UH off
   7     0.4  +400 ns    28  set VL off                     off off  may no
   8     5.4  +5 us      29  wait over, it took 5 us        off on   may no
                         21  set UL on
   9     6.9  +1.5 us    21  set VH on                      off on   may may
                         21  close is entered
                             UL can conduct
                             overlap begins
  10     9.4  +2.5 us        UL surely conducts             off on   may yes
  11    12    +2.6 us        UH surely does not conduct     off on   no  yes
                             overlap ends

  UH  command   ~~~\_______________________________________
      conducts  ===::::::::::::::::::::::::::::::::........
  UL  command   ___________/~~~~~~~~~~~~~~~~~~~~~~~~~~~~~~~
      conducts  ...................::::::::================
  overlap                          ################
                   '       '       '       '       '
  row              6       8       9       10      11
  t / us           0       5.4     6.9     9.4     12

  command: ~ on  _ off  ? either    conducts: = surely  : in doubt  . surely not
  From one instant to the next takes equal room, however long it lasts.

proven  1 shorting set: possible in no run
  Shown 1 by least times alone. However late the firmware is: all of them.

warning no-path  bench.dseq:12:3
  switch VL has no path.
  A way out: give it one in `paths`.

UNSAFE: bench.dseq: 1 counterexample, 1 hazard proven, 1 warning

A proof is about the file, not about the board.
"""
SHORTED = r"""bench.dseq  "Bench actuator, 24 V"
UNSAFE: 1 counterexample, 1 finding, 1 hazard undecided

SHORT  bench.dseq:22:3
  P can be joined to N through UH and UL, without end.
  Row 'brake' of the table (line 22) commands UH and UL together.
  To cure it: no wait cures this; row 'brake' must leave one of UH and UL off.

  The run. t = 0 is where line 26 begins (at once: idle -> brake).

                                                         command  conducts
     t / us  since    line  what happens                 UH  UL   UH  UL
  1   start                 settled in idle              off off  no  no
  2     0               26  at once: idle -> brake       on  off  no  no
                        22  set UH on
  3     1.5  +1.5 us    22  set UL on                    on  on   may no
                        22  brake is entered
                            UH can conduct
  4     3    +1.5 us        UL can conduct               on  on   may may
                            overlap begins, without end

  UH  command   ___/~~~~~~~~~~~~~~~~~~~~~~~
      conducts  ...........::::::::::::::::
  UL  command   ___________/~~~~~~~~~~~~~~~
      conducts  ...................::::::::
  overlap                          ########
                   '       '       '
  row              2       3       4
  t / us           0       1.5     3

  command: ~ on  _ off  ? either    conducts: = surely  : in doubt  . surely not
  From one instant to the next takes equal room, however long it lasts.

UNDECIDED  P to N through VH and VL
  Neither proven nor disproven. Limit reached: 200000 zones. Zones stored:
  200000.

ambiguous  bench.dseq:25:3
  two moves out of idle hear open_cmd.

UNSAFE: bench.dseq: 1 counterexample, 1 finding, 1 hazard undecided

A proof is about the file, not about the board.
"""
BANDS = r"""  UH  command   ~~~\___________/~~~\___/~~~\___/~~~\___/~~~\___/~~~\___/~~~\___
      conducts  ===::::::::::::::::::::::::::::::::::::::::::::::::::::::::::::
  UL  command   ___/~~~~~~~~~~~\___/~~~\___/~~~\___/~~~\___/~~~\___/~~~\___/~~~
      conducts  .......::::====::::::::::::::::::::::::::::::::::::::::::::::::
  overlap              ########################################################
                   '   '   '   '   '   '   '   '   '   '   '   '   '   '   '
  row              5   6   7   8   9   10  11  12  13  14  15  16  17  18  19
  t / us           5       9       15      25      35      45      55      65
                       6.5     10      20      30      40      50      60

  UH  command   ___/~~~\___________
      conducts  :::::::::::::::....
  UL  command   ~~~\___/~~~~~~~~~~~
      conducts  :::::::::::========
  overlap       ###############
                   '   '   '   '
  row              20  21  22  23
  t / us           70      82
                       75      87
"""


def text(*outcomes: Outcome) -> str:
    return screen.plain(screen.report(outcomes))


def test_a_reversal_with_too_short_a_wait_in_full() -> None:
    assert text(outcome(cases.OVERLAP, cases.SAFE_V, findings=(cases.NO_PATH,))) == REVERSAL


def test_a_short_in_a_row_in_full() -> None:
    assert text(outcome(cases.SHORT, cases.NOT_DECIDED, findings=(cases.AMBIGUOUS,))) == SHORTED


def test_a_picture_too_wide_is_drawn_in_bands() -> None:
    assert BANDS in text(outcome(modulated(8)))


ALL = [
    outcome(cases.OVERLAP, cases.SAFE_V, cases.SAFE_U, findings=(cases.NO_PATH, cases.AMBIGUOUS)),
    outcome(cases.SHORT, cases.NOT_DECIDED),
    outcome(modulated(1)),
    outcome(modulated(40)),
    outcome(modulated(3, LONG_HIGH, LONG_LOW), drive=renamed(high=LONG_HIGH, low=LONG_LOW)),
    outcome(cases.OVERLAP, drive=waiving("overlap", "U", "a bench fuse opens first")),
    outcome(),
]


def test_plain_holds_no_escape_and_only_ascii() -> None:
    assert re.fullmatch(r"[\n -~]*", text(*ALL))


def test_no_line_ends_in_blanks() -> None:
    assert not [row for row in text(*ALL).splitlines() if row != row.rstrip()]


def test_colours_change_no_text(monkeypatch: pytest.MonkeyPatch) -> None:
    lines = screen.report(ALL)
    painted = screen.coloured(lines)
    assert "\x1b[" in painted
    assert re.sub(r"\x1b\[[0-9;]*m", "", painted) == screen.plain(lines)
    for name, value in (("NO_COLOR", "1"), ("COLUMNS", "20"), ("TERM", "dumb")):
        monkeypatch.setenv(name, value)
    assert screen.coloured(lines) == painted


def test_control_characters_of_a_title_are_shown_not_sent() -> None:
    drive = replace(DRIVE, title="A\x1b[2Jä\u202e")
    assert text(outcome(drive=drive)).startswith(f'{FILE}  "A\\x1b[2Jä\\u202e"\n')
    assert visible("a\nb\tc") == "a\\nb\\tc"


@pytest.mark.parametrize("periods", [1, 2, 3, 4, 5, 6, 20])
def test_a_run_keeps_to_eighty_columns_and_loses_no_instant(periods: int) -> None:
    said = text(outcome(modulated(periods)))
    assert max(map(len, said.splitlines())) <= 80
    events = len(modulated(periods).trace.events)
    assert len(re.findall(r"main (?:rises|falls)", said)) == events
    drawn = [int(one) for row in re.findall(r"^  row +(.*)$", said, re.M) for one in row.split()]
    rows = [int(one) for one in re.findall(r"^ +(\d+) +(?:-?\d|start)", said.split("UH  command ")[0], re.M)]
    assert rows == list(range(1, len(rows) + 1))
    assert drawn == rows[4:]  # all from the first fall on, before which nothing is in doubt


def test_twelve_instants_make_one_band() -> None:
    said = text(outcome(modulated(3)))
    assert len(re.findall(r"^  row ", said, re.M)) == 1
    assert len(re.findall(r"^  row ", text(outcome(modulated(12))), re.M)) == 2


def test_long_names_are_whole_and_stand_behind_letters() -> None:
    said = text(ALL[4])
    assert f"  (a) is {LONG_HIGH}\n  (b) is {LONG_LOW}\n" in said
    assert re.search(r"^  \(a\)  command   ~~~\\", said, re.M)
    assert f"{LONG_HIGH}  on  off  may no\n" in said


def test_a_long_run_shows_every_row() -> None:
    said = text(outcome(modulated(40)))
    assert len(re.findall(r"main rises", said)) == 40
    assert "main falls" in said


def three_switches() -> Unsafe:
    """A `never UH and VL off and VH`: UH gets a pulse of no length and floats, a trip comes in between."""
    literals = Literal("UH"), Literal("VL", False), Literal("VH")
    events = (
        Event(0, Act.BEGINS, "", 2),
        Event(0, Act.WRITES, writes=(("UH", Fixed.ON),)),
        Event(1 * US, Act.ARRIVES, "overheat", place=at("overheat")),
        Event(2 * US, Act.BEGINS, "", 0, True),
        Event(2 * US, Act.WRITES, writes=(("UH", Fixed.FREE), ("VL", Fixed.OFF))),
        Event(2 * US, Act.ENTERS, "idle"),
        Event(3 * US, Act.UPDATES, "main", writes=(("VH", Fixed.ON),)),
        Event(3_123_456, Act.RESTS, "UH"),
        Event(4 * US, Act.CLEARS, "VH"),
    )
    trace = Trace(Hazard(literals, ()), (), events, 14 * US, 4500 * NS, 14 * US)
    commands: dict[str, tuple[tuple[int | None, Command], ...]] = {
        "UH": ((None, Command.OFF), (0, Command.ON), (0, Command.OFF), (2 * US, Command.UNKNOWN)),
        "VL": ((None, Command.ON), (2 * US, Command.OFF)),
        "VH": ((None, Command.OFF), (3 * US, Command.ON)),
    }
    possible: dict[Literal, tuple[Span, ...]] = {
        literals[0]: (Span(1500 * NS, None),),
        literals[1]: (Span(4 * US, None),),
        literals[2]: (Span(4500 * NS, 14 * US),),
    }
    replayed = Replayed(commands, possible, Span(4500 * NS, 14 * US))
    return Unsafe(trace.hazard, Check.TOGETHER, at("trips"), trace, replayed, MS)


def test_a_rule_about_three_switches() -> None:
    said = text(outcome(three_switches()))
    assert "UH can conduct, VL can be off and VH can conduct, all at once, for up to 1 ms." in said
    assert "In this run the overlap is 9.5 us." in said
    assert "t = 0 is where line 31 begins (trip overheat is taken: -> idle), 2 us" in said
    for words in (
        "on,off on  off  no     yes no",
        "trip overheat arrives",
        "set UH free, VL off",
        "main updates what is held",
        "held writes act: VH on",
        "pin PA8 of UH is at rest",
        "interlock lets VH through",
        "VL can be off",
    ):
        assert words in said
    picture = re.findall(r"^ .*(?:command|conducts) {2,3}(\S+)$", said, re.M)
    assert re.fullmatch(r"___\|_+\|\?+", picture[0])
    assert picture[1].strip(".:") == ""
    assert picture[3] == "=" * picture[3].count("=") + ":" * picture[3].count(":") + "." * picture[3].count(".")
    assert max(map(len, said.splitlines())) <= 80


def test_a_turn_off_still_under_way_keeps_a_turn_on_in_doubt() -> None:
    """UL goes off at 10 us and on at 15 us: the slowest turn-off is through at 22 us only, not at 15 + 4 us."""
    said = text(outcome(modulated(2)))
    assert re.search(r"22 .*UL surely conducts", said)
    assert not re.search(r" 19 .*UL surely conducts", said)


def test_without_a_cure_the_plain_fact_is_given() -> None:
    assert "To cure it: UH and UL must be kept apart up to 5.1 us longer." in text(
        outcome(replace(cases.OVERLAP, cure=None))
    )
    endless = replace(cases.SHORT, check=Check.OVERLAP)
    assert "once UH and UL are so together this run never parts them" in " ".join(text(outcome(endless)).split())


def test_waits_are_told_without_places_too() -> None:
    events = tuple(replace(one, place=None) for one in cases.REVERSAL.events)
    said = text(outcome(replace(cases.OVERLAP, trace=replace(cases.REVERSAL, events=events))))
    assert len(re.findall("wait over", said)) == 1
    assert re.search(r"^   8 +5.4 .* 29  wait over, it took 5 us", said, re.M)


def test_sources_and_interlocks_are_explained() -> None:
    hazard = replace(cases.LEG_U, needs=(frozenset({Above("a", "b")}), frozenset({Above("b", "c")})))
    drive = replace(DRIVE, interlocks=(Interlock(at("paths"), "UH", "UL", Interval(0, 0)),))
    said = text(outcome(replace(cases.OVERLAP, hazard=hazard), drive=drive))
    assert "It carries current while a is above b or b is above c." in said
    assert "A command is shown as the interlock passes it on." in said


def test_a_difference_of_delays_is_explained() -> None:
    part = replace(cases.COUPLER, difference=1300 * NS)
    drive = replace(DRIVE, paths=dict.fromkeys(cases.COLUMNS, (part,)))
    assert "the difference of coupler" in " ".join(text(outcome(cases.OVERLAP, drive=drive)).split())


def last_words(one: Outcome) -> str:
    return text(one).splitlines()[-3]


def test_the_last_word_on_a_file() -> None:
    assert last_words(outcome(cases.SAFE_U, cases.SAFE_V)) == "proven: bench.dseq: 2 hazards proven"
    assert (
        last_words(outcome(cases.SAFE_U, findings=(cases.NO_PATH,))) == "proven: bench.dseq: 1 hazard proven, 1 warning"
    )
    assert last_words(outcome(cases.SAFE_U, findings=(cases.AMBIGUOUS,))).startswith(
        "not in order: bench.dseq: 1 finding"
    )
    assert last_words(outcome(cases.SAFE_U, cases.NOT_DECIDED)).startswith("undecided: bench.dseq: 1 hazard undecided")
    assert last_words(outcome(cases.SHORT, cases.NOT_DECIDED)).startswith("UNSAFE: ")
    assert last_words(outcome()).endswith("no hazard was asked for, and nothing else was found")


@pytest.mark.parametrize(
    ("check", "name", "passes"),
    [
        ("overlap", "U", True),
        ("overlap", "UL", True),
        ("overlap", "reverse_cmd", True),
        ("overlap", "V", False),
        ("short", "U", False),
    ],
)
def test_a_waiver_lets_only_its_own_finding_pass(check: str, name: str, passes: bool) -> None:
    said = text(outcome(cases.OVERLAP, drive=waiving(check, name, "a bench fuse opens first")))
    assert ("Waived because: a bench fuse opens first." in said) is passes
    assert ("proven but for what is waived: " in said) is passes
    assert ("UNSAFE: " in said) is not passes


def test_how_it_was_proven() -> None:
    rule = replace(cases.SAFE_U, hazard=Hazard((Literal("UH"), Literal("VH")), ()))
    said = text(outcome(cases.SAFE_V, cases.SAFE_U, rule))
    assert "proven  2 shorting sets and 1 forbidden combination: possible in no run\n" in said
    assert "  Shown 1 by least times alone and 2 by 1624 zones. However late the firmware\n  is: 1 of 3.\n" in said


def test_undecided_never_looks_proven() -> None:
    lines = screen.report([outcome(cases.NOT_DECIDED)])
    said = screen.plain(lines)
    assert "UNDECIDED  P to N through VH and VL\n" in said
    assert not re.search(r"^proven", said, re.M)
    assert not [piece for line in lines for piece in line if piece.tone is Tone.GOOD]


def test_several_files_end_with_a_count() -> None:
    said = text(*ALL)
    assert said.splitlines()[-2] == "7 files: 5 UNSAFE, 2 proven."
    assert text().splitlines()[0] == "0 files."
    assert said.count("not about the board") == 1


def test_a_shorting_set_of_four_keeps_to_eighty_columns() -> None:
    names = ("T1", "T2", "T3", "T4")
    literals = tuple(Literal(name) for name in names)
    events = tuple(Event(9_876_543 * k, Act.WRITES, writes=((name, Fixed.ON),)) for k, name in enumerate(names, 1))
    start = 9_876_543 * 4 + 1500 * NS
    commands: dict[str, tuple[tuple[int | None, Command], ...]] = {
        name: ((None, Command.OFF), (9_876_543 * k, Command.ON)) for k, name in enumerate(names, 1)
    }
    possible: dict[Literal, tuple[Span, ...]] = {
        one: (Span(9_876_543 * k + 1500 * NS, None),) for k, one in enumerate(literals, 1)
    }
    trace = Trace(Hazard(literals, ("P", "O", "N")), (), events, start + 5 * US, start, None)
    verdict = Unsafe(
        trace.hazard, Check.OVERLAP, at("stage"), trace, Replayed(commands, possible, Span(start, None)), None
    )
    said = text(outcome(verdict, drive=renamed(**{name: name for name in names})))
    assert "P can be joined to O and N through T1, T2, T3 and T4, without end." in said
    assert max(map(len, said.splitlines())) <= 80
    assert len(re.findall(r"^  row ", said, re.M)) == 1
    assert re.search(r"^ +12  41\.006172 +T4 can conduct", said, re.M)


def test_reset_and_carriers_are_told() -> None:
    events = (
        Event(1 * MS, Act.BEGINS, "", 7),
        Event(1 * MS, Act.ENTERS, "reset", writes=(("UH", Fixed.FREE),)),
        Event(1 * MS + 1 * US, Act.OUTPUT, "main"),
        Event(1 * MS + 2 * US, Act.RISES, "main", writes=(("UL", Fixed.ON),)),
    )
    trace = replace(cases.REVERSAL, events=(*events, *cases.REVERSAL.events[4:]))
    said = text(outcome(replace(cases.OVERLAP, trace=trace)))
    for words in ("a run begins", "reset: every pin is released", "main: its dead time is over"):
        assert words in said
    assert re.search(r" main rises +on .*\n +held writes act: UL on\n", said)
    assert "on reverse_cmd: open -> close" in said  # not from the mode before, which no such move leaves


@pytest.mark.parametrize("verdict", [cases.OVERLAP, cases.NOT_DECIDED])
def test_the_verdict_stands_before_what_goes_on_at_length(verdict: Unsafe | Undecided) -> None:
    """In the second line, and at the end, where a terminal stops, once more with the file."""
    lines = text(outcome(verdict)).splitlines()
    last = next(line for line in reversed(lines) if "bench.dseq: " in line)
    assert lines[1] == last.replace("bench.dseq: ", "", 1)
    if isinstance(verdict, Unsafe):
        said = "\n".join(lines)
        assert said.index("To cure it") < said.index("The run.") < said.index("  overlap  ")


def test_a_number_and_its_unit_stay_together() -> None:
    for width in range(8, 60):
        rows = wrapped("after 5 us to 40.25 ms at 20 kHz within 2 % or 3 s of a thousand", width)
        assert " ".join(rows) == "after 5 us to 40.25 ms at 20 kHz within 2 % or 3 s of a thousand"
        assert not any(row[-1].isdigit() for row in rows), rows


def test_a_lane_is_as_bright_at_an_instant_as_beside_it() -> None:
    """Only where the command changes does the picture say so."""
    for found in screen.report([outcome(cases.OVERLAP)]):
        words = "".join(piece.text for piece in found)
        if "command   " in words and "_" in words:
            assert all(piece.tone is Tone.FAINT for piece in found if set(piece.text) == {"_"})

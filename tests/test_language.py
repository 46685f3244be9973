"""What a correct file is read as: the checked model, value by value."""

from fractions import Fraction

import pytest
from reading import FILE, VENT, drive_of, row_drive, vent

from seqcheck.drive import (
    Above,
    After,
    ApartRule,
    AtOnce,
    ClearsRule,
    Clock,
    Command,
    Conducts,
    CurrentInto,
    CurrentOut,
    Fixed,
    Follow,
    How,
    Interlock,
    Lasts,
    LastsRule,
    Leg,
    Level,
    MarginRule,
    Means,
    Mode,
    Move,
    NeverRule,
    Order,
    Part,
    Pin,
    Purpose,
    SetStep,
    Trip,
    Update,
    WaitStep,
    Waiver,
    When,
    Winding,
    Writes,
)
from seqcheck.quantities import INSTANT, Interval
from seqcheck.source import Place

ON, OFF, KEEP, FREE = Fixed.ON, Fixed.OFF, Fixed.KEEP, Fixed.FREE
US, MS = 10**6, 10**9


def at(line: int, column: int, end: int) -> Place:
    """A place within one line."""
    return Place(FILE, line, column, line, end)


# The whole file of the language's description


def test_head_lines_are_read_with_their_places() -> None:
    drive = drive_of(VENT)
    assert drive.title == "Greenhouse vent actuator, 24 V brushed motor"
    assert drive.place == at(1, 1, 53)
    assert drive.clock == Clock(at(3, 1, 46), Fraction(48_000_000), Fraction(1, 100), 2 * US)
    assert drive.writes == Writes(at(5, 1, 62), How.SINGLY, Interval(396_039, 1_515_152), Order.OFFS_FIRST)
    assert drive.loop == Interval(49_504_950, None)


def test_stage_is_read_with_its_legs() -> None:
    stage = drive_of(VENT).stage
    assert [(one.name, one.poles, one.conducts) for one in stage.switches] == [
        ("UH", (("P", "U"),), Conducts.DIODE),
        ("UL", (("U", "N"),), Conducts.DIODE),
        ("VH", (("P", "V"),), Conducts.DIODE),
        ("VL", (("V", "N"),), Conducts.DIODE),
    ]
    assert stage.legs[1] == Leg(at(11, 3, 15), "V", "VH", "VL", "P", "N")
    assert stage.windings == (Winding(at(12, 3, 14), ("U", "V"), False),)


def test_signal_path_is_read() -> None:
    drive = drive_of(VENT)
    fet = Part(at(16, 3, 53), "fet", Interval(20_000, 60_000), Interval(40_000, 130_000), None)
    assert drive.parts["fet"] == fet
    assert [one.name for one in drive.paths["VL"]] == ["coupler", "fet"]
    assert drive.pins["VH"] == Pin(at(24, 3, 56), "VH", "PA9", True, Level.LOW, Interval(5 * US, 40 * US), None)
    assert drive.pins["VL"].resting is Command.OFF
    main = drive.carriers["main"]
    assert main.period == Interval(49_504_950, 50_505_051)
    assert main.high == main.low == Interval(2_475_247, 47_979_798)
    assert (main.duty, main.dead, main.update) == ((Fraction(1, 20), Fraction(19, 20)), INSTANT, Update.AT_ONCE)


def test_table_is_read_and_reset_comes_last() -> None:
    drive = drive_of(VENT)
    assert drive.columns == ("UH", "UL", "VH", "VL")
    assert list(drive.modes) == ["idle", "open", "close", "hold", "reset"]
    assert drive.modes["open"] == Mode(at(32, 3, 34), "open", (Follow("main", False), OFF, OFF, ON), (), None)
    assert drive.modes["reset"].cells == (FREE,) * 4
    assert drive.start == "reset"


def test_moves_are_read_with_their_steps() -> None:
    moves = drive_of(VENT).moves
    assert len(moves) == 7
    assert moves[0] == Move(at(38, 3, 48), ("reset",), "idle", When("boot", 990_099_009, None), False, (), ())
    all_off = SetStep(at(42, 5, 16), (("UH", OFF), ("UL", OFF), ("VH", OFF), ("VL", OFF)))
    wait = WaitStep(at(43, 5, 16), Interval(15_841_584, 16_161_617))
    assert moves[3].steps == (all_off, wait)
    assert moves[3].place == at(41, 3, 40)
    assert moves[4].sources == ("open", "close")
    assert moves[6].trigger == After(Interval(1_980_198_019_801, 2_020_202_020_203))


def test_trips_are_read_with_where_they_arrive() -> None:
    overcurrent, overheat, watchdog = drive_of(VENT).trips
    everywhere = frozenset({"idle", "open", "close", "hold"})
    assert overcurrent == Trip(
        at(49, 3, 42), "overcurrent", everywhere - {"idle"}, everywhere, "idle", None, True, (), ()
    )
    assert (overheat.resting, overheat.origins) == (frozenset({"open", "close"}),) * 2
    assert (overheat.within, overheat.at_once) == (30 * US, False)
    assert (watchdog.resting, watchdog.origins, watchdog.at_once) == (everywhere, everywhere, True)


def test_rules_are_read() -> None:
    drive = drive_of(VENT)
    assert drive.rules == (
        MarginRule(at(54, 3, 25), 200_000),
        ClearsRule(at(55, 3, 43), "overheat", ("UH", "UL", "VH", "VL"), 60 * US),
        ApartRule(at(56, 3, 38), "open", "close", 10 * US),
    )
    assert drive.waivers == ()


# The form of a file


@pytest.mark.parametrize(
    "text",
    [
        "\ufeff" + VENT,
        VENT.replace("\n", "\r\n"),
        VENT.replace("\n", "\r"),
        VENT.rstrip("\n"),
        VENT.replace("drive", "\n\n   drive", 1).replace("\n\n   ", "", 1),
    ],
)
def test_line_ends_and_mark_change_nothing(text: str) -> None:
    assert drive_of(text) == drive_of(VENT)


def test_indentation_and_comments_change_only_places() -> None:
    text = "\n".join(line.strip() + '   # a comment with "quotes" and -> signs' for line in VENT.splitlines())
    drive = drive_of("# first\n" + text)
    assert drive.title == "Greenhouse vent actuator, 24 V brushed motor"
    assert drive.moves[3].place == at(42, 1, 38)
    assert [one.sources for one in drive.moves] == [one.sources for one in drive_of(VENT).moves]


def test_a_hash_in_quotes_is_no_comment() -> None:
    assert drive_of(vent(("Greenhouse vent", "Vent #3, # four"))).title.startswith("Vent #3, # four")


def test_tabs_are_space_and_one_column() -> None:
    assert drive_of(vent(("  rails P N", "\trails\tP\tN"))).stage.rails[0].place == at(9, 2, 11)


def test_columns_count_code_points() -> None:
    drive = drive_of(
        vent(
            ('drive "Greenhouse', 'drive "Größe 𝄞'),
        )
    )
    assert drive.place.end_column == len('drive "Größe 𝄞 vent actuator, 24 V brushed motor"') + 1


def test_words_that_never_compete_with_names_can_be_names() -> None:
    text = row_drive("high low", "coast off off\nbrake on keep\nlevel off on", "start coast\ncoast -> brake when time")
    drive = drive_of(text)
    assert list(drive.modes) == ["coast", "brake", "level"]
    assert drive.moves[0].trigger == When("time", 0, None)


# Heads


@pytest.mark.parametrize(
    ("line", "how", "gap", "order"),
    [
        ("together", How.TOGETHER, INSTANT, Order.ANY),
        ("one at a time, 1 us to 2 us apart", How.SINGLY, Interval(US, 2 * US), Order.ANY),
        ("one at a time, at least 1 us apart, turn-ons first", How.SINGLY, Interval(US, None), Order.ONS_FIRST),
        ("by port, up to 2us apart, in table order", How.BY_PORT, Interval(0, 2 * US), Order.TABLE),
        ("by port, 3 us apart, in any order", How.BY_PORT, Interval(3 * US, 3 * US), Order.ANY),
    ],
)
def test_writes_take_every_form(line: str, how: How, gap: Interval, order: Order) -> None:
    drive = drive_of(row_drive("A", "m off", "start m", f"writes {line}"))
    assert drive.writes == Writes(at(2, 1, 8 + len(line)), how, gap, order)


def test_clock_without_tolerance_or_lateness() -> None:
    drive = drive_of(row_drive("A", "m off", "start m", "clock 8 MHz"))
    assert drive.clock == Clock(at(2, 1, 12), Fraction(8_000_000), Fraction(0), None)


def test_clock_may_be_late_in_its_own_ticks() -> None:
    drive = drive_of(row_drive("A", "m off", "start m", "clock 3 MHz, late by at most 1 ticks"))
    assert drive.clock is not None
    assert drive.clock.late == 333_334


# Stages


def test_stage_takes_every_line() -> None:
    text = """drive "all"
stage
  rails P O N
  rails Q R
  sources a b c
  capacitor C D
  leg U S1 S2 between P and N
  leg V S3 S4 between C and D
  switch T from a to X, b to Y, c to Z two way
  switch W from a to X one way
  diode from O to X
  winding U star
  winding X must flow
modes S1 S2 S3 S4 T W
  m off off off off off off
moves
  start m
"""
    stage = drive_of(text).stage
    assert [one.nodes for one in stage.rails] == [("P", "O", "N"), ("Q", "R")]
    assert [one.nodes for one in stage.sources] == [("a", "b", "c")]
    assert [(one.positive, one.negative) for one in stage.capacitors] == [("C", "D")]
    assert [(one.upper, one.lower) for one in stage.legs] == [("P", "N"), ("C", "D")]
    assert stage.switches[4].poles == (("a", "X"), ("b", "Y"), ("c", "Z"))
    assert [one.conducts for one in stage.switches[3:]] == [Conducts.DIODE, Conducts.TWO_WAY, Conducts.ONE_WAY]
    assert [(one.start, one.end) for one in stage.diodes] == [("O", "X")]
    assert [(one.ends, one.must_flow) for one in stage.windings] == [(("U", "star"), False), (("X",), True)]


def test_a_leg_stands_between_the_outer_rails() -> None:
    leg = drive_of(vent(("rails P N", "rails P O N"))).stage.legs[0]
    assert (leg.upper, leg.lower) == ("P", "N")


# Paths, pins


def test_part_with_difference_and_zero_lower_bound() -> None:
    drive = drive_of(
        vent(("fet       on 20 ns to 60 ns", "fet on up to 60 ns"), ("to 130 ns", "to 130 ns difference at most 50 ns"))
    )
    assert drive.parts["fet"].on == Interval(0, 60_000)
    assert drive.parts["fet"].difference == 50_000


def test_a_switch_without_path_has_an_empty_one() -> None:
    drive = drive_of(vent(("UH UL VH VL  through", "UH UL VH through")))
    assert drive.paths["VL"] == ()
    assert list(drive.paths) == ["UH", "UL", "VH", "VL"]


def test_interlocks_with_and_without_dead_time() -> None:
    lines = "paths\n  interlock UH UL dead time 100 ns to 200 ns\n  interlock VH VL"
    drive = drive_of(vent(("paths", lines)))
    assert drive.interlocks == (
        Interlock(at(19, 3, 45), "UH", "UL", Interval(100_000, 200_000)),
        Interlock(at(20, 3, 18), "VH", "VL", INSTANT),
    )


def test_pin_with_port_and_unknown_rest() -> None:
    drive = drive_of(
        vent(("UL  PB13  active high  rests low", "UL PB13 active low rests unknown after up to 3 us port B"))
    )
    pin = drive.pins["UL"]
    assert (pin.active_high, pin.rests, pin.after, pin.port) == (False, Level.UNKNOWN, Interval(0, 3 * US), "B")
    assert pin.resting is Command.UNKNOWN


# Carriers


def carrier_of(line: str, clock: str = "") -> tuple[Interval | None, Interval | None, Interval]:
    """High, low and period of a carrier."""
    text = row_drive("A", "idle off\nrun c", "start idle", clock, f"carriers\n  c {line}")
    carrier = drive_of(text).carriers["c"]
    return carrier.high, carrier.low, carrier.period


def test_carrier_with_own_tolerance_instead_of_the_clocks() -> None:
    high, low, period = carrier_of("10 kHz within 25 % duty 50 %", "clock 1 MHz within 1 %")
    assert period == Interval(80 * US, 133_333_334)
    assert high == low == Interval(40 * US, 66_666_667)


def test_carrier_dead_time_is_widened_by_its_own_tolerance() -> None:
    text = row_drive(
        "A", "m off", "start m", "clock 1 MHz within 1 %", "carriers\n  c 10 kHz within 25 % duty 50 % dead time 3 us"
    )
    assert drive_of(text).carriers["c"].dead == Interval(2_400_000, 4 * US)


def test_duty_from_zero_lets_a_low_last() -> None:
    assert carrier_of("100 kHz duty 0 % to 40 %")[:2] == (Interval(1, 4 * US), Interval(6 * US, None))


def test_duty_up_to_all_lets_a_high_last() -> None:
    high, low, _ = carrier_of("100 kHz duty 60 % to 100 %", "clock 1 MHz within 25 %")
    assert high == Interval(4_800_000, None)
    assert low == Interval(800_000, 5_333_334)


def test_duty_over_everything_lets_both_last() -> None:
    assert carrier_of("100 kHz duty 0 % to 100 %")[:2] == (Interval(1, None), Interval(1, None))


def test_duty_of_exactly_zero_or_all_fixes_the_reference() -> None:
    assert carrier_of("100 kHz duty 0 %", "clock 1 MHz")[:2] == (None, Interval(US, None))
    assert carrier_of("100 kHz duty 100 %", "clock 1 MHz")[:2] == (Interval(US, None), None)


def test_a_pulse_lasts_at_least_a_tick() -> None:
    high, low, _ = carrier_of("100 kHz duty 1 % to 20 %", "clock 1 MHz")
    assert high == Interval(US, 2 * US)
    assert low == Interval(8 * US, 9_900_000)


@pytest.mark.parametrize(
    ("words", "update"),
    [
        ("", Update.AT_ONCE),
        ("updates at once", Update.AT_ONCE),
        ("updates at rise", Update.AT_RISE),
        ("updates within a period", Update.WITHIN_PERIOD),
    ],
)
def test_carrier_updates(words: str, update: Update) -> None:
    text = row_drive("A", "m off", "start m", "", f"carriers\n  c 10 kHz duty 50 % {words}")
    assert drive_of(text).carriers["c"].update is update


# Rows


def test_cells_facts_and_meanings() -> None:
    text = """drive "facts"
writes together
stage
  sources a b c
  rails P N
  leg U UH UL
  switch S from a to U one way
  winding U star
carriers
  m 10 kHz duty 50 %
modes UH UL S
  one  off  off  off
  two  m    ~m   keep  with current out of U
  tri  on   off  off   with a above b, b above c means level P
  tet  on   off  off   means drive U to star with a above b with current into U and a above b
  pen  off  off  off   means coast
  hex  off  on   on    means brake
moves
  start one
  one -> two when x
"""
    drive = drive_of(text)
    assert drive.modes["two"].cells == (Follow("m", False), Follow("m", True), KEEP)
    assert drive.modes["two"].known == (CurrentOut("U"),)
    assert drive.modes["tri"].known == (Above("a", "b"), Above("b", "c"))
    assert drive.modes["tri"].means == Means(at(14, 50, 63), Purpose.LEVEL, ("P",))
    assert drive.modes["tet"].known == (Above("a", "b"), CurrentInto("U"))
    assert drive.modes["tet"].means == Means(at(15, 24, 45), Purpose.DRIVE, ("U", "star"))
    assert [drive.modes[one].means.purpose for one in ("pen", "hex")] == [Purpose.COAST, Purpose.BRAKE]  # type: ignore[union-attr]


# Moves and trips

THREE = "a off\nb on\nc off"


def move_of(line: str, head: str = "") -> Move:
    """The first move of a small drive with the modes a, b and c."""
    return drive_of(row_drive("A", THREE, f"start a\n{line}", head)).moves[0]


@pytest.mark.parametrize(
    ("origin", "sources"),
    [
        ("a", ("a",)),
        ("c, a", ("c", "a")),
        ("b, b_", None),
        ("any", ("a", "c")),
        ("any but c", ("a",)),
        ("any but b", ("a", "c")),
        ("b", ("b",)),
    ],
)
def test_origins_of_moves(origin: str, sources: tuple[str, ...] | None) -> None:
    if sources is None:
        with pytest.raises(Exception, match="unknown mode 'b_'"):
            move_of(f"{origin} -> b when e")
    else:
        assert move_of(f"{origin} -> b when e").sources == sources


@pytest.mark.parametrize(
    ("words", "trigger"),
    [
        ("", AtOnce()),
        ("when e", When("e", 0, None)),
        ("when e earliest 1 ms", When("e", MS, None)),
        ("when e latest 1 ms", When("e", 0, MS)),
        ("when e earliest 0 s latest 2 ms", When("e", 0, 2 * MS)),
        ("after 3 us", After(Interval(3 * US, 3 * US))),
        ("after at least 3 us", After(Interval(3 * US, None))),
        ("after up to 3 us", After(Interval(0, 3 * US))),
    ],
)
def test_triggers(words: str, trigger: object) -> None:
    assert move_of(f"a -> b {words}").trigger == trigger


def test_earliest_is_rounded_down_and_latest_up() -> None:
    move = move_of("a -> b when e earliest 1 us latest 1 us", "clock 1 MHz within 10 %")
    assert move.trigger == When("e", 909_090, 1_111_112)


def test_unbroken_and_facts_of_a_move() -> None:
    move = move_of("a -> b when e unbroken with current out of P")
    assert move.unbroken
    assert move.known == (CurrentOut("P"),)


def test_steps_of_every_form() -> None:
    steps = move_of("a -> b when e\nset A keep\nwait at least 5 us\nset A off\nset all off").steps
    assert [one.writes if isinstance(one, SetStep) else one.time for one in steps] == [
        (("A", KEEP),),
        Interval(5 * US, None),
        (("A", OFF),),
        (("A", OFF),),
    ]



def test_a_trip_cannot_arrive_at_rest_in_its_own_target() -> None:
    text = row_drive("A", THREE, "start a", more="") + "trips\n  t from a, b -> a at once\n"
    trip = drive_of(text).trips[0]
    assert (trip.resting, trip.origins) == (frozenset({"b"}), frozenset({"a", "b"}))


def test_a_trip_from_any_but_some() -> None:
    text = row_drive("A", THREE, "start a", more="") + "trips\n  t from any but c -> a within 1 ns\n  set A off\n"
    trip = drive_of(text).trips[0]
    assert (trip.resting, trip.origins) == (frozenset({"b"}), frozenset({"a", "b"}))
    assert trip.within == 1000
    assert trip.steps == (SetStep(at(trip.place.line + 1, 3, 12), (("A", OFF),)),)


def test_reset_is_no_mode_where_nothing_uses_it() -> None:
    drive = drive_of(
        vent(
            ("start reset", "start idle"),
            ("  reset -> idle        when boot  earliest 1 ms\n", ""),
            ("  watchdog     from any -> reset\n", ""),
        )
    )
    assert list(drive.modes) == ["idle", "open", "close", "hold"]


def test_any_covers_reset_only_where_it_is_named() -> None:
    drive = drive_of(vent(("hold  -> idle        after 2 s", "any -> idle when panic\n  idle, reset -> hold when odd")))
    assert drive.moves[6].sources == ("open", "close", "hold")
    assert drive.moves[7].sources == ("idle", "reset")


# Rules


def test_rules_of_every_form_round_to_the_strict_side() -> None:
    rules = """rules
  margin at least 0.1 ps
  never UH and VH and VL off
  UH on at most 1.9 ps
  UH on at least 1.1 ps
  VL off at least 1.1 ps
  overheat clears UH within 1.9 ps
  open and reset at least 1.1 ps apart
  waive long-on for UH because "charge pump, not # bootstrap"
"""
    drive = drive_of(vent(("rules\n", rules)))
    assert drive.rules[:7] == (
        MarginRule(at(54, 3, 25), 1),
        NeverRule(at(55, 3, 29), (("UH", True), ("VH", True), ("VL", False))),
        LastsRule(at(56, 3, 23), "UH", Lasts.ON_AT_MOST, 1),
        LastsRule(at(57, 3, 24), "UH", Lasts.ON_AT_LEAST, 2),
        LastsRule(at(58, 3, 25), "VL", Lasts.OFF_AT_LEAST, 2),
        ClearsRule(at(59, 3, 35), "overheat", ("UH",), 1),
        ApartRule(at(60, 3, 39), "open", "reset", 2),
    )
    assert drive.waivers == (Waiver(at(61, 3, 62), "long-on", "UH", "charge pump, not # bootstrap"),)


# Flow: where `writes` is not needed


@pytest.mark.parametrize(
    ("rows", "moves"),
    [
        ("a off off\nb on off", "start a\na -> b when x\nb -> a when y"),
        ("a off off\nb on keep\nc keep on", "start a\na -> b when x\na -> c when y"),
        ("a off off\nb on on", "start a\na -> b when x\nset A on\nset B on"),
        (
            "a off off\nb on off\nc off on",
            "start a\na -> b when x\na -> c when y\nb, c -> a when z\ntrips\nt from any -> a",
        ),
        ("a off off\nb on off\nc on on", "start a\na -> b when x\nb -> c when y\nc -> b when z\nb -> a when z"),
    ],
)
def test_writes_may_be_missing_where_only_single_switches_change(rows: str, moves: str) -> None:
    assert drive_of(row_drive("A B", rows, moves, "")).writes is None


@pytest.mark.parametrize(
    ("head", "moves"),
    [
        ("writes together", "a -> b\nwait 1 ns\nb -> a"),
        ("writes together", "a -> b after up to 1 us\nb -> a when e"),
        ("writes one at a time, 1 ns apart", "a -> b\nb -> a"),
        ("writes together", "a -> b\nb -> a after 1 ps to 2 ps"),
    ],
)
def test_circles_of_moves_that_take_time_are_fine(head: str, moves: str) -> None:
    text = row_drive("A B", "a off off\nb on on", f"start a\n{moves}", head)
    assert len(drive_of(text).moves) == 2

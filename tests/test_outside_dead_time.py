"""Dead times from data sheets, manuals and public reports, against the whole program.

A gap is (t_on_command + on_min) − (t_off_command + off_max); safe when it is not negative. A gap of M must be proven,
and with the pause M + 1 ps shorter the overlap must be exactly 1 ps.
"""

from functools import partial
from pathlib import Path

import pytest
from outside import around, leg, meet, overlaps, unsafe
from reading import drive_of

from seqcheck.cli import main
from seqcheck.drive import WaitStep
from seqcheck.verdict import Check

PAIR = ("UH", "UL")
NS, US, MS = 1_000, 1_000_000, 1_000_000_000

# HCPL-4504 data sheet, dead-time section [seen]: off − on between −0.7 and 1.3 µs
COUPLER_SPANS = {"coupler": "on 0.2 us to 1.2 us off 0.5 us to 1.5 us"}
COUPLER_DIFFERENCE = {"coupler": "on 0.2 us to 2 us off 0.2 us to 2 us difference at most 1.3 us"}
# HCPL-3120 data sheet [memory]: ±350 ns
DRIVER_SPANS = {"coupler": "on 100 ns to 450 ns off 100 ns to 450 ns"}
DRIVER_DIFFERENCE = {"coupler": "on 100 ns to 500 ns off 100 ns to 500 ns difference at most 350 ns"}


@pytest.mark.parametrize(
    ("parts", "pause"),
    [
        (COUPLER_SPANS, "1.3 us"),
        (COUPLER_DIFFERENCE, "1.3 us"),
        (DRIVER_SPANS, "350 ns"),
        (DRIVER_DIFFERENCE, "350 ns"),
    ],
)
def test_a_turn_on_delayed_by_the_difference_just_never_overlaps(parts: dict[str, str], pause: str) -> None:
    enough, worse = around(partial(leg, parts), pause, 0)
    assert enough == {}
    assert worse == {PAIR: 1}


def test_a_bounded_difference_is_worth_more_than_the_spans() -> None:
    """Without it the same coupler overlaps for 2 − 0.2 − 1.3 µs [derived]."""
    plain = {name: times.split(" difference")[0] for name, times in COUPLER_DIFFERENCE.items()}
    assert overlaps(leg(plain, "1.3 us")) == {PAIR: 500 * NS}


@pytest.mark.parametrize(
    ("parts", "pause", "longest"),
    [
        (COUPLER_SPANS, "1.3 us", 2 * US),  # HCPL-4504 data sheet, dead-time section [seen]
        (DRIVER_SPANS, "350 ns", 700 * NS),  # HCPL-3120 data sheet [memory]
    ],
)
def test_longest_resulting_dead_time(parts: dict[str, str], pause: str, longest: int) -> None:
    assert meet(leg(parts, pause, to="down"), "UH off", "UL off") == longest


@pytest.mark.parametrize(
    ("off_max", "on_min", "driver_max", "driver_min", "dead", "margin"),
    [
        # Infineon AN2007-04 formula [memory]; delays FP40R12KT3 [seen]; a driver spread of 350 ns
        (520, 90, 850, 500, 936 * NS, 156 * NS),
        # [derived]
        (1000, 200, 500, 100, 1440 * NS, 240 * NS),
    ],
)
def test_calculated_dead_time_with_a_fifth_in_reserve(
    off_max: int, on_min: int, driver_max: int, driver_min: int, dead: int, margin: int
) -> None:
    """The formula is worked out by the language; the reserve of 20 % is what the prover finds left."""
    parts = {
        "driver": f"on {driver_min} ns to {driver_max} ns off {driver_min} ns to {driver_max} ns",
        "igbt": f"on {on_min} ns to {on_min + 50} ns off {off_max - 50} ns to {off_max} ns",
    }
    pause = f"({off_max} ns - {on_min} ns + {driver_max} ns - {driver_min} ns) * 1.2"
    wait = drive_of(leg(parts, pause)).moves[0].steps[1]
    assert isinstance(wait, WaitStep)
    assert (wait.time.lo, wait.time.hi) == (dead, dead)
    enough, worse = around(partial(leg, parts), pause, margin)
    assert enough == {}
    assert worse == {PAIR: 1}


def driver_and_igbt(t1: str, t2: str, t3: str, t4: str) -> dict[str, str]:
    """On after t1 and t2, off after t3 and t4."""
    return {"driver": f"on {t1} us off {t3} us", "igbt": f"on {t2} us off {t4} us"}


def test_real_dead_time_that_is_negative() -> None:
    """Hitachi IGBT Module Application Manual, eq. 28 [seen]: T_set − (t3 + t4) + (t1 + t2); numbers [derived]."""
    assert overlaps(leg(driver_and_igbt("0.10", "0.09", "0.50", "2.0"), "2.0 us")) == {PAIR: 310 * NS}


def test_real_dead_time_that_is_positive() -> None:
    """Hitachi IGBT Module Application Manual, eq. 28 [seen]; numbers [derived]."""
    enough, worse = around(partial(leg, driver_and_igbt("0.3", "0.2", "0.4", "1.2")), "3.0 us", 1900 * NS)
    assert enough == {}
    assert worse == {PAIR: 1}


TWO_MICROSECONDS = {"device": "on 100 ns to 200 ns off 100 ns to 2.1 us"}


def test_sixty_ticks_where_two_microseconds_are_needed() -> None:
    """Public issue report on a servo drive [seen]: 416.7 ns given, 1583.3 ns short; never rounded in favour."""
    (short_by,) = overlaps(leg(TWO_MICROSECONDS, "60 ticks", clock="clock 144 MHz")).values()
    assert short_by == 1_583_334  # 2 000 000 − 60 000 000 / 144 = 1 583 333.3


def test_two_hundred_eighty_eight_ticks_are_exactly_two_microseconds() -> None:
    """Public issue report on a servo drive [seen]."""
    enough, worse = around(partial(leg, TWO_MICROSECONDS, clock="clock 144 MHz"), "288 ticks", 0)
    assert enough == {}
    assert worse == {PAIR: 1}


SEVEN_HUNDRED = {"device": "on 50 ns to 80 ns off 60 ns to 750 ns"}


def test_ticks_before_the_clock_was_raised() -> None:
    """84 ticks of 84 MHz leave 300 ns [derived]."""
    enough, worse = around(partial(leg, SEVEN_HUNDRED, clock="clock 84 MHz"), "84 ticks", 300 * NS)
    assert enough == {}
    assert worse == {PAIR: 1}


def test_ticks_after_the_clock_was_raised() -> None:
    """84 ticks of 168 MHz are 200 ns short [derived]."""
    assert overlaps(leg(SEVEN_HUNDRED, "84 ticks", clock="clock 168 MHz")) == {PAIR: 200 * NS}


HIGH_LOW_SIDE = {"driver": "on 180 ns to 270 ns off 220 ns to 330 ns"}
"""A 600 V high/low-side driver: maker's data sheet class values [seen], answers [derived]."""


def test_high_low_side_driver() -> None:
    enough, worse = around(partial(leg, HIGH_LOW_SIDE), "150 ns", 0)
    assert enough == {}
    assert worse == {PAIR: 1}


def pin_writes(gap: str, order: str) -> str:
    """Two pin writes a gap apart, with nothing between."""
    writes = f"one at a time, {gap} apart, {order}"
    return leg(HIGH_LOW_SIDE, "0 ns", clock="clock 16 MHz", writes=writes, waits=False)


@pytest.mark.parametrize(("order", "overlap"), [("turn-ons first", 275 * NS), ("turn-offs first", 25 * NS)])
def test_two_pin_writes_of_two_cycles(order: str, overlap: int) -> None:
    assert overlaps(pin_writes("2 ticks", order)) == {PAIR: overlap}


def test_two_pin_writes_with_one_cycle_more() -> None:
    """187.5 ns leave 37.5 ns, so that 37.501 ns less are 1 ps short."""
    assert overlaps(pin_writes("3 ticks", "turn-offs first")) == {}
    assert overlaps(pin_writes("149.999 ns", "turn-offs first")) == {PAIR: 1}


def test_any_order_is_the_worst_order() -> None:
    """Where no order is given the turn-on may come first [derived]."""
    assert overlaps(pin_writes("3 ticks", "in any order")) == {PAIR: 337_500}


SLOW_COUPLER = {"coupler": "on 2 us to 10 us off 5 us to 60 us"}
"""Common practice (ranges), answers [derived]."""


def test_slow_coupler_with_a_short_pause() -> None:
    assert overlaps(leg(SLOW_COUPLER, "20 us")) == {PAIR: 38 * US}


@pytest.mark.parametrize(("pause", "margin"), [("58 us", 0), ("60 us", 2 * US)])
def test_slow_coupler_with_a_pause_that_does(pause: str, margin: int) -> None:
    enough, worse = around(partial(leg, SLOW_COUPLER), pause, margin)
    assert enough == {}
    assert worse == {PAIR: 1}


@pytest.mark.parametrize(
    ("pause", "code", "said"), [("20 us", 1, "38 us"), ("57.999999 us", 1, "1 ps"), ("58 us", 0, "proven")]
)
def test_slow_coupler_on_the_command_line(
    pause: str, code: int, said: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "slow.dseq"
    file.write_text(leg(SLOW_COUPLER, pause), encoding="utf-8")
    assert main(["lint", str(file)]) == code
    assert said in capsys.readouterr().out


# Star and delta contactors: never together; 50 ms pause for small ones [seen: Rockwell LVSAM-WP001A]


def star_delta(pause: str) -> str:
    """Opening 4 to 19 ms and 10 ms more for the arc, closing 12 to 22 ms."""
    return f"""\
drive "star-delta starter"
let pause = {pause}
writes together
stage
  sources L1 L2 L3
  switch main  from L1 to U1, L2 to V1, L3 to W1  two way
  switch star  from U2 to Y,  V2 to Y,  W2 to Y   two way
  switch delta from U2 to V1, V2 to W1, W2 to U1  two way
  winding U1 U2
  winding V1 V2
  winding W1 W2
parts
  contactor on 12 ms to 22 ms off 4 ms to 19 ms
  arc       on 0 ms           off 0 ms to 10 ms
paths
  main star delta through contactor, arc
modes    main star delta
  idle   off  off  off
  ramp   on   on   off
  full   on   off  on
moves
  start idle
  idle -> ramp  when start_cmd earliest 1 s
  ramp -> full  after 5 s
    set star off
    wait pause
  full -> idle  when stop_cmd
"""


CONTACTORS = ("main", "star", "delta")


def test_star_and_delta_without_a_pause() -> None:
    """[derived]"""
    assert overlaps(star_delta("0 ms")) == {CONTACTORS: 17 * MS}


@pytest.mark.parametrize(("pause", "margin"), [("17 ms", 0), ("40 ms", 23 * MS), ("50 ms", 33 * MS)])
def test_star_and_delta_with_a_pause(pause: str, margin: int) -> None:
    """Least pause 17 ms, and what longer ones leave [derived]."""
    enough, worse = around(star_delta, pause, margin)
    assert enough == {}
    assert worse == {CONTACTORS: 1}


# Pins at reset


def resting(active: str, rests: str) -> str:
    """A leg whose two drivers have pins of one kind, from power-up on."""
    return f"""\
drive "pins at reset"
writes together
stage
  rails P N
  leg U UH UL
parts
  driver on 180 ns to 270 ns off 220 ns to 330 ns
paths
  UH UL through driver
pins
  UH P1 active {active} rests {rests}
  UL P2 active {active} rests {rests}
modes  UH   UL
  idle off  off
moves
  start reset
  reset -> idle when boot earliest 1 ms
"""


@pytest.mark.parametrize(
    ("active", "rests"), [("high", "high"), ("high", "unknown"), ("low", "low"), ("low", "unknown")]
)
def test_pins_that_rest_on_short_from_the_start(
    active: str, rests: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Both drivers on while the controller does not drive its pins: a short from time 0; common practice."""
    found = unsafe(resting(active, rests))
    assert set(found) == {PAIR}
    assert found[PAIR].check is Check.SHORT
    assert found[PAIR].trace.overlap_from == 0
    assert found[PAIR].overlap is None
    file = tmp_path / "reset.dseq"
    file.write_text(resting(active, rests), encoding="utf-8")
    assert main(["lint", "--as", "lines", str(file)]) == 1
    assert "[short]" in capsys.readouterr().out


@pytest.mark.parametrize(("active", "rests"), [("high", "low"), ("low", "high")])
def test_pins_that_rest_off_are_proven(active: str, rests: str) -> None:
    """Common practice."""
    assert overlaps(resting(active, rests)) == {}

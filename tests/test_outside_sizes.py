"""Least dead times and other limits from data sheets, manuals and public reports, as `size` finds them.

The least pause is what the source says must lie between; one step of 1 ps less must fail. The marks of sources are
those of `outside`.
"""

from fractions import Fraction

import pytest
from outside import leg
from test_outside_dead_time import (
    COUPLER_DIFFERENCE,
    COUPLER_SPANS,
    DRIVER_DIFFERENCE,
    DRIVER_SPANS,
    HIGH_LOW_SIDE,
    SEVEN_HUNDRED,
    SLOW_COUPLER,
    TWO_MICROSECONDS,
    driver_and_igbt,
    star_delta,
)
from test_size import checks_beyond, range_of, sized

NS, US, MS = 1_000, 1_000_000, 1_000_000_000


def least_pause(text: str, step: str | None = "1 ps", name: str = "pause") -> Fraction | None:
    """The least value that holds; there must be no greatest one, and the next one fails by an overlap."""
    found = sized(text, name, step)
    low, high = range_of(found)
    assert high is None
    assert checks_beyond(found, low=True) == {"overlap"}
    return low


@pytest.mark.parametrize(
    ("parts", "least"),
    [
        (COUPLER_SPANS, 1300 * NS),  # HCPL-4504 data sheet, dead-time section [seen]
        (COUPLER_DIFFERENCE, 1300 * NS),  # the same, as a bounded difference [seen]
        (DRIVER_SPANS, 350 * NS),  # HCPL-3120 data sheet [memory]
        (DRIVER_DIFFERENCE, 350 * NS),  # the same [memory]
        (HIGH_LOW_SIDE, 150 * NS),  # 600 V high/low-side driver: class values [seen], answer [derived]
        (SLOW_COUPLER, 58 * US),  # common practice (ranges), answer [derived]
        (driver_and_igbt("0.10", "0.09", "0.50", "2.0"), 2310 * NS),  # Hitachi manual, eq. 28 [seen]; numbers [derived]
        (driver_and_igbt("0.3", "0.2", "0.4", "1.2"), 1100 * NS),  # the same
    ],
)
@pytest.mark.parametrize("today", ["100 us", "1 ns"])
def test_least_dead_time(parts: dict[str, str], least: int, today: str) -> None:
    """Whether today's value is far above or too small."""
    assert least_pause(leg(parts, today)) == least


@pytest.mark.parametrize(
    ("off_max", "on_min", "driver_max", "driver_min", "dead"),
    [
        (520, 90, 850, 500, 936 * NS),  # Infineon AN2007-04 formula [memory]; delays FP40R12KT3 [seen]
        (1000, 200, 500, 100, 1440 * NS),  # [derived]
    ],
)
def test_calculated_dead_time_is_the_least_with_a_fifth_more(
    off_max: int, on_min: int, driver_max: int, driver_min: int, dead: int
) -> None:
    """The formula's 1.2 is its reserve: with the least pause times 1.2 the formula's dead time comes out."""
    parts = {
        "driver": f"on {driver_min} ns to {driver_max} ns off {driver_min} ns to {driver_max} ns",
        "igbt": f"on {on_min} ns to {on_min + 50} ns off {off_max - 50} ns to {off_max} ns",
    }
    low = least_pause(leg(parts, f"{dead} ps"))
    assert low is not None
    assert low * Fraction(12, 10) == dead


@pytest.mark.parametrize("today", ["60 ticks", "400 ticks"])
def test_two_hundred_eighty_eight_ticks_are_needed(today: str) -> None:
    """Public issue report on a servo drive [seen]: 2 us are exactly 288 ticks of 144 MHz; 60 were written."""
    tick = Fraction(US, 144)
    assert least_pause(leg(TWO_MICROSECONDS, today, clock="clock 144 MHz"), None) == 288 * tick


def test_how_far_the_clock_may_be_raised() -> None:
    """84 ticks are the 700 ns that are needed up to 120 MHz [derived]: at 84 MHz they do, at 168 MHz they do not."""
    text = leg(SEVEN_HUNDRED, "84 ticks", clock="let rate = {} MHz\nclock rate")
    for today, holds in (("84", True), ("168", False)):
        found = sized(text.format(today), "rate", "1 Hz")
        assert found.holds == holds
        assert range_of(found)[1] == 120 * 10**6
        assert checks_beyond(found, low=False) == {"overlap"}


def test_the_pause_between_star_and_delta() -> None:
    """Opening 4 to 19 ms, closing 12 to 22 ms, 10 ms for the arc: at least 17 ms [derived]; 50 ms are used for small
    contactors [seen: Rockwell LVSAM-WP001A]."""
    assert least_pause(star_delta("50 ms"), "1 us") == 17 * MS


def test_how_long_a_bootstrap_supply_lasts() -> None:
    """(C dV − Q_gate − Q_ls) / I = (100 nF · 1.0 V − 50 nC − 5 nC) / 200 uA = 225 us: the high side may be on for no
    longer [derived from the charge balance in Fairchild AN-6076]."""
    text = """\
drive "bootstrap"
let pulse = 100 us
writes together
stage
  rails P N
  leg U UH UL
parts
  driver on 180 ns to 270 ns off 220 ns to 330 ns
paths
  UH UL through driver
modes  UH   UL
  low  off  on
  high on   off
moves
  start low
  low -> high when go earliest 1 ms
    set all off
    wait 1 us
  high -> low after up to pulse
    set all off
    wait 1 us
rules
  UH on at most 225 us
"""
    found = sized(text, "pulse", "1 ps")
    assert range_of(found) == (0, 225 * US)
    assert checks_beyond(found, low=False) == {"long-on"}

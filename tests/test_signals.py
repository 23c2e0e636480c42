"""Signals: what they are worth, the pressure they stand for, and the range to set for them."""

from __future__ import annotations

import math

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from tankcalc import units
from tankcalc.errors import InputError
from tankcalc.signals import (
    STEPS,
    covers,
    current_from_share,
    measured_current_a,
    pressure_from_share,
    range_to_set,
    share_from_pressure_pa,
    signal_from_current_a,
    signal_from_share,
    status,
)

PRESSURES = st.floats(-1e7, 1e7)


def test_half_the_signal_is_half_the_range() -> None:
    # Worked by hand: 12 mA is half of 4 to 20 mA, and 50 kPa half of 0 to 100 kPa.
    signal = signal_from_current_a(0.012)
    assert signal.status == "good"
    assert pressure_from_share(signal.share, (0.0, 100e3)) == pytest.approx(50_000.0, abs=1e-9)


@pytest.mark.parametrize(
    ("milliampere", "percent", "worth"),
    [
        # The bands of NAMUR NE 43, from secondary texts.
        ("0 mA", "-25 %", "failed"),
        ("3.599 mA", "-2.507 %", "failed"),
        ("3.6 mA", "-2.5 %", "uncertain"),
        ("3.799 mA", "-1.257 %", "uncertain"),
        ("3.8 mA", "-1.25 %", "saturated"),
        ("3.999 mA", "-0.01 %", "saturated"),
        ("4 mA", "0 %", "good"),
        ("12 mA", "50 %", "good"),
        ("20 mA", "100 %", "good"),
        ("20.001 mA", "100.01 %", "saturated"),
        ("20.5 mA", "103.125 %", "saturated"),
        ("20.501 mA", "103.132 %", "uncertain"),
        ("21 mA", "106.25 %", "uncertain"),
        ("21.001 mA", "106.257 %", "failed"),
        ("1 A", "6225 %", "failed"),
    ],
)
def test_the_bands_at_their_edges(milliampere: str, percent: str, worth: str) -> None:
    assert signal_from_current_a(units.si(milliampere, "current")).status == worth
    assert signal_from_share(units.si(percent, "fraction")).status == worth


@pytest.mark.parametrize("share", [math.nan, math.inf, -math.inf])
def test_what_is_no_number_is_no_signal(share: float) -> None:
    assert status(share) == "failed"
    assert measured_current_a(share) is None


@given(st.floats(0.0, 0.1))
def test_current_to_share_and_back(current_a: float) -> None:
    back = current_from_share(signal_from_current_a(current_a).share)
    assert back == pytest.approx(current_a, rel=1e-12, abs=1e-15)


@given(st.floats(-0.1, 1.2), PRESSURES, PRESSURES)
def test_share_to_pressure_and_back(share: float, lrv: float, urv: float) -> None:
    assume(abs(urv - lrv) > 1e-3 * max(abs(lrv), abs(urv), 1.0))
    pressure = pressure_from_share(share, (lrv, urv))
    assert share_from_pressure_pa(pressure, (lrv, urv)) == pytest.approx(share, abs=1e-11)


def test_a_range_set_the_other_way_round_counts_down() -> None:
    assert share_from_pressure_pa(25_000.0, (100e3, 0.0)) == pytest.approx(0.75)
    assert covers((100e3, 0.0), 0.0, 100e3)


def test_a_range_without_width_has_no_signal() -> None:
    with pytest.raises(InputError, match="both ends of the range"):
        share_from_pressure_pa(1.0, (5.0, 5.0))


@pytest.mark.parametrize(
    ("lowest", "highest", "unit", "lrv", "urv"),
    [
        (0.0, 120_737.6, 1000.0, 0.0, 125_000.0),
        (0.0, 100_000.0, 1000.0, 0.0, 100_000.0),
        (0.0, 100_000.1, 1000.0, 0.0, 105_000.0),
        (-94_176.0, -10_791.0, 1000.0, -96_000.0, -10_000.0),
        (101_325.0, 171_336.0, 1000.0, 100_000.0, 172_000.0),
        # 18.8532 psi over 20 steps is 0.94 psi: in halves.
        (0.0, 18.8532 * 6894.757, 6894.757, 0.0, 19.0 * 6894.757),
    ],
)
def test_ranges_to_set_by_hand(
    lowest: float, highest: float, unit: float, lrv: float, urv: float
) -> None:
    found = range_to_set(lowest, highest, unit)
    assert (found.lrv_pa, found.urv_pa) == pytest.approx((lrv, urv), abs=1e-6)


@given(PRESSURES, st.floats(1e-2, 1e7), st.sampled_from([1.0, 1000.0, 1e6, 6894.757]))
def test_a_range_to_set_holds_its_readings_and_little_more(
    lowest: float, width: float, unit: float
) -> None:
    highest = lowest + width
    assume(highest - lowest > 1e-6 * abs(lowest))
    found = range_to_set(lowest, highest, unit)
    assert covers((found.lrv_pa, found.urv_pa), lowest, highest)
    assert lowest - found.lrv_pa < found.step_pa * (1.0 + 1e-6)
    assert found.urv_pa - highest < found.step_pa * (1.0 + 1e-6)
    count = (highest - lowest) / found.step_pa
    assert STEPS * (1.0 - 1e-9) <= count <= 2.5 * STEPS * (1.0 + 1e-9)
    first = f"{found.step_pa / unit:.6e}"
    assert first.split("e")[0] in ("1.000000", "2.000000", "5.000000")

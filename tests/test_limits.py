"""Levels of concern: room, distances between levels, and time to a limit."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import upright

from tankcalc.errors import InputError, RangeError
from tankcalc.geometry import (
    FlatEnd,
    Vessel,
    box,
    horizontal_cylinder,
    sphere,
    stack,
    vertical_cylinder,
)
from tankcalc.limits.levels import (
    LEAST_DISTANCE_M,
    LEAST_RESPONSE_S,
    distances,
    highest_level_m,
    limit_named,
    limit_words,
    pumpable_m3,
    spacing_notices,
    ullage_volume_m3,
)
from tankcalc.limits.times import duration, time_to, times_to_limits
from tankcalc.tank import LIMIT_ORDER

UPRIGHT = vertical_cylinder([(15.0, 20.0)], FlatEnd(), FlatEnd())
AREA_M2 = math.pi * 100.0
PER_HOUR = 1.0 / 3600.0
VESSELS: dict[str, Vessel] = {
    "upright": UPRIGHT,
    "sphere": sphere(12.0),
    "lying": horizontal_cylinder(2.8, 9.0, FlatEnd(), FlatEnd()),
    "hopper": stack([(3.0, 0.4, 4.0), (5.0, 4.0, 4.0)]),
    "box": box(12.0, 5.0, 3.5, floor_fall_m=0.3),
}
LIMITS = {"minimum_working": 0.9, "maximum_working": 13.6, "high_high": 14.0, "critical_high": 14.5}


def test_the_names_are_spoken_and_understood() -> None:
    assert limit_words("overfill_action") == "overfill action"
    for name in LIMIT_ORDER:
        assert limit_named(limit_words(name)) == limit_named(name.upper()) == name
    assert limit_named("13.6 m") is None


def test_room_ullage_and_pumpable_of_an_upright_tank() -> None:
    tank = upright(limits_m=LIMITS)
    found = {one.limit: one for one in distances(tank, 10.0)}
    assert list(found) == list(LIMITS)
    assert found["maximum_working"].room_m3 == pytest.approx(3.6 * AREA_M2, rel=1e-12)
    assert found["minimum_working"].room_m3 == pytest.approx(-9.1 * AREA_M2, rel=1e-12)
    assert ullage_volume_m3(tank.vessel, 10.0) == pytest.approx(5.0 * AREA_M2, rel=1e-12)
    assert pumpable_m3(tank, 10.0) == pytest.approx(9.1 * AREA_M2, rel=1e-12)
    assert pumpable_m3(tank, 0.5) == pytest.approx(-0.4 * AREA_M2, rel=1e-12)
    assert pumpable_m3(upright(), 10.0) is None


def test_a_corrected_shell_corrects_the_room() -> None:
    tank = upright(limits_m=LIMITS)
    plain, warm = distances(tank, 10.0)[-1], distances(tank, 10.0, 1.001)[-1]
    assert warm.room_m3 == pytest.approx(1.001 * plain.room_m3, rel=1e-12)


def test_room_outside_the_vessel_is_refused() -> None:
    with pytest.raises(RangeError):
        distances(upright(limits_m=LIMITS), 15.5)


def test_high_high_of_the_worked_check() -> None:
    # Worked by hand: D 20 m, 600 m3/h, critical high 14.500 m, 15 min -> 14.022 m.
    highest = highest_level_m(UPRIGHT, 14.5, 600.0 * PER_HOUR, 900.0)
    assert highest == pytest.approx(14.022, abs=0.0006)
    assert highest == pytest.approx(14.5 - 150.0 / AREA_M2, rel=1e-12)


def test_the_least_of_time_and_distance_count() -> None:
    quick = highest_level_m(UPRIGHT, 14.5, 600.0 * PER_HOUR, 60.0)
    assert quick == pytest.approx(14.5 - 600.0 * PER_HOUR * LEAST_RESPONSE_S / AREA_M2, rel=1e-12)
    # 60 m3/h for 5 min is 16 mm here: 75 mm is more.
    assert highest_level_m(UPRIGHT, 14.5, 60.0 * PER_HOUR, None) == pytest.approx(14.425)
    assert highest_level_m(UPRIGHT, 14.5, None, None) == pytest.approx(14.425)


def test_a_tank_too_small_for_its_inflow_has_no_such_level() -> None:
    small = vertical_cylinder([(2.0, 1.0)], FlatEnd(), FlatEnd())
    assert highest_level_m(small, 1.9, 600.0 * PER_HOUR, 900.0) is None
    assert highest_level_m(small, 0.05, None, None) is None


@given(
    name=st.sampled_from(sorted(VESSELS)),
    upper=st.floats(0.2, 1.0),
    minutes=st.floats(0.0, 60.0),
    share=st.floats(0.001, 2.0),
)
def test_the_response_is_exact_for_every_shape(
    name: str, upper: float, minutes: float, share: float
) -> None:
    vessel = VESSELS[name]
    upper_m = vessel.z_min + upper * (vessel.z_max - vessel.z_min)
    inflow = share * vessel.capacity / 3600.0
    found = highest_level_m(vessel, upper_m, inflow, 60.0 * minutes)
    seconds = max(60.0 * minutes, LEAST_RESPONSE_S)
    if found is None:
        no_time = inflow * seconds > vessel.volume(upper_m)
        assert no_time or upper_m - LEAST_DISTANCE_M < vessel.z_min
        return
    assert upper_m - found >= LEAST_DISTANCE_M - 1e-9
    left = vessel.volume(upper_m) - vessel.volume(found)
    assert left >= inflow * seconds - 1e-9 * vessel.capacity
    if upper_m - found > LEAST_DISTANCE_M + 1e-9:
        assert left == pytest.approx(inflow * seconds, abs=1e-9 * vessel.capacity)


def test_levels_too_close_are_told_with_the_highest_place() -> None:
    limits = {"maximum_working": 13.6, "high_high": 14.1, "critical_high": 14.5}
    fast = upright(limits_m=limits, largest_in_m3_s=600.0 * PER_HOUR, response_time_s=900.0)
    (notice,) = spacing_notices(fast)
    assert (notice.code, notice.reading, notice.refuses) == ("limits_too_close", "high_high", False)
    assert "14.022 m is the highest that leaves 15 min (the response time)" in notice.message
    assert "complies" not in notice.message
    unstated = upright(limits_m=limits | {"high_high": 14.45})
    assert "the least distance, 0.075 m" in spacing_notices(unstated)[0].message
    assert spacing_notices(upright(limits_m=LIMITS)) == ()
    assert spacing_notices(upright(limits_m={"high_high": 14.0})) == ()


def test_a_level_that_no_place_leaves_time_for_is_told() -> None:
    limits = {"high_high": 14.0, "critical_high": 14.5}
    flood = upright(limits_m=limits, largest_in_m3_s=100.0)
    assert "no place of the high-high level leaves 5 min" in spacing_notices(flood)[0].message


def test_time_of_the_worked_sphere() -> None:
    # Worked by hand: R 6 m, 5 -> 9 m at 120 m3/h: 3.526 h (by the area at 5 m: 3.665 h).
    arrival = time_to(VESSELS["sphere"], 5.0, 9.0, 120.0 * PER_HOUR)
    assert arrival.expected_s is not None
    assert arrival.expected_s / 3600.0 == pytest.approx(3.526, abs=0.0005)
    volume = math.pi * (9.0**2 * (6.0 - 3.0) - 5.0**2 * (6.0 - 5.0 / 3.0))
    assert arrival.expected_s == pytest.approx(volume / (120.0 * PER_HOUR), rel=1e-10)
    assert arrival.earliest_s == arrival.latest_s == arrival.expected_s


def test_early_and_late_by_hand() -> None:
    # 100 m2, 10 m to go, 100 +/- 10 m3/h (one standard uncertainty: 5), level 0.1 m: by hand.
    vessel = box(10.0, 10.0, 12.0)
    arrival = time_to(
        vessel,
        1.0,
        11.0,
        100.0 * PER_HOUR,
        level_uncertainty_m=0.1,
        flow_uncertainty_m3_s=5.0 * PER_HOUR,
    )
    hours = [
        None if t is None else t / 3600.0
        for t in (arrival.earliest_s, arrival.expected_s, arrival.latest_s)
    ]
    assert hours == pytest.approx([980.0 / 110.0, 10.0, 1020.0 / 90.0])


def test_emptying_to_a_low_limit() -> None:
    tank = upright(limits_m=LIMITS)
    low, *high = times_to_limits(tank, 10.0, -300.0 * PER_HOUR, level_uncertainty_m=0.01)
    assert low.expected_s == pytest.approx(9.1 * AREA_M2 / (300.0 * PER_HOUR))
    assert low.earliest_s == pytest.approx(9.08 * AREA_M2 / (300.0 * PER_HOUR))
    assert low.latest_s == pytest.approx(9.12 * AREA_M2 / (300.0 * PER_HOUR))
    for one in high:
        assert (one.expected_s, one.earliest_s, one.latest_s) == (None, None, None)
        assert one.words().endswith("not on the way there")


def test_a_rate_that_may_be_nothing_has_no_latest_time_and_never_infinity() -> None:
    arrival = time_to(UPRIGHT, 5.0, 10.0, 10.0 * PER_HOUR, flow_uncertainty_m3_s=5.0 * PER_HOUR)
    assert arrival.latest_s is None
    assert arrival.earliest_s == pytest.approx(5.0 * AREA_M2 / (20.0 * PER_HOUR))
    assert "may never be reached" in arrival.words()
    away = time_to(UPRIGHT, 5.0, 10.0, -PER_HOUR, flow_uncertainty_m3_s=5.0 * PER_HOUR)
    assert away.expected_s is None
    assert away.earliest_s == pytest.approx(5.0 * AREA_M2 / (9.0 * PER_HOUR))
    assert "expected" not in away.words()
    still = time_to(UPRIGHT, 5.0, 10.0, 5e-324)
    assert (still.expected_s, still.earliest_s, still.latest_s) == (None, None, None)


def test_a_level_within_its_uncertainty_of_the_limit_may_be_there_now() -> None:
    arrival = time_to(UPRIGHT, 13.99, 14.0, 0.1, level_uncertainty_m=0.02)
    assert arrival.earliest_s == 0.0
    assert not arrival.passed
    assert time_to(UPRIGHT, 14.99, 15.0, 0.1, level_uncertainty_m=0.02).earliest_s == 0.0


def test_a_limit_that_is_passed_is_told_so() -> None:
    tank = upright(limits_m=LIMITS)
    by_name = {one.limit: one for one in times_to_limits(tank, 14.2, 0.1)}
    assert by_name["high_high"].passed
    assert by_name["maximum_working"].words() == "maximum working level: reached already"
    assert not by_name["critical_high"].passed
    assert times_to_limits(tank, 0.5, 0.1)[0].passed


def test_what_lies_beyond_the_next_reading_is_marked() -> None:
    marks = [
        time_to(UPRIGHT, 5.0, 6.0, 600.0 * PER_HOUR, next_reading_s=s).extrapolates
        for s in (None, 3600.0, 1000.0)
    ]
    assert marks == [None, False, True]
    beyond = time_to(UPRIGHT, 5.0, 6.0, 600.0 * PER_HOUR, next_reading_s=1000.0)
    assert "beyond the next planned reading" in beyond.words()


@pytest.mark.parametrize(
    "wrong",
    [
        {"flow_m3_s": math.nan},
        {"flow_m3_s": math.inf},
        {"flow_m3_s": 1.0, "level_uncertainty_m": -0.1},
        {"flow_m3_s": 1.0, "flow_uncertainty_m3_s": math.nan},
    ],
)
def test_what_is_no_flow_is_refused(wrong: dict[str, float]) -> None:
    with pytest.raises(InputError):
        time_to(UPRIGHT, 5.0, 6.0, **wrong)


def test_levels_outside_the_vessel_are_refused() -> None:
    with pytest.raises(RangeError):
        time_to(UPRIGHT, 5.0, 15.2, 1.0)


@given(
    name=st.sampled_from(sorted(VESSELS)),
    ends=st.tuples(st.floats(0.0, 1.0), st.floats(0.0, 1.0)),
    flow=st.floats(0.001, 10.0),
    u_level=st.floats(0.0, 0.1),
    u_flow=st.floats(0.0, 1.0),
)
def test_early_is_before_expected_is_before_late(
    name: str, ends: tuple[float, float], flow: float, u_level: float, u_flow: float
) -> None:
    vessel = VESSELS[name]
    z = [vessel.z_min + share * (vessel.z_max - vessel.z_min) for share in ends]
    way = 1.0 if z[1] >= z[0] else -1.0
    arrival = time_to(
        vessel,
        z[0],
        z[1],
        way * flow,
        level_uncertainty_m=u_level,
        flow_uncertainty_m3_s=u_flow,
    )
    assert arrival.earliest_s is not None
    assert arrival.expected_s is not None
    assert 0.0 <= arrival.earliest_s <= arrival.expected_s
    if arrival.latest_s is None:
        assert flow <= 2.0 * u_flow
    else:
        assert arrival.expected_s <= arrival.latest_s
    # The way there and the time it takes give the volume between: an inverse.
    moved = abs(vessel.volume(z[1]) - vessel.volume(z[0]))
    assert arrival.expected_s * flow == pytest.approx(moved, abs=1e-9 * vessel.capacity)


def test_durations_round_to_the_safe_side() -> None:
    assert duration(3599.0) == "59 min"
    assert duration(3541.0, up=True) == "1 h 0 min"
    assert duration(60.0, up=True) == duration(60.0) == "1 min"
    assert duration(90_000.0) == "1 d 1 h 0 min"

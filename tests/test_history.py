"""One reading against the earlier ones of the same tank."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest
from tanks import transmitters, upright

from tankcalc.consistency.history import Moment, against_history
from tankcalc.readings import Readings

HOUR_US = 3_600_000_000
TANK = upright(
    transmitters=transmitters(p1=0.5, p2=2.5),
    largest_in_m3_s=0.05,
    largest_out_m3_s=0.1,
)
WORTH = {
    "p1": 30.0,
    "p2": 30.0,
    "level": 0.003,
    "mass_kg": 900.0,
    "volume_m3": 1.0,
    "level_m": 0.004,
}


def moment(hours: float, **facts: Any) -> Moment:
    """A moment at 9 m, changed as named."""
    stated: dict[str, Any] = {
        "readings": Readings(p1_pa=70_900.0, level_m=9.0),
        "level_m": 9.0,
        "volume_m3": 2827.4,
        "mass_kg": 2_403_300.0,
        "uncertainty": WORTH,
    }
    return Moment(round(hours * HOUR_US), **(stated | facts))


def codes(*moments: Moment, **options: Any) -> list[tuple[str, str]]:
    found = against_history(TANK, moments[:-1], moments[-1], **options)
    assert not any(n.refuses for n in found)
    return [(n.code, n.reading) for n in found]


def read(p1: float, level: float, **more: float) -> Readings:
    return Readings(p1_pa=p1, level_m=level, **more)


def test_nothing_is_odd_without_earlier_readings() -> None:
    assert codes(moment(1.0)) == []
    later = moment(2.0, mass_kg=1.0)
    assert against_history(TANK, [later], moment(1.0, movement="static")) == ()


def test_an_instrument_that_stands_still_while_another_moves_is_stuck() -> None:
    run = [moment(k, readings=read(70_900.0, 9.0 + 0.02 * k)) for k in range(3)]
    found = against_history(TANK, run[:-1], run[-1])
    assert [(n.code, n.reading) for n in found] == [("stuck_value", "p1")]
    assert found[0].message == (
        "p1 has read 70.900 kPa at the last 3 readings while level moved: it may be stuck, "
        "isolated or frozen."
    )


def test_a_tank_at_rest_has_no_stuck_instruments() -> None:
    still = [moment(k, readings=read(70_900.0, 9.0 + 0.003 * k)) for k in range(3)]
    assert codes(*still) == []


def test_an_instrument_is_not_stuck_before_it_has_been_the_same_often_enough() -> None:
    run = [moment(k, readings=read(70_900.0, 9.0 + 0.1 * k)) for k in range(3)]
    assert codes(*run, stuck_after=4) == []
    assert codes(*run[1:], stuck_after=2) == [("stuck_value", "p1")]
    broken = [moment(0, readings=read(70_901.0, 9.0)), *run[1:]]
    assert codes(*broken) == []


def test_a_tap_that_lies_dry_is_not_stuck() -> None:
    run = [
        moment(
            k, level_m=1.0 + 0.1 * k, readings=read(4000.0 + 800.0 * k, 1.0 + 0.1 * k, p2_pa=0.0)
        )
        for k in range(3)
    ]
    assert codes(*run) == []


def test_a_value_typed_like_the_last_one_is_pointed_at() -> None:
    first = moment(0, typed={"p1": "70.9 kPa", "level": "9.000 m", "density": "850 kg/m3"})
    same = moment(1, typed={"p1": " 70.9 kPa", "level": "9.001 m", "density": "850 kg/m3"})
    assert codes(first, same) == [("copied_value", "p1")]
    assert codes(first, replace(same, typed={"p1": "70.90 kPa"})) == []


@pytest.mark.parametrize(
    ("moved_m3", "way"), [(54.0, "in"), (-108.0, "out"), (45.0, ""), (-90.0, ""), (0.0, "")]
)
def test_a_change_faster_than_the_largest_flow_is_impossible(moved_m3: float, way: str) -> None:
    # In a quarter of an hour 0.05 m3/s are 45 m3 and 0.1 m3/s are 90 m3; 2u is 2.8 m3.
    now = moment(0.25, volume_m3=2827.4 + moved_m3)
    found = against_history(TANK, [moment(0)], now)
    assert [n.code for n in found] == (["rate_too_high"] if way else [])
    assert all(f"largest flow {way} of V-1" in n.message for n in found)


def test_a_rate_within_its_uncertainty_is_possible() -> None:
    assert codes(moment(0), moment(0.25, volume_m3=2827.4 + 45.0 + 2.8)) == []
    assert codes(moment(0), moment(0.25, volume_m3=2827.4 + 45.0 + 2.9)) == [
        ("rate_too_high", "level")
    ]


def test_a_tank_without_a_largest_flow_is_not_checked_for_it() -> None:
    far = moment(0.01, volume_m3=10.0)
    assert against_history(upright(), [moment(0)], far) == ()


@pytest.mark.parametrize(
    ("movement", "mass_change", "code"),
    [
        ("receiving", -10_000.0, "direction_contradicts"),
        ("delivering", 10_000.0, "direction_contradicts"),
        ("static", 10_000.0, "moves_while_static"),
        ("static", -10_000.0, "moves_while_static"),
        ("receiving", 10_000.0, None),
        ("delivering", -10_000.0, None),
        ("", -10_000.0, None),
        ("receiving", -2500.0, None),
        ("static", 2500.0, None),
    ],
)
def test_a_movement_is_held_against_what_was_declared(
    movement: str, mass_change: float, code: str | None
) -> None:
    now = moment(5, mass_kg=2_403_300.0 + mass_change, movement=movement)
    assert codes(moment(0), now) == ([(code, "mass")] if code else [])


def test_heat_moves_the_level_but_not_the_mass_of_a_tank_at_rest() -> None:
    warmer = moment(5, level_m=9.02, volume_m3=2833.7, movement="static")
    assert codes(moment(0), warmer) == []
    no_mass = [replace(m, mass_kg=None) for m in (moment(0), warmer)]
    assert codes(*no_mass) == [("moves_while_static", "volume")]


def test_figures_without_an_uncertainty_are_not_checked() -> None:
    far = moment(1, mass_kg=1.0, volume_m3=1.0, level_m=0.1, movement="static", uncertainty={})
    assert codes(moment(0), far) == []


def test_the_last_reading_before_this_one_counts_whatever_their_order() -> None:
    full = moment(0, mass_kg=9e6)
    moments = [moment(3), full]
    assert against_history(TANK, moments, moment(5, movement="static")) == ()

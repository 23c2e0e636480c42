"""Shifts: local start times, lengths by UTC, across every change of the clocks."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from itertools import pairwise
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.shiftlog.shifts import Shift, shift_at
from tankcalc.shiftlog.times import iso_local, parse_time

HOUR_US = 3_600_000_000
QUARTER_US = HOUR_US // 4
TWO = {"Day": "06:00", "Night": "18:00"}
THREE = {"Early": "06:00", "Late": "14:00", "Night": "22:00"}
ZONES = ["Europe/Lisbon", "Europe/Berlin"]


def quarters(zone: ZoneInfo) -> Iterator[int]:
    """Every quarter of an hour of the local year 2026."""
    start = parse_time("2026-01-01T00:00", zone)
    return iter(range(start, parse_time("2027-01-01T00:00", zone), QUARTER_US))


def expected(t_us: int, zone: ZoneInfo) -> tuple[str, str]:
    """Shift and date straight from what the clock on the wall shows."""
    wall = datetime.fromtimestamp(t_us / 1e6, UTC).astimezone(zone)
    if 6 <= wall.hour < 18:
        return "Day", wall.date().isoformat()
    began = wall if wall.hour >= 18 else wall - timedelta(days=1)
    return "Night", began.date().isoformat()


@pytest.mark.parametrize("name", ZONES)
def test_every_quarter_of_an_hour_of_a_year_falls_in_the_right_shift(name: str) -> None:
    zone = ZoneInfo(name)
    shifts = set()
    for t_us in quarters(zone):
        shift = shift_at(t_us, zone, TWO)
        assert (shift.name, shift.date) == expected(t_us, zone)
        assert shift.start_us <= t_us < shift.end_us
        shifts.add(shift)
    hours = Counter((shift.end_us - shift.start_us) / HOUR_US for shift in shifts)
    assert hours == {12.0: 365 * 2 + 1 - 2, 11.0: 1, 13.0: 1}
    ordered = sorted(shifts, key=lambda shift: shift.start_us)
    for earlier, later in pairwise(ordered):
        assert earlier.end_us == later.start_us


def test_the_short_and_the_long_night() -> None:
    berlin = ZoneInfo("Europe/Berlin")
    spring = shift_at(parse_time("2026-03-29T00:30Z", berlin), berlin, TWO)
    autumn = shift_at(parse_time("2026-10-25T00:30Z", berlin), berlin, TWO)
    assert (spring.name, spring.date) == ("Night", "2026-03-28")
    assert (autumn.name, autumn.date) == ("Night", "2026-10-24")
    assert spring.end_us - spring.start_us == 11 * HOUR_US
    assert autumn.end_us - autumn.start_us == 13 * HOUR_US


def test_eight_hour_shifts_are_seven_and_nine_hours_across_a_change() -> None:
    lisbon = ZoneInfo("Europe/Lisbon")
    spring = shift_at(parse_time("2026-03-29T03:00", lisbon), lisbon, THREE)
    autumn = shift_at(parse_time("2026-10-25T03:00", lisbon), lisbon, THREE)
    assert (spring.name, spring.end_us - spring.start_us) == ("Night", 7 * HOUR_US)
    assert (autumn.name, autumn.end_us - autumn.start_us) == ("Night", 9 * HOUR_US)


def test_a_start_that_the_clocks_skip_happens_right_after_the_gap() -> None:
    berlin = ZoneInfo("Europe/Berlin")
    shifts = {"A": "02:30", "B": "14:30"}
    jump = parse_time("2026-03-29T03:00", berlin)
    assert shift_at(jump - 1, berlin, shifts).date == "2026-03-28"
    after = shift_at(jump, berlin, shifts)
    assert (after.name, after.date, after.start_us) == ("A", "2026-03-29", jump)


def test_a_start_that_the_clocks_repeat_happens_the_first_time() -> None:
    berlin = ZoneInfo("Europe/Berlin")
    shift = shift_at(
        parse_time("2026-10-25T02:30+01:00", berlin), berlin, {"A": "02:30", "B": "14:30"}
    )
    assert (shift.name, shift.date) == ("A", "2026-10-25")
    assert iso_local(shift.start_us, berlin) == "2026-10-25T02:30:00+02:00"
    assert shift.end_us - shift.start_us == 13 * HOUR_US


def test_two_starts_in_one_gap_leave_no_empty_shift() -> None:
    berlin = ZoneInfo("Europe/Berlin")
    shifts = {"A": "02:10", "B": "02:50", "C": "12:00"}
    jump = parse_time("2026-03-29T03:00", berlin)
    assert shift_at(jump - 1, berlin, shifts).name == "C"
    assert shift_at(jump, berlin, shifts).name == "B"


def test_a_shift_of_the_calendar_day_has_25_hours_in_autumn() -> None:
    lisbon = ZoneInfo("Europe/Lisbon")
    shift = shift_at(parse_time("2026-10-25T12:00", lisbon), lisbon, {"Day": "00:00"})
    assert (shift.name, shift.date) == ("Day", "2026-10-25")
    assert shift.end_us - shift.start_us == 25 * HOUR_US


def test_a_single_start_makes_a_day_that_begins_there() -> None:
    lisbon = ZoneInfo("Europe/Lisbon")
    shift = shift_at(parse_time("2026-12-01T06:59", lisbon), lisbon, {"Watch": "07:00"})
    assert shift == Shift(
        "Watch",
        "2026-11-30",
        parse_time("2026-11-30T07:00", lisbon),
        parse_time("2026-12-01T07:00", lisbon),
    )


@given(
    t_us=st.integers(1_300_000_000_000_000, 1_900_000_000_000_000),
    zone=st.sampled_from(
        ["Europe/Lisbon", "Pacific/Apia", "Australia/Lord_Howe", "America/St_Johns", "UTC"]
    ),
    starts=st.lists(st.integers(0, 24 * 60 - 1), min_size=1, max_size=4, unique=True),
)
def test_shifts_follow_each_other_without_gap_or_overlap(
    t_us: int, zone: str, starts: list[int]
) -> None:
    shifts = {f"S{n}": f"{minute // 60:02}:{minute % 60:02}" for n, minute in enumerate(starts)}
    where = ZoneInfo(zone)
    shift = shift_at(t_us, where, shifts)
    assert shift.start_us <= t_us < shift.end_us
    assert shift_at(shift.start_us, where, shifts) == shift
    assert shift_at(shift.end_us - 1, where, shifts) == shift
    assert shift_at(shift.end_us, where, shifts).start_us == shift.end_us
    assert shift_at(shift.start_us - 1, where, shifts).end_us == shift.start_us

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

from tankcalc.errors import TimeError
from tankcalc.shiftlog.shifts import LONGEST_RUN, Shift, shift_at, shift_named, shifts_between
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


def test_every_quarter_of_an_hour_of_three_shifts_against_a_walk_through_the_year() -> None:
    # A quarter at a time, the clock on the wall passes a start, and a new shift is on. In Santiago
    # the clocks change at midnight, on Lord Howe by half an hour.
    for name in ("America/Santiago", "Australia/Lord_Howe"):
        zone = ZoneInfo(name)
        t_us = parse_time("2026-01-01T06:00", zone)
        on, date, hours = "Early", "2026-01-01", Counter[tuple[str, float]]()
        began = t_us
        while t_us < parse_time("2027-01-01T06:00", zone):
            wall = datetime.fromtimestamp(t_us / 1e6, UTC).astimezone(zone)
            starts = {6: "Early", 14: "Late", 22: "Night"}
            if wall.minute == 0 and wall.hour in starts and starts[wall.hour] != on:
                hours[(on, (t_us - began) / HOUR_US)] += 1
                on, date, began = starts[wall.hour], wall.date().isoformat(), t_us
            shift = shift_at(t_us, zone, THREE)
            assert (shift.name, shift.date, shift.start_us) == (on, date, began)
            t_us += QUARTER_US
        step = 1.0 if name == "America/Santiago" else 0.5
        assert hours[("Night", 8.0)] == 362
        assert hours[("Night", 8.0 - step)] == hours[("Night", 8.0 + step)] == 1
        assert hours[("Early", 8.0)] + hours[("Late", 8.0)] == 730


@pytest.mark.parametrize(
    ("text", "hours"),
    [
        ("2026-03-28 Night", 11),
        ("2026-03-29 Night", 12),
        ("2026-10-24 Night", 13),
        ("2026-10-25 Day", 12),
        ("  2026-12-01   day ", 12),
    ],
)
def test_a_shift_is_found_by_its_date_and_name(text: str, hours: int) -> None:
    berlin = ZoneInfo("Europe/Berlin")
    shift = shift_named(text, berlin, TWO)
    assert shift.length_us == hours * HOUR_US
    assert shift.title.casefold() == " ".join(text.split()).casefold()
    start = "06:00" if shift.name == "Day" else "18:00"
    assert iso_local(shift.start_us, berlin)[:16] == f"{shift.date}T{start}"
    assert shift_named(shift.title, berlin, TWO) == shift


def test_a_name_of_two_words_and_names_that_differ_in_capitals() -> None:
    lisbon = ZoneInfo("Europe/Lisbon")
    shifts = {"Early watch": "06:00", "late": "14:00", "Late": "22:00"}
    assert shift_named("2026-12-01 early  watch", lisbon, shifts).name == "Early watch"
    assert shift_named("2026-12-01 Late", lisbon, shifts).name == "Late"
    assert shift_named("2026-12-01 late", lisbon, shifts).name == "late"
    with pytest.raises(TimeError, match="names no shift"):
        shift_named("2026-12-01 LATE", lisbon, shifts)


def test_the_date_alone_will_do_for_one_shift_a_day() -> None:
    lisbon = ZoneInfo("Europe/Lisbon")
    assert shift_named("2026-10-25", lisbon, {"Day": "00:00"}).length_us == 25 * HOUR_US
    with pytest.raises(TimeError, match="Shifts here: Day, Night"):
        shift_named("2026-10-25", lisbon, TWO)


@pytest.mark.parametrize(
    "text",
    [
        "",
        "Day",
        "2026-02-30 Day",
        "01.12.2026 Day",
        "2026-12-01 Swing",
        "0001-01-01 Day",
        "9999-12-31 Day",
        "2026-12-01T06:00 Day",
        "2026-12-01\x1b[31m Day",
        "\u0661\u0662 Day",
    ],
)
def test_what_names_no_shift_is_told(text: str) -> None:
    with pytest.raises(TimeError) as told:
        shift_named(text, ZoneInfo("Europe/Lisbon"), TWO)
    assert "\x1b" not in str(told.value)


def test_a_shift_that_the_clocks_leave_no_time_is_told_and_not_replaced() -> None:
    berlin = ZoneInfo("Europe/Berlin")
    shifts = {"A": "02:10", "B": "02:50", "C": "12:00"}
    with pytest.raises(TimeError, match=r"no time of its own.*2026-03-29 B"):
        shift_named("2026-03-29 A", berlin, shifts)
    assert shift_named("2026-03-30 A", berlin, shifts).length_us == 40 * 60 * 1_000_000


def test_a_date_that_a_zone_left_out_has_no_shift() -> None:
    # Samoa had no 30 December 2011.
    apia = ZoneInfo("Pacific/Apia")
    with pytest.raises(TimeError, match="no time of its own"):
        shift_named("2011-12-30 Day", apia, TWO)


def test_the_shifts_of_a_span_are_those_with_any_time_in_it() -> None:
    lisbon = ZoneInfo("Europe/Lisbon")
    start = parse_time("2026-10-24T17:59", lisbon)
    end = parse_time("2026-10-25T18:00", lisbon)
    assert [s.title for s in shifts_between(start, end, lisbon, TWO)] == [
        "2026-10-24 Day",
        "2026-10-24 Night",
        "2026-10-25 Day",
    ]
    assert [s.title for s in shifts_between(start, end + 1, lisbon, TWO)][-1] == "2026-10-25 Night"
    assert list(shifts_between(start, start, lisbon, TWO)) == []


def test_a_span_of_too_many_shifts_is_refused() -> None:
    zone = ZoneInfo("UTC")
    minute = {f"S{n}": f"{n // 60:02}:{n % 60:02}" for n in range(0, 1440, 60)}
    span = (LONGEST_RUN + 1) * HOUR_US
    with pytest.raises(TimeError, match="more than"):
        list(shifts_between(0, span, zone, minute))

"""Times: ISO 8601 in, integer microseconds of UTC inside, the offset always shown."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tankcalc.errors import InputError, TimeError
from tankcalc.shiftlog.times import (
    LAST_US,
    end_of_gap,
    instants_of,
    iso_local,
    iso_utc,
    now_us,
    parse_time,
    show_local,
    zone_named,
)

LISBON, BERLIN = ZoneInfo("Europe/Lisbon"), ZoneInfo("Europe/Berlin")
LORD_HOWE = ZoneInfo("Australia/Lord_Howe")  # changes by half an hour
APIA = ZoneInfo("Pacific/Apia")  # left out the whole of 2011-12-30
ZONES = st.sampled_from([LISBON, BERLIN, LORD_HOWE, APIA, ZoneInfo("America/St_Johns")])
MINUTE_US = 60_000_000


def utc_us(text: str) -> int:
    """The instant by the standard library's own arithmetic."""
    moment = datetime.fromisoformat(text).astimezone(UTC)
    return (moment - datetime(1970, 1, 1, tzinfo=UTC)) // timedelta(microseconds=1)


@pytest.mark.parametrize(
    "text",
    [
        "2026-12-01T14:30Z",
        "2026-12-01T14:30:05z",
        "2026-12-01 14:30:05.25+00:00",
        "2026-12-01T14:30:05,25+05:45",
        "2026-12-01T14+01",
        "20261201T143005Z",
        "2026-W49-2T14:30-03:30",
        "2026-12-01T00:00:00.000001+14:00",
    ],
)
def test_a_time_with_an_offset_is_that_instant_in_any_zone(text: str) -> None:
    for zone in (LISBON, BERLIN, APIA):
        assert parse_time(text, zone) == utc_us(text.upper())


def test_a_time_without_an_offset_is_wall_time_of_the_site() -> None:
    assert parse_time("2026-12-01T14:30", BERLIN) == utc_us("2026-12-01T13:30Z")
    assert parse_time("2026-07-01 14:30", BERLIN) == utc_us("2026-07-01T12:30Z")
    assert parse_time(" 2026-07-01T14:30 ", LISBON) == utc_us("2026-07-01T13:30Z")


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("2026-12-01", "no time of day"),
        ("20261201", "no time of day"),
        ("2026-W49-2", "no time of day"),
        ("14:30", "no date and time"),
        ("now", "no date and time"),
        ("", "no date and time"),
        ("01/12/2026 14:30", "no date and time"),
        ("2026-12-01T14:30 +01:00", "no date and time"),
        ("2026-12-01x14:30", "no date and time"),
        ("2026-12-01\x1b14:30", "no date and time"),
        ("２０２６-12-01T14:30", "no date and time"),
        ("\udc80", "no date and time"),
        ("9" * 5000, "no date and time"),
        ("2026-335T14:30", "no date and time"),
        ("2026-02-29T14:30", "not on the calendar"),
        ("2026-12-01T25:30", "not on the calendar"),
        ("2026-12-01T14:30+99:00", "not on the calendar"),
        ("0001-01-01T00:00+14:00", "1970 to 9998"),
        ("1969-12-31T23:59:59Z", "1970 to 9998"),
        ("9999-12-31T23:59", "1970 to 9998"),
        ("9999-12-31T23:59:59-23:59", "1970 to 9998"),
        ("0000-01-01T00:00Z", "not on the calendar"),
    ],
)
def test_what_is_no_time_is_refused_with_what_to_type(text: str, message: str) -> None:
    with pytest.raises(TimeError, match=message) as caught:
        parse_time(text, LISBON)
    assert str(caught.value).isprintable()
    assert len(str(caught.value)) < 300


def test_a_time_the_clocks_skip_does_not_exist() -> None:
    with pytest.raises(TimeError, match="does not exist in Europe/Lisbon") as caught:
        parse_time("2026-03-29T01:30", LISBON)
    assert "2026-03-29T00:59:59+00:00 straight to 2026-03-29T02:00:00+01:00" in str(caught.value)
    assert parse_time("2026-03-29T00:59", LISBON) + MINUTE_US == parse_time(
        "2026-03-29T02:00", LISBON
    )


def test_a_time_that_happens_twice_is_asked_about() -> None:
    with pytest.raises(TimeError, match="happens twice in Europe/Berlin") as caught:
        parse_time("2026-10-25T02:30", BERLIN)
    first, second = "2026-10-25T02:30:00+02:00", "2026-10-25T02:30:00+01:00"
    assert f'"{first}" for the first' in str(caught.value)
    assert f'"{second}" for the second' in str(caught.value)
    assert parse_time(second, BERLIN) - parse_time(first, BERLIN) == 60 * MINUTE_US


def test_a_whole_day_can_be_missing() -> None:
    with pytest.raises(TimeError, match="does not exist in Pacific/Apia"):
        parse_time("2011-12-30T12:00", APIA)
    gap_end = end_of_gap(datetime(2011, 12, 30, 12), APIA)
    assert iso_local(gap_end, APIA) == "2011-12-31T00:00:00+14:00"


def test_the_end_of_every_gap_is_exact() -> None:
    wall = datetime(2026, 10, 4, 2, 1, 2, 345678)
    assert instants_of(wall, LORD_HOWE) == ()
    assert iso_local(end_of_gap(wall, LORD_HOWE), LORD_HOWE) == "2026-10-04T02:30:00+11:00"
    for minute in range(60):
        wall = datetime(2026, 3, 29, 2, minute, 59, 999999)
        assert end_of_gap(wall, BERLIN) == utc_us("2026-03-29T01:00Z")


def test_a_reading_lies_at_most_five_minutes_ahead() -> None:
    now = utc_us("2026-12-01T12:00Z")
    assert parse_time("2026-12-01T12:05Z", LISBON, now) == now + 5 * MINUTE_US
    with pytest.raises(TimeError, match=r"in the future: it is now 2026-12-01 12:00\+00:00"):
        parse_time("2026-12-01T12:05:00.000001Z", LISBON, now)
    assert parse_time("2027-12-01T12:00Z", LISBON) > now


@given(t_us=st.integers(0, LAST_US), zone=ZONES)
def test_what_is_shown_is_read_back_as_the_same_instant(t_us: int, zone: ZoneInfo) -> None:
    assert parse_time(iso_utc(t_us), zone) == t_us
    assert parse_time(show_local(t_us, zone), zone) // MINUTE_US == t_us // MINUTE_US
    assert parse_time(iso_local(t_us, zone), zone) == t_us


@given(t_us=st.integers(utc_us("2010-01-01T00:00Z"), utc_us("2035-01-01T00:00Z")), zone=ZONES)
def test_wall_time_without_an_offset_is_right_or_refused(t_us: int, zone: ZoneInfo) -> None:
    wall = iso_local(t_us, zone)[:-6]
    if len(instants_of(datetime.fromisoformat(wall), zone)) == 1:
        assert parse_time(wall, zone) == t_us
    else:
        with pytest.raises(TimeError, match="happens twice") as caught:
            parse_time(wall, zone)
        assert iso_local(t_us, zone) in str(caught.value)


@pytest.mark.parametrize(
    "name", ["Mars/Olympus", "", "../etc/passwd", "Europe", "a\0b", "\x1b[31m"]
)
def test_an_unknown_zone_is_an_error_that_can_be_printed(name: str) -> None:
    with pytest.raises(InputError, match="no time zone") as caught:
        zone_named(name)
    assert str(caught.value).isprintable()


def test_now_is_in_microseconds() -> None:
    assert abs(now_us() - datetime.now(UTC).timestamp() * 1e6) < 5e6

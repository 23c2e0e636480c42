"""Crews: who works which shift, as the site file says it."""

from __future__ import annotations

from collections import Counter
from datetime import date, timedelta
from pathlib import Path
from zoneinfo import ZoneInfo

import pytest

from tankcalc.errors import InputError, ProfileError
from tankcalc.profiles import load_site
from tankcalc.profiles.crews_schema import Roster
from tankcalc.shiftlog.crews import crew_of, next_shift_of
from tankcalc.shiftlog.shifts import Shift, shift_at, shift_named, shifts_between
from tankcalc.shiftlog.times import parse_time

BERLIN = ZoneInfo("Europe/Berlin")
TWO = {"Day": "06:00", "Night": "18:00"}
FOUR = Roster(
    date(2026, 1, 5),
    {
        "Day": ("A", "A", "B", "B", "C", "C", "D", "D"),
        "Night": ("D", "D", "A", "A", "B", "B", "C", "C"),
    },
)

SITE = """\
name = "Test"
time_zone = "Europe/Berlin"

[shifts]
Day = "06:00"
Night = "18:00"

[crews]
begins = 2026-01-05
[crews.roster]
Day = ["A", "A", "B", "B", "C", "C", "D", "D"]
Night = ["D", "D", "A", "A", "B", "B", "C", "C"]
"""


def crew(title: str) -> str | None:
    return crew_of(shift_named(title, BERLIN, TWO), FOUR)


def test_the_roster_is_read_off_by_hand() -> None:
    assert [crew(f"2026-01-{day:02} Day") for day in range(5, 15)] == list("AABBCCDDAA")
    assert [crew(f"2026-01-{day:02} Night") for day in range(5, 15)] == list("DDAABBCCDD")
    # Before the first date it runs on backwards.
    assert crew("2026-01-04 Day") == "D"
    assert crew("2026-01-04 Night") == "C"


def test_a_year_of_shifts_across_both_changes_of_the_clocks() -> None:
    start, end = (parse_time(f"{year}-01-05T06:00", BERLIN) for year in (2026, 2027))
    worked: Counter[str | None] = Counter()
    # An independent count: days and nights alternate, and every crew has its two of each in turn.
    days = ["AABBCCDD"[n % 8] for n in range(365)]
    nights = ["DDAABBCC"[n % 8] for n in range(365)]
    expected = [crew for pair in zip(days, nights, strict=True) for crew in pair]
    found = []
    for shift in shifts_between(start, end, BERLIN, TWO):
        found.append(crew_of(shift, FOUR))
        worked[found[-1]] += shift.length_us
    assert found == expected
    assert sum(worked.values()) == end - start


def test_no_crew_works_a_day_after_its_night() -> None:
    first = date(2026, 3, 20)
    for n in range(30):
        day, next_day = first + timedelta(days=n), first + timedelta(days=n + 1)
        assert crew(f"{day} Night") != crew(f"{next_day} Day")


def test_the_next_shift_of_a_crew() -> None:
    now = parse_time("2026-01-05T07:00", BERLIN)
    assert next_shift_of("A", now, BERLIN, TWO, FOUR).title == "2026-01-06 Day"
    assert next_shift_of("B", now, BERLIN, TWO, FOUR).title == "2026-01-07 Day"
    with pytest.raises(InputError, match="Known: A, B, C, D"):
        next_shift_of("E\x1b", now, BERLIN, TWO, FOUR)


def test_a_shift_without_a_line_has_no_crew() -> None:
    assert crew_of(Shift("Swing", "2026-01-05", 0, 1), FOUR) is None


def test_a_site_states_its_roster(tmp_path: Path) -> None:
    (tmp_path / "site.toml").write_text(SITE)
    site = load_site(tmp_path)
    assert site.crews is not None
    assert site.crews.begins == date(2026, 1, 5)
    assert dict(site.crews.crews) == dict(FOUR.crews)
    shift = shift_at(parse_time("2026-10-25T02:30+01:00", BERLIN), BERLIN, site.shifts)
    assert (shift.title, crew_of(shift, site.crews)) == ("2026-10-24 Night", crew(shift.title))


def test_a_site_without_a_roster_has_none(tmp_path: Path) -> None:
    (tmp_path / "site.toml").write_text(SITE[: SITE.index("[crews]")])
    assert load_site(tmp_path).crews is None


@pytest.mark.parametrize(
    ("old", "new", "told"),
    [
        ("2026-01-05", '"5 Jan"', 'crews.begins: "5 Jan" is no date.'),
        ('Night = ["D"', 'Nite = ["D"', 'the shift "Night" has no crews.'),
        ('Night = ["D"', 'Nite = ["D"', "crews.roster.Nite: there is no shift of that name."),
        ('["A", "A",', '["A", 2,', "crews.roster.Day.2: text in quotes is wanted"),
        ('["A", "A", "B", "B", "C", "C", "D", "D"]', "[]", "at least 1 entries are wanted"),
        ("begins = 2026-01-05\n", "", "crews.begins: missing."),
    ],
)
def test_a_roster_that_cannot_be_is_told(tmp_path: Path, old: str, new: str, told: str) -> None:
    assert old in SITE
    (tmp_path / "site.toml").write_text(
        SITE.replace(old, new, 1) if "Nite" not in new else SITE.replace(old, new)
    )
    with pytest.raises(ProfileError) as refused:
        load_site(tmp_path)
    assert told in str(refused.value)


def test_alerts_and_rates_of_a_site(tmp_path: Path) -> None:
    stated = """
[alerts]
level_dead_band = "1 %"
on_delay = "60 s"
stale_after = "2 h"
stuck_after = 4

[rates]
read_every = "1 h"
random_share = 0.5
"""
    (tmp_path / "site.toml").write_text(SITE + stated)
    site = load_site(tmp_path)
    alerts = site.alerts
    assert (alerts.level_dead_band, alerts.on_delay_s) == (pytest.approx(0.01), 60.0)
    assert (alerts.stale_after_s, alerts.stuck_after) == (7200.0, 4)
    assert alerts.flow_dead_band == 0.05
    assert (site.rates.read_every_s, site.rates.random_share) == (3600.0, 0.5)

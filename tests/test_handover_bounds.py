"""The report from shift to shift: what is late, old, archived, or never answered."""

from __future__ import annotations

from contextlib import closing
from pathlib import Path

import pytest
from handover_plant import DAY_US, HOUR_US, NOON_US, Plant

from tankcalc.cli.main import main
from tankcalc.handover.build import build
from tankcalc.handover.document import Document, Section
from tankcalc.handover.words import document_of
from tankcalc.shiftlog import now_us, open_store, zone_named
from tankcalc.shiftlog.archive import archive
from tankcalc.shiftlog.shifts import shift_named
from tankcalc.watch import Kept, watch

DAY = "2026-12-01 Day"
START_US, END_US = NOON_US - 6 * HOUR_US, NOON_US + 6 * HOUR_US


@pytest.fixture
def plant(tmp_path: Path) -> Plant:
    return Plant(tmp_path)


def words(plant: Plant, title: str = DAY, now_us: int = END_US + HOUR_US) -> Document:
    site = plant.site
    shift = shift_named(title, zone_named(site.time_zone), site.shifts)
    with closing(open_store(plant.log)) as store:
        return document_of(build(store, site, shift, now_us))


def section(document: Document, title: str) -> Section:
    return next(s for s in (document.changed, *document.sections) if s.title.startswith(title))


def said(found: Section) -> str:
    return "\n".join(f"{i.when} {i.subject} {i.kind}: {i.text}" for i in found.items)


def level_cell(document: Document, tank: str) -> str:
    table = document.tanks.table
    assert table is not None
    row = next(row for row in table.rows if row[0] == tank)
    return row[table.headings.index("Level")]


def test_what_was_entered_late_about_an_earlier_shift_is_told(plant: Plant) -> None:
    plant.level("V-1", START_US - 30 * HOUR_US, 10.0, entered_us=START_US + HOUR_US)
    plant.note(START_US + 2 * HOUR_US, "valve 3 was open", t_us=START_US - 8 * HOUR_US)
    document = words(plant)
    told = said(document.changed)
    assert "2026-11-30 00:00+00:00 V-1 reading, late: entered 07:00 about an earlier shift" in told
    assert "note, late: entered 08:00 about an earlier shift" in told
    assert "valve 3 was open" in told
    assert not section(document, "Late, amended").empty
    # The shift before holds neither: both were entered after it.
    night = words(plant, "2026-11-30 Night")
    assert "reading, late" not in said(night.changed)


def test_an_entry_in_time_is_not_called_late(plant: Plant) -> None:
    plant.level("V-1", START_US + HOUR_US, 10.0)
    document = words(plant)
    assert "late" not in said(document.changed)
    assert section(document, "Late, amended").empty


def test_a_withdrawn_late_entry_is_marked(plant: Plant) -> None:
    late = plant.level("V-1", START_US - 9 * HOUR_US, 10.0, entered_us=START_US + HOUR_US)
    plant.withdraw(late, START_US + 2 * HOUR_US)
    assert "(withdrawn by entry 2)" in said(words(plant).changed)


@pytest.mark.parametrize("days", [8, 20, 30])
def test_an_alert_nobody_answered_stays_until_it_is_acknowledged(plant: Plant, days: int) -> None:
    raised = NOON_US - days * DAY_US
    plant.level("V-1", raised, 14.2)
    plant.level("V-1", raised + HOUR_US, 10.0)
    for day in range(days):
        plant.level("V-1", NOON_US - day * DAY_US - HOUR_US, 10.0 + 0.01 * (day % 3))
    kept = Kept()
    with closing(open_store(plant.log)) as store:
        found = watch(store, plant.site, NOON_US, kept=kept).tank("V-1")
        assert found is not None
        assert ("above_high_high", "returned") in {(a.key, a.state) for a in found.alerts}
        # An answer counts at once, also for whoever keeps what was read.
        for key in {alert.key for alert in found.alerts}:
            plant.answer("V-1", key, NOON_US - HOUR_US // 2)
        again = watch(store, plant.site, NOON_US, kept=kept).tank("V-1")
        assert again is not None
        assert again.alerts == ()


def test_what_is_kept_of_old_readings_follows_the_log(plant: Plant) -> None:
    wrong = plant.level("V-1", NOON_US - 20 * DAY_US, 14.2)
    plant.level("V-1", NOON_US - 20 * DAY_US + HOUR_US, 10.0)
    plant.level("V-1", NOON_US - HOUR_US, 10.0)
    kept = Kept()
    with closing(open_store(plant.log)) as store:
        found = watch(store, plant.site, NOON_US, kept=kept).tank("V-1")
        assert found is not None
        assert "above_high_high" in {alert.key for alert in found.alerts}
        plant.withdraw(wrong, NOON_US - HOUR_US)
        found = watch(store, plant.site, NOON_US, kept=kept).tank("V-1")
        assert found is not None
        assert "above_high_high" not in {alert.key for alert in found.alerts}


def test_the_report_says_how_far_back_alerts_are_looked_for(plant: Plant) -> None:
    assert "older than 31 days are not looked at" in section(words(plant), "Open alerts").nothing


def test_an_alert_set_aside_and_never_raised_says_so(plant: Plant) -> None:
    plant.level("V-1", START_US + HOUR_US, 10.0)
    plant.answer(
        "V-1", "above_high_high", START_US + 2 * HOUR_US,
        until_us=END_US + DAY_US, reason="gauge works",
    )  # fmt: skip
    document = words(plant)
    told = said(section(document, "Open alerts"))
    assert "1970" not in told
    assert "(not raised)" in told
    assert "alert raised" not in said(document.changed)


def test_a_time_before_the_log_begins_is_not_called_empty(plant: Plant, tmp_path: Path) -> None:
    for hours in (0, 1, 2):
        plant.level("V-1", START_US + hours * HOUR_US, 10.0)
    plant.level("V-1", START_US + 3 * DAY_US, 10.0)
    archive(
        plant.log, tmp_path / "old.sqlite", site=plant.site, before_us=START_US + DAY_US,
        now_us=START_US + 4 * DAY_US, who="A. Rook",
    )  # fmt: skip
    document = words(plant, now_us=START_US + 4 * DAY_US)
    begins = "the log begins with entry 4 (archived before)"
    assert any(begins in text.replace("The log", "the log") for text in document.banners)
    for title in ("What changed", "Late, amended", "Ages of"):
        assert begins in section(document, title).nothing
    later = words(plant, "2026-12-04 Day", now_us=START_US + 4 * DAY_US)
    assert not any(begins.upper() in text.upper() for text in later.banners)


def test_a_balance_says_why_its_opening_is_late(plant: Plant, tmp_path: Path) -> None:
    from tankcalc.balance.contents import Evaluated
    from tankcalc.balance.history import History
    from tankcalc.balance.site import balance

    plant.level("V-1", START_US, 10.0)
    for days in (2, 3):
        plant.level("V-1", START_US + days * DAY_US, 10.0)
    span = (START_US, START_US + 3 * DAY_US)

    def note() -> str:
        with closing(open_store(plant.log)) as store:
            (one,) = balance(History(store), Evaluated(plant.site, store), span).tanks
            return " ".join(one.notes)

    assert "the log begins" not in note()
    archive(
        plant.log, tmp_path / "old.sqlite", site=plant.site, before_us=START_US + DAY_US,
        now_us=START_US + 4 * DAY_US, who="A. Rook",
    )  # fmt: skip
    assert "48.0 h late; the log begins with entry 2 (archived before)." in note()


def test_an_old_level_carries_its_age(plant: Plant) -> None:
    plant.level("V-1", START_US - 37 * DAY_US, 12.0)
    plant.level("V-2", START_US + HOUR_US, 12.0)
    document = words(plant)
    assert level_cell(document, "V-1") == "12.000 m, 37 d old"
    assert level_cell(document, "V-2") == "12.000 m"


def test_a_level_older_than_the_planned_interval_carries_its_age(plant: Plant) -> None:
    path = plant.folder / "site.toml"
    path.write_text(path.read_text() + '\n[rates]\nread_every = "2 h"\n')
    plant.site_file()
    plant.level("V-1", START_US + HOUR_US, 12.0)
    plant.level("V-2", END_US - HOUR_US, 12.0)
    document = words(plant)
    assert level_cell(document, "V-1") == "12.000 m, 11 h 0 min old"
    assert level_cell(document, "V-2") == "12.000 m"


def test_times_to_limits_are_of_one_form(plant: Plant) -> None:
    plant.level("V-1", END_US - 2 * HOUR_US, 10.0, movement="receiving")
    plant.level("V-1", END_US - HOUR_US, 10.2, movement="receiving")
    document = words(plant)
    table = document.tanks.table
    assert table is not None
    assert table.rows[0][-1].startswith("maximum working ")
    texts = [i.text for i in document.cards[0].items if i.kind == "time to limit"]
    assert texts
    for text in [*texts, table.rows[0][-1]]:
        assert text.count("+00:00") == text.count("2026-12-0") >= 1


def test_nothing_is_taken_over_when_the_page_is_not_written(
    plant: Plant, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.delenv("TANKCALC_PROFILES", raising=False)
    monkeypatch.setenv("TANKCALC_LOG", str(plant.log))
    plant.level("V-1", now_us() - HOUR_US, 10.0)
    given = ["--profiles", str(plant.folder), "handover", "--acknowledge", "--who", "C. Gull"]
    assert main([*given, "--out", str(tmp_path / "none" / "page.md")]) == 2
    with closing(open_store(plant.log)) as store:
        assert store.head()[0] == 1
    page = tmp_path / "page.md"
    assert main([*given, "--out", str(page)]) == 0
    with closing(open_store(plant.log)) as store:
        assert store.head()[0] == 2
    assert "C. Gull" in page.read_text()

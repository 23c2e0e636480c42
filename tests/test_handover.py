"""The report from shift to shift: what is in it, and in which order."""

from __future__ import annotations

import os
import re
import stat
from contextlib import closing
from pathlib import Path
from typing import Any, NamedTuple

import pytest
from handover_plant import DAY_US, HOUR_US, NOON_US, Plant

from tankcalc.cli.main import main
from tankcalc.handover.build import build
from tankcalc.handover.data import Handover
from tankcalc.handover.document import Document, Section
from tankcalc.handover.words import document_of
from tankcalc.shiftlog import open_store, parse_time, zone_named
from tankcalc.shiftlog.shifts import shift_named

DAY = "2026-12-01 Day"
START_US, END_US = NOON_US - 6 * HOUR_US, NOON_US + 6 * HOUR_US


@pytest.fixture
def plant(tmp_path: Path) -> Plant:
    return Plant(tmp_path)


def handover(plant: Plant, title: str = DAY, now_us: int = END_US + HOUR_US) -> Handover:
    site = plant.site
    shift = shift_named(title, zone_named(site.time_zone), site.shifts)
    with closing(open_store(plant.log)) as store:
        return build(store, site, shift, now_us)


def words(plant: Plant, title: str = DAY, now_us: int = END_US + HOUR_US) -> Document:
    return document_of(handover(plant, title, now_us))


def section(document: Document, title: str) -> Section:
    return next(s for s in (document.changed, *document.sections) if s.title.startswith(title))


def said(found: Section) -> str:
    return "\n".join(f"{i.when} {i.subject} {i.kind}: {i.text}" for i in found.items)


def facts(document: Document) -> dict[str, str]:
    return {fact.label: fact.text for fact in document.facts}


def test_an_empty_log_makes_a_report_that_says_so(plant: Plant) -> None:
    document = words(plant)
    assert document.changed.empty
    assert "Nothing was logged" in document.changed.nothing
    assert document.cards == ()
    assert document.tanks.table is not None
    assert [row[0] for row in document.tanks.table.rows] == ["V-1", "V-2"]
    assert all(row[-1] == "not read" for row in document.tanks.table.rows)
    assert all(found.empty for found in document.sections)
    assert any("The log is empty" in text for text in document.banners)
    assert f"Head of the log: 0:{'0' * 64}" in document.cautions


def test_the_shift_is_named_with_offset_length_and_crew(plant: Plant) -> None:
    site = plant.folder / "site.toml"
    roster = '\n[crews]\nbegins = "2026-12-01"\n[crews.roster]\nDay = ["Red"]\nNight = ["Blue"]\n'
    site.write_text(site.read_text() + roster)
    plant.site_file()
    found = facts(words(plant))
    assert found["Shift"] == DAY
    assert found["From"] == "2026-12-01 06:00+00:00"
    assert found["To"] == "2026-12-01 18:00+00:00"
    assert found["Length"] == "12 h"
    assert found["Crew"] == "Red"


@pytest.mark.parametrize(
    ("title", "hours", "ends"),
    [
        ("2026-10-24 Night", "13 h", "2026-10-25 06:00+01:00"),
        ("2026-03-28 Night", "11 h", "2026-03-29 06:00+02:00"),
        ("2026-10-25 Night", "12 h", "2026-10-26 06:00+01:00"),
    ],
)
def test_nights_in_which_the_clocks_change(plant: Plant, title: str, hours: str, ends: str) -> None:
    plant.site_file(Lisbon="Berlin")
    found = words(plant, title)
    assert facts(found)["Length"] == hours
    assert facts(found)["To"] == ends
    assert any("clocks change" in text for text in found.banners) is (hours != "12 h")


def test_the_repeated_hour_is_told_by_its_offset(plant: Plant) -> None:
    plant.site_file(Lisbon="Berlin")
    berlin = zone_named("Europe/Berlin")
    for text in ("2026-10-25T02:30+02:00", "2026-10-25T02:30+01:00"):
        plant.note(parse_time(text, berlin), f"round at {text}")
    notes = section(words(plant, "2026-10-24 Night"), "Notes").items
    assert [item.when for item in notes] == ["02:30+02:00", "02:30+01:00"]


def test_what_changed_comes_first_and_names_everything(plant: Plant) -> None:
    plant.level("V-1", START_US + HOUR_US, 10.0)
    wrong = plant.level("V-1", START_US + 2 * HOUR_US, 14.2)
    plant.level("V-1", START_US + 3 * HOUR_US, 10.1)
    plant.amend(wrong, {"level": "10.05 m"}, START_US + 4 * HOUR_US, "wrong gauge")
    plant.level("V-2", START_US + HOUR_US, 14.2)
    plant.answer("V-2", "above_high_high", START_US + 2 * HOUR_US)
    plant.level("V-2", START_US + 5 * HOUR_US, 13.0)
    plant.move("V-2", START_US + 5 * HOUR_US, delivered="300 t")
    plant.fault("V-1", START_US + 5 * HOUR_US, "p1", note="sticks")
    document = words(plant)
    text = said(document.changed)
    assert "07:00 V-2 alert raised: level 14.200 m is above the high-high level" in text
    assert "11:00 V-2 alert returned: level 14.200 m is above the high-high level" in text
    assert "11:00 V-1 fault opened: p1: sticks; by A. Rook" in text
    assert "08:00 V-2 alert answered: above high high: acknowledged" in text
    assert "11:00 V-2 movement: delivered 300 t" in text
    assert "08:00 V-1 amendment: amends entry 2: 10.050 m" in text
    assert "reason: wrong gauge" in text
    assert "09:00 V-1 readings: 3 readings, level 10.100 m (+0.100 m from first to last)" in text
    # What was amended away raised nothing, by what is known now.
    assert "V-1 alert" not in text


def test_an_alert_that_came_and_went_and_was_acknowledged_is_still_told(plant: Plant) -> None:
    plant.level("V-1", START_US - HOUR_US, 10.0)
    plant.level("V-1", START_US + HOUR_US, 14.2)
    plant.level("V-1", START_US + 2 * HOUR_US, 10.0)
    plant.answer("V-1", "above_high_high", START_US + 3 * HOUR_US)
    found = handover(plant)
    assert found.alerts == ()
    assert [(c.what, c.at_us) for c in found.changes.alerts] == [
        ("raised", START_US + HOUR_US),
        ("returned", START_US + 2 * HOUR_US),
    ]


def test_an_alert_of_the_shift_before_is_open_and_did_not_change(plant: Plant) -> None:
    plant.level("V-1", START_US - HOUR_US, 14.2)
    plant.level("V-1", START_US + HOUR_US, 14.2)
    found = handover(plant)
    assert found.changes.alerts == ()
    assert [(tank, alert.key) for tank, alert in found.alerts] == [("V-1", "above_high_high")]


def test_a_profile_in_another_version_is_told_once(plant: Plant) -> None:
    plant.level("V-1", START_US - HOUR_US, 10.0)
    path = plant.folder / "tanks" / "V-1.toml"
    was = plant.site.tank("V-1").version
    path.write_text(path.read_text() + "# looked at\n")
    plant.level("V-1", START_US + HOUR_US, 10.0)
    plant.level("V-1", START_US + 2 * HOUR_US, 10.0)
    (change,) = handover(plant).changes.profiles
    assert (change.what, change.row.seq, change.was) == ("tank", 2, was)
    assert "profile changed: the tank file is another version" in said(words(plant).changed)
    assert handover(plant, "2026-12-01 Night").changes.profiles == ()
    plant.level("V-1", END_US + 60_000_000, 10.0)
    assert handover(plant, "2026-12-01 Night").changes.profiles == ()


def test_an_open_fault_carries_over_from_any_shift_until_it_is_closed(plant: Plant) -> None:
    plant.fault("V-1", START_US - 40 * DAY_US, "p1", note="sticks at 40 kPa")
    found = section(words(plant), "Instruments in fault")
    assert "p1 in fault since 2026-10-22 07:00+01:00 (40 d" in said(found)
    assert "sticks at 40 kPa" in said(found)
    plant.fault("V-1", NOON_US, "p1", opened=False, note="changed")
    assert section(words(plant), "Instruments in fault").empty
    assert "fault closed: p1: changed" in said(words(plant).changed)


def test_late_amended_and_withdrawn_entries_are_listed(plant: Plant) -> None:
    plant.level("V-1", NOON_US, 10.0, entered_us=NOON_US + HOUR_US)
    wrong = plant.level("V-2", NOON_US, 10.0)
    plant.withdraw(wrong, END_US + HOUR_US, "it was V-1")
    found = said(section(words(plant, now_us=END_US + 2 * HOUR_US), "Late"))
    assert "V-1 reading late: entry 1 entered late, 2026-12-01 13:00+00:00" in found
    assert "V-2 reading withdrawn: entry 2 withdrawn by entry 3" in found
    assert "it was V-1" in found
    # It was withdrawn after the shift: nothing of that changed during it.
    assert "withdrawal" not in said(words(plant, now_us=END_US + 2 * HOUR_US).changed)


def test_a_reading_that_was_entered_late_belongs_to_the_shift_of_its_time(plant: Plant) -> None:
    plant.level("V-1", START_US - HOUR_US, 10.0, entered_us=NOON_US)
    assert handover(plant).changes.runs == ()
    assert len(handover(plant, "2026-11-30 Night").changes.runs) == 1


def test_a_loss_has_a_significance_and_no_cause(plant: Plant) -> None:
    plant.level("V-1", START_US, 10.0)
    plant.level("V-1", END_US, 9.5)
    found = section(words(plant), "Unexplained")
    assert found.table is not None
    rows = {row[1]: row for row in found.table.rows}
    assert re.fullmatch(r"unexplained loss, significance \d+\.\d", rows["mass"][-1])
    assert rows["mass"][3].startswith("-133.")  # 0.5 m of 314.16 m2 at 850 kg/m3, by hand: 133.5 t
    assert "leak" not in str(words(plant)).lower()


def test_a_movement_in_progress_has_no_verdict_and_keeps_its_notes(plant: Plant) -> None:
    plant.level("V-1", START_US, 10.0, movement="static")
    ends = "jetty 2, planned end 21:30, stop at 13.4 m"
    plant.level("V-1", END_US - 2 * HOUR_US, 10.0, movement="receiving", note=ends)
    plant.level("V-1", END_US - HOUR_US, 11.0, movement="receiving")
    document = words(plant)
    moving = said(section(document, "Movements in progress"))
    assert "receiving since 16:00 or earlier" in moving
    assert ends in moving
    table = section(document, "Unexplained").table
    assert table is not None
    assert {row[-1] for row in table.rows} == {"no verdict while a movement is in progress"}
    assert (
        "Maximum working level (13.600 m): not before 2026-12-01 19:"
        in document.cards[0].items[0].text
    )


def test_a_running_shift_is_described_as_it_is_now(plant: Plant) -> None:
    plant.level("V-1", NOON_US - HOUR_US, 10.0)
    document = words(plant, now_us=NOON_US)
    assert any("not over" in text for text in document.banners)
    assert words(plant).banners == ()


def test_ages_are_looked_for_further_back_than_readings(plant: Plant) -> None:
    plant.read("V-1", NOON_US - 20 * DAY_US, typed={"level": "5 m", "density": "850 kg/m3"})
    plant.level("V-1", NOON_US, 5.0)
    table = section(words(plant), "Ages").table
    assert table is not None
    (row,) = table.rows
    assert dict(zip(table.headings, row, strict=True)) == {
        "Tank": "V-1",
        "Reading": "6 h 0 min",
        "Dip": "20 d 6 h 0 min",
        "Sample": "20 d 6 h 0 min",
        "Water dip": "none in 31 d",
    }


def test_a_tank_file_that_cannot_be_read_is_told_beside_the_others(plant: Plant) -> None:
    plant.level("V-1", NOON_US, 10.0)
    plant.level("V-2", NOON_US, 10.0)
    plant.tank_file("V-2", 'name = "V-2"\n[shape]\nkind = "sphere"\ndiametre = "3 m"\n')
    good, bad = words(plant).cards
    assert any(fact.label == "Level" and fact.text == "10.000 m" for fact in good.facts)
    assert bad.items[0].urgent
    assert "diametre" in bad.items[0].text


def test_people_and_the_acknowledgement_of_the_next_shift(plant: Plant) -> None:
    plant.sign(START_US + 60_000_000, "A. Rook")
    plant.sign(END_US - 60_000_000, "A. Rook", on=False)
    document = words(plant)
    assert [item.kind for item in section(document, "People").items] == ["signed on", "signed off"]
    assert document.acknowledged.empty


def test_an_old_shift_is_found_in_a_log_that_went_on(plant: Plant) -> None:
    first = plant.level("V-1", START_US, 10.0)
    plant.amend(first, {"level": "9 m"}, START_US + HOUR_US, "misread")
    for k in range(1200):
        plant.note(END_US + k * 60_000_000, "round")
    found = handover(plant, now_us=END_US + 2 * DAY_US)
    assert [(c.row.seq, c.about) for c in found.changes.corrections] == [(2, 1)]


class Said(NamedTuple):
    code: int
    out: str
    err: str


class Command:
    """The command line on a plant, at an instant."""

    def __init__(self, plant: Plant, capsys: pytest.CaptureFixture[str], now: Any) -> None:
        self.plant, self._capsys, self._now = plant, capsys, now

    def __call__(self, *words: str, now_us: int = NOON_US) -> Said:
        self._now.setattr("tankcalc.shiftlog.now_us", lambda: now_us, raising=False)
        where = ["--profiles", str(self.plant.folder), "--log", str(self.plant.log)]
        try:
            code = main([*where, "handover", *words])
        except SystemExit as left:
            code = int(left.code or 0)
        out, err = self._capsys.readouterr()
        assert "Traceback" not in err
        assert "defect" not in err
        return Said(code, out, err)


@pytest.fixture
def command(
    plant: Plant, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> Command:
    return Command(plant, capsys, monkeypatch)


@pytest.mark.parametrize("ending", ["html", "md", "csv"])
def test_a_file_of_each_form_is_written(command: Command, tmp_path: Path, ending: str) -> None:
    out = tmp_path / f"report.{ending}"
    answered = command("--out", str(out))
    assert answered.code == 0
    assert answered.out == ""
    assert DAY in answered.err
    assert DAY in out.read_text()
    assert sorted(p.name for p in tmp_path.iterdir()) == sorted([out.name, "site"])


def test_markdown_goes_to_standard_output(command: Command) -> None:
    answered = command("--out", "-", "--shift", "2026-11-30 night")
    assert answered.code == 0
    assert answered.out.startswith("# Shift handover, Test Site, 2026-11-30 Night\n")


def test_the_demo_site_is_said(
    capsys: pytest.CaptureFixture[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name in ("HOME", "XDG_CONFIG_HOME", "XDG_DATA_HOME", "XDG_STATE_HOME"):
        monkeypatch.setenv(name, str(tmp_path))
    monkeypatch.delenv("TANKCALC_PROFILES", raising=False)
    monkeypatch.delenv("TANKCALC_LOG", raising=False)
    assert main(["handover", "--out", "-"]) == 0
    assert "**Demo site: not a real plant.**" in capsys.readouterr().out


def test_the_incoming_person_acknowledges_and_the_report_says_so(
    command: Command, tmp_path: Path
) -> None:
    command.plant.level("V-1", NOON_US - HOUR_US, 10.0)
    first = command("--acknowledge", "--who", "C. Gull", "--note", "read it all", "--shift", DAY)
    assert first.code == 0
    assert DAY in first.err
    with closing(open_store(command.plant.log)) as store:
        (row,) = store.tail(1)
    assert first.out.strip() == row.entry.id
    assert row.entry.kind == "acknowledgement"
    assert dict(row.entry.typed) == {"of": "handover", "what": DAY}
    (item,) = words(command.plant).acknowledged.items
    assert "C. Gull" in item.text
    assert item.text.endswith("read it all")


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ((), "nothing is asked for"),
        (("--acknowledge",), "by name"),
        (("--who", "A", "--out", "x.md"), "--acknowledge"),
        (("--acknowledge", "--who", "A", "--out", "-"), "by itself"),
        (("--out", "report.pdf"), ".html, .md, .csv"),
        (("--out", "x.md", "--shift", "2026-12-02 Day"), "has not begun"),
        (("--out", "x.md", "--shift", "2026-12-01 Noon"), "no shift"),
    ],
)
def test_words_that_do_not_go_together_are_refused(
    command: Command, given: tuple[str, ...], message: str
) -> None:
    answered = command(*given)
    assert answered.code == 2
    assert message in answered.err
    assert not command.plant.log.exists()


def test_a_folder_is_never_written_over(command: Command, tmp_path: Path) -> None:
    (tmp_path / "report.html").mkdir()
    answered = command("--out", str(tmp_path / "report.html"))
    assert answered.code == 2
    assert "is a folder" in answered.err
    assert (tmp_path / "report.html").is_dir()


def test_a_folder_that_is_not_there_is_told(command: Command, tmp_path: Path) -> None:
    answered = command("--out", str(tmp_path / "none" / "report.html"))
    assert answered.code == 2
    assert "there is no folder" in answered.err


def test_a_full_disk_leaves_the_file_that_was_there(
    command: Command, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "report.md"
    out.write_text("the one before")

    def full(_: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    answered = command("--out", str(out))
    assert answered.code == 1
    assert "was not written: no space left on device" in answered.err
    assert out.read_text() == "the one before"
    assert sorted(p.name for p in tmp_path.iterdir()) == ["report.md", "site"]


def test_a_folder_that_cannot_be_written_is_told(command: Command) -> None:
    answered = command("--out", "/proc/report.md")
    assert answered.code == 1
    assert "was not written" in answered.err


def test_the_rights_of_the_file_before_are_kept(command: Command, tmp_path: Path) -> None:
    out = tmp_path / "report.csv"
    out.write_text("")
    out.chmod(0o640)
    assert command("--out", str(out)).code == 0
    assert stat.S_IMODE(out.stat().st_mode) == 0o640

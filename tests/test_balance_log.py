"""The balance over a log, as a user of the command line meets it."""

from __future__ import annotations

import itertools
import json
import math
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from pathlib import Path
from typing import Any, NamedTuple
from zoneinfo import ZoneInfo

import pytest
from sites import BLANKET, TANK, make_site

from tankcalc.balance.contents import Evaluated
from tankcalc.balance.history import History
from tankcalc.balance.periods import boundaries
from tankcalc.cli.main import main
from tankcalc.errors import InputError
from tankcalc.gauging import evaluate
from tankcalc.profiles import Site, load_site
from tankcalc.readings import Readings
from tankcalc.shiftlog import Entry, open_store, parse_time, reading_entry
from tankcalc.shiftlog.make_corrections import amended_movement, withdrawal_entry
from tankcalc.shiftlog.make_words import movement_entry
from tankcalc.typed import readings_from_text
from tankcalc.uncertainty import assess, with_uncertainty

NOON_US = 1_796_126_400_000_000  # 2026-12-01T12:00Z
HOUR_US = 3_600_000_000
DAY_US = 24 * HOUR_US
AREA, RHO = math.pi * 100.0, 850.0


class Said(NamedTuple):
    code: int
    out: str
    err: str


class Plant:
    """A site with a log that can be filled, and the command line on both."""

    def __init__(self, capsys: pytest.CaptureFixture[str], folder: Path, log: Path) -> None:
        self._capsys = capsys
        self.folder, self.log = folder, log
        self.reload()

    def reload(self) -> None:
        self.site: Site = load_site(self.folder)

    def put(self, entry: Entry) -> Entry:
        with closing(open_store(self.log)) as store:
            texts = {v: self.site.text(v) for v in entry.versions.values()}
            store.append(entry, texts)
        return entry

    def read(self, tank: str, t_us: int, level: float, pa: float = 0.0, **facts: Any) -> Entry:
        """Log the p1 that a level gives, off by some pascals."""
        vessel = self.site.tank(tank)
        fluid = self.site.fluid_for(vessel, None)
        above = {"p3_pa": 0.0} if "p3" in vessel.transmitters else {}
        p1 = float(evaluate(vessel, fluid, Readings(level_m=level, **above)).p1_pa or 0.0) + pa
        typed = {"p1": f"{p1!r} Pa"} | ({"p3": "0 Pa"} if above else {})
        if facts.pop("dipped", False):
            typed = {"level": f"{level!r} m"}
        readings, _ = readings_from_text(vessel, typed)
        result = with_uncertainty(
            evaluate(vessel, fluid, readings), assess(vessel, fluid, readings)
        )
        entry = reading_entry(
            site=self.site, tank=vessel, fluid=fluid, typed=typed, result=result,
            now_us=t_us, **facts,
        )  # fmt: skip
        return self.put(entry)

    def move(self, tank: str, t_us: int, other: str | None = None, **quantity: str) -> Entry:
        """Log a movement."""
        return self.put(
            movement_entry(
                site=self.site,
                tank=self.site.tank(tank),
                other=None if other is None else self.site.tank(other),
                now_us=t_us,
                **quantity,
            )
        )

    def __call__(self, *words: str) -> Said:
        where = ["--profiles", str(self.folder), "--log", str(self.log)]
        try:
            code = main([*where, "balance", *words])
        except SystemExit as left:
            code = int(left.code or 0)
        out, err = self._capsys.readouterr()
        assert "Traceback" not in err
        assert "defect" not in err
        return Said(code, out, err)

    def json(self, *words: str) -> dict[str, Any]:
        said = self(*words, "--json")
        assert said.code == 0, said.err
        data: dict[str, Any] = json.loads(said.out)
        return data


@pytest.fixture
def plant(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Iterator[Plant]:
    folder = make_site(tmp_path / "site")
    accurate = 'accuracy = "30 Pa"\n'
    for name in ("V-1", "V-2"):
        text = TANK.replace("V-1", name) + accurate
        (folder / "tanks" / f"{name}.toml").write_text(text)
    (folder / "tanks" / "V-3.toml").write_text(
        TANK.replace("V-1", "V-3") + accurate + BLANKET + accurate
    )
    return Plant(capsys, folder, tmp_path / "log.sqlite")


SPAN = ("--since", "2026-12-01T12:00Z", "--until", "2026-12-02T12:00Z")


def test_a_delivery_that_agrees_is_not_significant(plant: Plant) -> None:
    plant.read("V-1", NOON_US - HOUR_US, 12.0)
    plant.move("V-1", NOON_US + HOUR_US, delivered=f"{8.0 * AREA * RHO!r} kg")
    plant.read("V-1", NOON_US + 20 * HOUR_US, 4.0)
    (one,) = plant.json(*SPAN)["tanks"]
    mass = one["mass_kg"]
    assert one["opening"]["before_s"] == 3600.0
    assert one["closing"]["before_s"] == 4 * 3600.0
    assert mass["moved"] == {"delivered": pytest.approx(-8.0 * AREA * RHO)}
    assert mass["difference"] == pytest.approx(0.0, abs=1.0)
    assert mass["verdict"] == "not significant"
    # A meter of 0.1 % and a table of 0.1 %, each on what moved, and 10 Pa of noise twice.
    moved = 8.0 * AREA * RHO
    expected = math.hypot(1e-3 * moved, 1e-3 * moved, math.sqrt(2.0) * 10.0 * AREA / 9.81)
    assert mass["standard_uncertainty"] == pytest.approx(expected, rel=0.01)
    assert one["standard_volume_m3"] is None or "difference" in one["standard_volume_m3"]


def test_a_loss_is_said_with_its_significance_and_no_cause(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 12.0)
    plant.move("V-1", NOON_US + HOUR_US, delivered="100 m3")
    first = plant.read("V-1", NOON_US + 20 * HOUR_US, 12.0 - 150.0 / AREA)
    said = plant(*SPAN)
    assert said.code == 0
    # 50 m3 of 850 kg/m3 are missing.
    assert "-42.500 t" in said.out
    assert "unexplained loss, significance" in said.out
    assert "leak" not in said.out.lower()
    assert "made mass by the tank's density then" in " ".join(said.out.split())
    with closing(open_store(plant.log)) as store:
        number, digest = store.head()
    assert f"Head of the log:\n  {number}:{digest.hex()}\n" in said.out
    assert "Not a safety function" in said.out
    assert all(len(line) < 80 for line in said.out.splitlines())
    assert first.id  # the log was only read
    assert number == 3


def test_amendments_hold_and_withdrawn_entries_do_not(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 12.0)
    wrong = plant.move("V-1", NOON_US + HOUR_US, delivered="10 t")
    plant.read("V-1", NOON_US + 20 * HOUR_US, 12.0 - 100_000.0 / AREA / RHO)
    twice = plant.move("V-1", NOON_US + 2 * HOUR_US, delivered="100 t")
    later = NOON_US + 40 * HOUR_US
    plant.put(
        amended_movement(
            site=plant.site, original=wrong, tank=plant.site.tank("V-1"), other=None,
            delivered="100 t", reason="a zero was lost", now_us=later,
        )
    )  # fmt: skip
    plant.put(
        withdrawal_entry(
            site=plant.site, original=twice, reason="booked twice", now_us=later + HOUR_US
        )
    )
    mass = plant.json(*SPAN)["tanks"][0]["mass_kg"]
    assert mass["moved"] == {"delivered": -100_000.0}
    assert mass["difference"] == pytest.approx(0.0, abs=1.0)


def test_an_amended_time_moves_a_movement_into_the_span(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 12.0)
    plant.read("V-1", NOON_US + 20 * HOUR_US, 12.0)
    entry = plant.move("V-1", NOON_US + 30 * HOUR_US, delivered="5 t")
    assert plant.json(*SPAN)["tanks"][0]["mass_kg"]["moved"] == {}
    plant.put(
        amended_movement(
            site=plant.site, original=entry, tank=plant.site.tank("V-1"), other=None,
            delivered="5 t", reason="wrong day", now_us=NOON_US + 40 * HOUR_US,
            t_us=NOON_US + 3 * HOUR_US,
        )
    )  # fmt: skip
    assert plant.json(*SPAN)["tanks"][0]["mass_kg"]["moved"] == {"delivered": -5000.0}


def test_readings_that_were_rejected_are_left_out_and_counted(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 12.0)
    plant.read("V-1", NOON_US + 20 * HOUR_US, 11.0)
    plant.read("V-1", NOON_US + 21 * HOUR_US, 3.0, rejected=True, reason="hose in the tap")
    (one,) = plant.json(*SPAN)["tanks"]
    assert one["closing"]["level_m"] == pytest.approx(11.0, abs=1e-6)
    assert any("1 reading was passed over" in note for note in one["notes"])


def test_a_transfer_counts_for_both_tanks_and_cancels_on_the_site(plant: Plant) -> None:
    moved = 2.0 * AREA * RHO
    for tank, before, after in (("V-1", 12.0, 10.0), ("V-2", 3.0, 4.98)):
        plant.read(tank, NOON_US, before)
        plant.read(tank, NOON_US + 20 * HOUR_US, after)
    plant.move("V-1", NOON_US + 2 * HOUR_US, other="V-2", delivered=f"{moved!r} kg")
    data = plant.json(*SPAN)
    first, second = data["tanks"]
    assert first["mass_kg"]["moved"] == {"transfer out": pytest.approx(-moved)}
    assert second["mass_kg"]["moved"] == {"transfer in": pytest.approx(moved)}
    assert data["total"]["mass_kg"]["difference"] == pytest.approx(-0.02 * AREA * RHO, abs=1.0)
    assert data["total"]["mass_kg"]["throughput"] == 0.0
    assert data["total"]["mass_kg"]["uncertainties"]["meters"] == pytest.approx(0.0, abs=1e-6)
    (transfer,) = data["transfers_kg"]
    assert (transfer["source"], transfer["target"]) == ("V-1", "V-2")
    assert transfer["out"] == pytest.approx(moved, rel=1e-6)
    assert transfer["difference"] == pytest.approx(-0.02 * AREA * RHO, abs=1.0)
    # The meter has no part in what the tanks say of each other.
    assert "V-1 to V-2: out" in plant(*SPAN).out


def test_a_transfer_that_both_tanks_logged_counts_once(plant: Plant) -> None:
    for tank, before, after in (("V-1", 12.0, 11.0), ("V-2", 3.0, 4.0)):
        plant.read(tank, NOON_US, before)
        plant.read(tank, NOON_US + 20 * HOUR_US, after)
    text = f"{AREA * RHO!r} kg"
    plant.move("V-1", NOON_US + 2 * HOUR_US, other="V-2", delivered=text)
    plant.move("V-2", NOON_US + 2 * HOUR_US + 60_000_000, other="V-1", received=text)
    data = plant.json(*SPAN)
    for one in data["tanks"]:
        assert one["movements"] == 1
        assert one["mass_kg"]["difference"] == pytest.approx(0.0, abs=1.0)
        assert any("taken for one" in note for note in one["notes"])


def test_a_changed_transmitter_is_noticed_and_does_not_cancel(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 8.0)
    file = plant.folder / "tanks" / "V-1.toml"
    file.write_text(file.read_text() + '\n[limits]\nhigh_high = "14 m"\n')
    plant.reload()
    plant.read("V-1", NOON_US + 10 * HOUR_US, 8.0)
    (one,) = plant.json(*SPAN)["tanks"]
    quiet = one["mass_kg"]["uncertainties"]
    assert quiet["p1 zero"] == pytest.approx(0.0, abs=1e-6)  # a limit is no part of it
    file.write_text(file.read_text().replace('"160 kPa"]', '"200 kPa"]'))
    plant.reload()
    plant.read("V-1", NOON_US + 20 * HOUR_US, 8.0)
    (one,) = plant.json(*SPAN)["tanks"]
    zero = 30.0 * math.sqrt(8.0) / 3.0 * AREA / 9.81 * math.sqrt(2.0)
    assert one["mass_kg"]["uncertainties"]["p1 zero"] == pytest.approx(zero, rel=0.01)
    assert one["mass_kg"]["uncertainties"]["geometry"] == pytest.approx(0.0, abs=1e-6)
    assert any("Changed in between" in note and "p1 zero" in note for note in one["notes"])


def test_another_product_is_said(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 8.0)
    fluids = plant.folder / "fluids"
    (fluids / "spirit.toml").write_text((fluids / "oil.toml").read_text().replace("850", "750"))
    file = plant.folder / "tanks" / "V-1.toml"
    file.write_text(file.read_text().replace('"oil"', '"spirit"'))
    plant.reload()
    plant.read("V-1", NOON_US + 10 * HOUR_US, 8.0)
    (one,) = plant.json(*SPAN)["tanks"]
    assert any("was oil and is spirit" in note for note in one["notes"])
    assert one["mass_kg"]["uncertainties"]["density"] > 100.0


def drained(plant: Plant, days: int, loss_kg_h: float) -> None:
    """A tank that sells a day's worth every day, with noise of 10 Pa and a loss over time."""
    import numpy as np

    rng = np.random.default_rng(2)
    kilograms = 14.0 * AREA * RHO
    plant.read("V-1", NOON_US, 14.0, pa=0.0)
    for day in range(1, days + 1):
        sold = float(rng.uniform(2e4, 9e4))
        plant.move("V-1", NOON_US + day * DAY_US - 5 * HOUR_US, delivered=f"{sold!r} kg")
        kilograms -= sold + 24.0 * loss_kg_h
        level = kilograms / AREA / RHO
        pascal = float(10.0 * rng.standard_normal())
        plant.read("V-1", NOON_US + day * DAY_US - HOUR_US, level, pa=pascal)


def test_periods_show_a_loss_that_no_single_one_does(plant: Plant) -> None:
    drained(plant, 24, 25.0)
    words = ("--since", "2026-12-01T12:00Z", "--until", "2026-12-25T12:00Z", "--every", "1 d")
    (one,) = plant.json(*words, "--causes", "--tank", "V-1")["tanks"]
    assert len(one["periods"]) == 24
    sums = one["cusum"]["mass_kg"]
    assert sums["periods"] == 24
    assert sums["enough"]
    assert sums["alert"] == "loss"
    single = [p["mass_kg"]["significance"] for p in one["periods"]]
    assert sum(abs(worth) <= 1.0 for worth in single) > 12
    slopes = {s["name"]: s for s in one["causes"]["mass_kg"]["slopes"]}
    hours = slopes["hours"]
    assert hours["value"] == pytest.approx(-25.0, abs=4.0 * hours["standard_error"])
    text = plant(*words, "--causes", "--drift").out
    assert all(len(line) < 80 for line in text.splitlines())
    flat = " ".join(text.split())
    assert "an unexplained loss goes on" in flat
    assert "Periods: mean -" in flat
    assert "an hour (k = 1), t" in flat


def test_few_periods_say_so(plant: Plant) -> None:
    drained(plant, 4, 0.0)
    words = ("--since", "2026-12-01T12:00Z", "--until", "2026-12-05T12:00Z", "--every", "1 d")
    assert "4 periods are few: 20 are needed" in " ".join(plant(*words).out.split())
    assert plant.json(*words)["tanks"][0]["cusum"]["mass_kg"]["scatter"] is None


def test_a_tank_at_rest_is_watched_for_drift(plant: Plant) -> None:
    for k in range(4 * 24):
        t_us = NOON_US + k * HOUR_US
        plant.read("V-3", t_us, 8.0 - 0.0005 * k, pa=3.0 * math.sin(1.7 * k))
    words = ("--since", "2026-12-01T12:00Z", "--until", "2026-12-05T12:00Z", "--drift")
    (one,) = plant.json(*words)["tanks"]
    rest = one["rest"]
    assert rest["mass_kg"]["cycles"] == 4
    assert rest["mass_kg"]["per_hour"] == pytest.approx(-0.0005 * AREA * RHO, rel=0.01)
    assert rest["mass_kg"]["verdict"].startswith("unexplained loss")
    assert set(rest["pressures_pa"]) == {"p1", "p3"}
    text = plant(*words).out
    assert "4 daily means" in text
    assert "leak" not in text.lower()


def test_a_tank_that_gains_while_another_loses_is_named(plant: Plant) -> None:
    for k in range(24):
        for tank, sign in (("V-1", -1.0), ("V-2", 1.0)):
            plant.read(tank, NOON_US + k * HOUR_US, 8.0 + sign * 0.002 * k, pa=math.sin(9.0 * k))
    first, second = plant.json(*SPAN, "--drift")["tanks"]
    assert "At rest V-2 shows a gain at the same time: a valve may be passing." in first["notes"]
    assert "At rest V-1 shows a loss at the same time: a valve may be passing." in second["notes"]


def test_standard_volume_is_balanced_beside_the_mass(plant: Plant) -> None:
    for k, (t_us, level) in enumerate(((NOON_US, 12.0), (NOON_US + 5 * HOUR_US, 10.0))):
        entry = plant.read("V-1", t_us, level)
        figures = dict(entry.result or {})
        figures["standard_volume_m3"] = 0.98 * figures["volume_m3"]
        uid = bytes([7, k]) * 8
        plant.put(replace(entry, uid=uid, t_us=t_us + 60_000_000, result=figures))
    plant.move("V-1", NOON_US + HOUR_US, delivered="600 m3")
    drawn = plant.move("V-1", NOON_US + 2 * HOUR_US, delivered="5 m3")
    plant.put(
        withdrawal_entry(
            site=plant.site, original=drawn, reason="water", now_us=NOON_US + 9 * HOUR_US
        )
    )
    water = {"drawn": "5 m3", "other": ""}
    plant.put(replace(drawn, uid=bytes([9]) * 16, typed=water))
    (one,) = plant.json("--since", "2026-12-01T12:01Z", *SPAN[2:])["tanks"]
    mass, standard = one["mass_kg"], one["standard_volume_m3"]
    # 600 m3 at the tank's 850 kg/m3; 5 m3 of water, which are no product.
    assert mass["moved"]["delivered"] == pytest.approx(-600.0 * RHO)
    assert mass["moved"]["water drawn"] == pytest.approx(-5.0 * 999.1)
    assert standard["moved"] == {"delivered": pytest.approx(-600.0 * 0.98)}
    assert standard["difference"] == pytest.approx(0.98 * (600.0 - 2.0 * AREA), rel=1e-6)
    # Table and meter of 0.1 % each; the density has no part in what was metered in volume.
    assert standard["uncertainties"]["meters"] == pytest.approx(0.588, rel=1e-6)
    assert standard["uncertainties"]["geometry"] == pytest.approx(0.98e-3 * 2.0 * AREA, rel=1e-3)


def test_a_dipped_tank_and_a_volume_meter_share_the_error_of_the_density(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 12.0, dipped=True)
    plant.move("V-1", NOON_US + HOUR_US, delivered=f"{8.0 * AREA!r} m3")
    plant.read("V-1", NOON_US + 5 * HOUR_US, 4.0, dipped=True)
    mass = plant.json(*SPAN)["tanks"][0]["mass_kg"]
    # Both are volumes times one density: whatever it is, it is the same in both.
    assert mass["uncertainties"]["density"] == pytest.approx(0.0, abs=0.1)
    # 3 mm each, of which a quarter of the variance is new.
    dips = math.sqrt(2.0 * 0.25) * 0.003 * AREA * RHO
    assert mass["uncertainties"]["level"] == pytest.approx(dips, rel=1e-3)


@pytest.mark.parametrize("system", ["us", "imperial"])
def test_other_units_fit_the_terminal(plant: Plant, system: str) -> None:
    drained(plant, 3, 0.0)
    words = ("--since", "2026-12-01T12:00Z", "--until", "2026-12-04T12:00Z", "--every", "1 d")
    said = plant("--units", system, *words, "--drift", "--causes")
    assert said.code == 0
    assert " lb" in said.out
    assert all(len(line) < 80 for line in said.out.splitlines())


def test_a_movement_ends_a_rest(plant: Plant) -> None:
    for k in range(12):
        plant.read("V-1", NOON_US + k * HOUR_US, 8.0)
    plant.move("V-1", NOON_US + 8 * HOUR_US + 1, received="0 kg".replace("0", "1"))
    rest = plant.json(*SPAN, "--drift")["tanks"][0]["rest"]
    assert rest["to"] == "2026-12-01T20:00:00Z"
    assert "sun and night" in " ".join(rest["hints"])


def test_a_tank_first_read_within_the_span_opens_late_and_says_so(plant: Plant) -> None:
    plant.read("V-1", NOON_US + 2 * HOUR_US, 8.0)
    plant.read("V-1", NOON_US + 3 * HOUR_US, 8.0)
    (one,) = plant.json(*SPAN)["tanks"]
    assert one["opening"]["before_s"] == -7200.0
    assert any("2.0 h late" in note for note in one["notes"])


def test_an_opening_is_found_however_long_ago(plant: Plant) -> None:
    plant.read("V-1", NOON_US - 400 * DAY_US, 9.0)
    plant.read("V-1", NOON_US - 60 * DAY_US, 8.0)
    plant.read("V-1", NOON_US + HOUR_US, 8.0)
    (one,) = plant.json(*SPAN)["tanks"]
    assert one["opening"]["before_s"] == 60 * 86_400.0


@pytest.mark.parametrize(
    ("words", "code", "said"),
    [
        (("--since", "2026-12-03T12:00Z", "--until", "2026-12-02T12:00Z"), 2, "--until"),
        (("--since", "yesterday"), 2, "ISO 8601"),
        ((*SPAN, "--every", "1 kg"), 2, "time"),
        ((*SPAN, "--every", "1 s"), 2, "less than a minute"),
        ((*SPAN, "--causes"), 2, "--every"),
        ((*SPAN, "--meter", "80 %"), 2, "--meter"),
        ((*SPAN, "--tank", "V-9"), 2, "V-9"),
        ((), 2, "--since"),
        (SPAN, 3, "no reading is logged"),
        ((*SPAN, "--tank", "V-2"), 3, "V-2"),
    ],
)
def test_what_cannot_be_answered_says_why(
    plant: Plant, words: tuple[str, ...], code: int, said: str
) -> None:
    found = plant(*words)
    assert found.code == code
    assert said in found.err


def test_a_movement_without_a_figure_leaves_no_balance(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 8.0)
    entry = plant.move("V-1", NOON_US + HOUR_US, delivered="5 t")
    empty = {"volume_m3": None, "mass_kg": None}
    plant.put(replace(entry, uid=bytes(16), result=empty))
    plant.read("V-1", NOON_US + 2 * HOUR_US, 8.0)
    found = plant(*SPAN)
    assert found.code == 3
    assert "neither mass nor volume" in found.err
    assert "gain or loss" not in found.out


def test_one_reading_is_no_balance(plant: Plant) -> None:
    plant.read("V-1", NOON_US + HOUR_US, 8.0)
    found = plant(*SPAN)
    assert found.code == 3
    assert "only one reading stands" in found.err


def test_a_tank_that_has_left_the_site_keeps_its_figures(plant: Plant) -> None:
    plant.read("V-2", NOON_US, 8.0)
    plant.read("V-2", NOON_US + 5 * HOUR_US, 7.9)
    (plant.folder / "tanks" / "V-2.toml").unlink()
    (one,) = plant.json(*SPAN)["tanks"]
    assert one["mass_kg"]["difference"] == pytest.approx(-0.1 * AREA * RHO, rel=1e-6)
    assert set(one["mass_kg"]["uncertainties"]) == {"readings"}
    assert any("changed since" in note for note in one["notes"])


def test_a_hostile_name_is_inert(plant: Plant) -> None:
    hostile = "V\x1b[31m-1"
    entry = plant.read("V-1", NOON_US, 8.0)
    later = plant.read("V-1", NOON_US + HOUR_US, 8.0)
    for k, one in enumerate((entry, later)):
        uid = bytes([k]) * 16
        plant.put(replace(one, uid=uid, tank=hostile, fluid="\x07oil"))
    said = plant(*SPAN)
    assert "\x1b" not in said.out + said.err
    assert "\x07" not in said.out + said.err


def test_whole_days_keep_the_local_time_when_the_clocks_change() -> None:
    zone = ZoneInfo("Europe/Lisbon")
    start = parse_time("2026-10-23T06:00", zone)
    cuts = boundaries(start, parse_time("2026-10-27T06:00", zone), 86_400.0, zone)
    hours = [(b - a) / HOUR_US for a, b in itertools.pairwise(cuts)]
    assert hours == [24.0, 25.0, 24.0, 24.0]
    # A local time that is skipped: the cut is where it would be without the change.
    start = parse_time("2026-03-27T01:30", zone)
    cuts = boundaries(start, parse_time("2026-03-30T01:30", zone), 86_400.0, zone)
    assert [(b - a) / HOUR_US for a, b in itertools.pairwise(cuts)] == [24.0, 24.0, 23.0]
    even = boundaries(start, start + 2 * DAY_US, 8 * 3600.0, zone)
    assert {b - a for a, b in itertools.pairwise(even)} == {8 * HOUR_US}


def test_too_many_periods_are_refused() -> None:
    with pytest.raises(InputError, match="more than"):
        boundaries(0, 400 * DAY_US, 60.0, ZoneInfo("UTC"))


def test_readings_are_worked_out_once(plant: Plant) -> None:
    plant.read("V-1", NOON_US, 8.0)
    plant.read("V-1", NOON_US + HOUR_US, 8.0)
    with closing(open_store(plant.log)) as store:
        history, evaluated = History(store), Evaluated(plant.site, store)
        log = history.tank("V-1")
        first = log.first(NOON_US - HOUR_US, NOON_US + DAY_US)
        assert first is not None
        assert evaluated.contents(first) is evaluated.contents(first)
        assert log.at(NOON_US - 1) is None
        assert log.at(NOON_US) == first

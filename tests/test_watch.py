"""What is going on in every tank, from the log and the profiles."""

from __future__ import annotations

import random
import time
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest
from handover_plant import AREA_M2, DAY_US, HOUR_US, NOON_US, OIL_KG_M3, Plant
from sites import TANK

from tankcalc.limits.latch import Action
from tankcalc.shiftlog import Entry, Row, open_store
from tankcalc.shiftlog.make_words import clock_entry
from tankcalc.shiftlog.uid import new_uid
from tankcalc.watch import Kept, TankWatch, Watched, watch
from tankcalc.watch.actions import actions_from
from tankcalc.watch.state import Ages


@pytest.fixture
def plant(tmp_path: Path) -> Plant:
    return Plant(tmp_path)


def look(plant: Plant, now_us: int = NOON_US, **more: object) -> Watched:
    with closing(open_store(plant.log)) as store:
        return watch(store, plant.site, now_us, **more)  # type: ignore[arg-type]


def tank(plant: Plant, name: str = "V-1", now_us: int = NOON_US) -> TankWatch:
    found = look(plant, now_us).tank(name)
    assert found is not None
    return found


def states(one: TankWatch) -> dict[str, str]:
    return {alert.key: alert.state for alert in one.alerts}


def test_an_empty_log_tells_of_the_tanks_of_the_site_alone(plant: Plant) -> None:
    found = look(plant)
    assert [one.name for one in found.tanks] == ["V-1", "V-2"]
    assert all(
        one.last is None and one.alerts == () and one.product == "Oil" for one in found.tanks
    )
    assert found.tanks[0].ages == Ages()


def test_a_rate_in_mass_and_the_times_to_the_limits(plant: Plant) -> None:
    # 0.5 m in an hour of a tank 20 m wide: by hand, 0.5 A rho in mass, 0.5 A in volume.
    plant.level("V-1", NOON_US - HOUR_US, 10.0, movement="receiving")
    plant.level("V-1", NOON_US, 10.5, movement="receiving")
    one = tank(plant)
    assert one.rate is not None
    assert one.flow_m3_s is not None
    assert one.rate.per_s * 3600.0 == pytest.approx(0.5 * AREA_M2 * OIL_KG_M3, rel=2e-3)
    assert one.flow_m3_s[0] * 3600.0 == pytest.approx(0.5 * AREA_M2, rel=2e-3)
    assert one.contradiction is None
    times = {arrival.limit: arrival for arrival in one.arrivals}
    working = times["maximum_working"]
    assert working.expected_s == pytest.approx(3.1 / 0.5 * 3600.0, rel=1e-3)
    assert working.earliest_s is not None
    assert working.latest_s is not None
    assert working.earliest_s < 3.1 / 0.5 * 3600.0 < working.latest_s
    assert times["minimum_working"].expected_s is None
    assert one.room_m3 == pytest.approx(3.1 * AREA_M2, rel=1e-4)
    assert one.pumpable_m3 == pytest.approx(9.6 * AREA_M2, rel=1e-4)
    assert one.ullage_volume_m3 == pytest.approx(4.5 * AREA_M2, rel=1e-4)


def test_noise_is_static_and_has_no_time_to_a_limit(plant: Plant) -> None:
    plant.level("V-1", NOON_US - HOUR_US, 10.0)
    plant.level("V-1", NOON_US, 10.0005)
    one = tank(plant)
    assert one.rate is not None
    assert one.rate.static is True
    assert one.arrivals == ()


def test_a_tank_that_falls_while_it_is_said_to_receive_contradicts(plant: Plant) -> None:
    plant.level("V-1", NOON_US - HOUR_US, 10.0, movement="receiving")
    plant.level("V-1", NOON_US, 9.0, movement="receiving")
    one = tank(plant)
    assert one.contradiction is not None
    assert one.contradiction.code == "direction_contradicts"
    assert states(one)["movement"] == "raised"


def test_no_rate_is_taken_across_a_step_of_the_clock(plant: Plant) -> None:
    plant.level("V-1", NOON_US - HOUR_US, 10.0)
    step = clock_entry(site=plant.site, was_us=NOON_US - 1000, is_us=NOON_US - 500)
    plant.put(step)
    plant.level("V-1", NOON_US, 11.0)
    assert tank(plant).rate is None
    plant.level("V-1", NOON_US + HOUR_US, 11.0)
    assert tank(plant, now_us=NOON_US + HOUR_US).rate is not None


def test_an_alert_is_acknowledged_set_aside_and_brought_back_from_the_log(plant: Plant) -> None:
    plant.level("V-1", NOON_US, 14.2)
    assert states(tank(plant)) == {"above_high_high": "raised"}
    plant.answer("V-1", "above_high_high", NOON_US + 60_000_000)
    now = NOON_US + HOUR_US
    (alert,) = tank(plant, now_us=now).alerts
    assert (alert.state, alert.by) == ("acknowledged", "B. Tern")
    until = NOON_US + 3 * HOUR_US
    plant.answer("V-1", "above_high_high", now, until_us=until, reason="washing")
    (alert,) = tank(plant, now_us=now + 1).alerts
    assert (alert.state, alert.until_us, alert.reason) == ("set aside", until, "washing")
    plant.answer("V-1", "above_high_high", now + HOUR_US)
    (alert,) = tank(plant, now_us=now + HOUR_US + 1).alerts
    assert alert.state == "raised"
    plant.answer("V-1", "above_high_high", now + HOUR_US + 2)
    (alert,) = tank(plant, now_us=now + HOUR_US + 3).alerts
    assert alert.state == "acknowledged"


def test_what_was_acknowledged_of_another_tank_changes_nothing(plant: Plant) -> None:
    plant.level("V-1", NOON_US, 14.2)
    plant.level("V-2", NOON_US, 14.2)
    plant.answer("V-2", "above_high_high", NOON_US + 1)
    found = look(plant, NOON_US + 2)
    assert [(name, alert.state) for name, alert in found.alerts] == [
        ("V-1", "raised"),
        ("V-2", "acknowledged"),
    ]


def test_a_time_that_is_none_sets_nothing_aside(plant: Plant) -> None:
    entry = plant.answer("V-1", "stale", NOON_US)
    broken = [
        Row(n, _with(entry, until), b"") for n, until in enumerate(("soon", "1999-01-01T00:00Z"))
    ]
    expected = [Action("stale", "acknowledge", "B. Tern", NOON_US)] * 2
    assert list(actions_from(broken)["V-1"]) == expected


def _with(entry: Entry, until: str) -> Entry:
    return replace(entry, typed={**entry.typed, "until": until})


def test_amended_and_withdrawn_readings_count_as_they_stand(plant: Plant) -> None:
    first = plant.level("V-1", NOON_US - 2 * HOUR_US, 10.0)
    wrong = plant.level("V-1", NOON_US - HOUR_US, 14.3)
    plant.amend(first, {"level": "9.0 m"}, NOON_US - HOUR_US, "misread")
    plant.withdraw(wrong, NOON_US)
    one = tank(plant)
    assert one.figure("level_m") == 9.0
    assert states(one) == {}
    assert [s.state for s in one.corrections] == ["amended", "withdrawn"]
    assert one.ages.dip_us == NOON_US - 2 * HOUR_US


def test_a_rejected_reading_does_not_count_and_a_refused_one_does(plant: Plant) -> None:
    plant.level("V-1", NOON_US - 2 * HOUR_US, 10.0)
    plant.level("V-1", NOON_US - HOUR_US, 13.9, rejected=True, reason="valve open")
    plant.read("V-1", NOON_US, typed={"p1": "-20 kPa"})
    one = tank(plant)
    assert one.refused
    assert one.figure("level_m") == pytest.approx(10.0, abs=0.01)
    assert states(one) == {"refused": "raised"}
    assert one.ages.reading_us == NOON_US


def test_ages_are_of_what_was_typed(plant: Plant) -> None:
    plant.read("V-1", NOON_US - 3 * HOUR_US, typed={"level": "5 m", "density": "851 kg/m3"})
    plant.read("V-1", NOON_US - 2 * HOUR_US, typed={"ullage": "10 m", "water_level": "0 m"})
    plant.level("V-1", NOON_US, 5.0)
    assert tank(plant).ages == Ages(
        NOON_US, NOON_US - 2 * HOUR_US, NOON_US - 3 * HOUR_US, NOON_US - 2 * HOUR_US
    )


def test_a_tank_read_long_ago_is_stale_and_shows_what_it_held(plant: Plant) -> None:
    plant.level("V-1", NOON_US - 20 * DAY_US, 5.0)
    one = tank(plant)
    assert one.figure("level_m") == pytest.approx(5.0, abs=0.01)
    assert states(one) == {"stale": "raised"}


def test_an_alert_that_stands_for_weeks_keeps_its_beginning_and_its_acknowledgement(
    plant: Plant,
) -> None:
    begin = NOON_US - 20 * DAY_US
    plant.level("V-1", begin - DAY_US, 10.0)
    for day in range(21):
        plant.level("V-1", begin + day * DAY_US, 14.2)
    plant.answer("V-1", "above_high_high", begin + HOUR_US)
    one = tank(plant)
    (alert,) = [alert for alert in one.alerts if alert.key == "above_high_high"]
    assert (alert.state, alert.since_us) == ("acknowledged", begin)
    assert len(one.looks) == 8


def test_a_fault_has_no_age_limit_and_ends_when_it_is_closed(plant: Plant) -> None:
    kept = Kept()
    plant.fault("V-1", NOON_US - 300 * DAY_US, "p1", note="sticks")
    plant.fault("V-1", NOON_US - DAY_US, "gauge")
    with closing(open_store(plant.log)) as store:
        (one, _) = watch(store, plant.site, NOON_US, kept=kept).tanks
        assert [(f.instrument, f.since_us) for f in one.faults] == [
            ("p1", NOON_US - 300 * DAY_US),
            ("gauge", NOON_US - DAY_US),
        ]
        plant.fault("V-1", NOON_US - HOUR_US, "p1", opened=False)
        # What is kept from the first time does not hide what was logged since.
        (one, _) = watch(store, plant.site, NOON_US, kept=kept).tanks
        assert [f.instrument for f in one.faults] == ["gauge"]


def test_a_fault_that_is_opened_again_after_it_was_withdrawn_counts_from_then(plant: Plant) -> None:
    first = plant.fault("V-1", NOON_US - 2 * HOUR_US, "p1")
    plant.withdraw(first, NOON_US - HOUR_US)
    assert tank(plant).faults == ()
    plant.fault("V-1", NOON_US, "p1")
    assert [f.since_us for f in tank(plant).faults] == [NOON_US]


def test_a_tank_file_that_cannot_be_read_spoils_no_other(plant: Plant) -> None:
    plant.level("V-1", NOON_US, 5.0)
    plant.level("V-2", NOON_US, 6.0)
    plant.tank_file("V-2", 'name = "V-2"\n[shape]\nkind = "sphere"\ndiametre = "3 m"\n')
    good, bad = look(plant).tanks
    assert good.figure("level_m") == pytest.approx(5.0, abs=0.01)
    assert good.problem == ""
    assert "tanks/V-2.toml" in bad.problem
    assert "diametre" in bad.problem
    # What the log says of it is still there.
    assert bad.figure("level_m") == pytest.approx(6.0, abs=0.01)
    assert bad.alerts == ()


def test_a_fluid_that_cannot_be_read_leaves_the_limits_watched(plant: Plant) -> None:
    plant.level("V-1", NOON_US - HOUR_US, 14.2)
    plant.level("V-1", NOON_US, 14.2)
    (plant.folder / "fluids" / "oil.toml").write_text("name = ")
    one = tank(plant)
    assert "oil" in one.problem
    assert states(one)["above_high_high"] == "raised"
    assert one.rate is not None
    assert one.rate.uncertainty_per_s is None


def test_a_tank_that_only_the_log_knows_is_told(plant: Plant) -> None:
    plant.level("V-2", NOON_US, 6.0)
    (plant.folder / "tanks" / "V-2.toml").unlink()
    one = tank(plant, "V-2")
    assert "there is no tank" in one.problem
    assert one.figure("mass_kg") is not None


def test_the_same_history_gives_the_same_alerts_whatever_is_kept(plant: Plant) -> None:
    rng = random.Random(5)
    for k in range(40):
        plant.level("V-1", NOON_US - (40 - k) * HOUR_US, rng.uniform(12.0, 14.6), movement="static")
    kept = Kept()
    with closing(open_store(plant.log)) as store:
        for now_us in (NOON_US - 10 * HOUR_US, NOON_US, NOON_US):
            again = watch(store, plant.site, now_us, kept=kept)
            assert again.tanks[0].alerts == watch(store, plant.site, now_us).tanks[0].alerts


@pytest.fixture
def busy(plant: Plant) -> Iterator[Plant]:
    """Thirty tanks with a week of hourly readings each."""
    names = [f"B-{n:02}" for n in range(30)]
    for name in names:
        plant.tank_file(name, TANK.replace("V-1", name))
    rows = [plant.level("B-00", NOON_US, 1.0 + 0.05 * k, movement="receiving") for k in range(168)]
    with closing(open_store(plant.log)) as store:
        texts = {v: plant.site.text(v) for v in rows[0].versions.values()}
        for name in names:
            moved = (
                replace(row, uid=new_uid(NOON_US), tank=name, t_us=NOON_US - (168 - k) * HOUR_US)
                for k, row in enumerate(rows)
            )
            store.append_many((row, texts) for row in moved)
        yield plant


def test_thirty_tanks_with_a_week_of_hours_take_a_few_seconds_at_most(busy: Plant) -> None:
    begin = time.process_time()
    found = look(busy)
    took = time.process_time() - begin
    assert sum(len(one.looks) for one in found.tanks) > 30 * 160
    # Two seconds on a machine of the project's kind; twice that is allowed for its neighbours.
    assert took < 4.0

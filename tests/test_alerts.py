"""Alerts: raised, acknowledged by name, set aside, returned; one cause, one alert."""

from __future__ import annotations

import random
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st
from tanks import single, transmitters, upright

from tankcalc.errors import InputError
from tankcalc.fluids.expansion import Expansion
from tankcalc.gauging import evaluate
from tankcalc.instruments import Transmitter
from tankcalc.limits.alerts import Alert, alerts_from
from tankcalc.limits.kinds import ORDER, causes_of
from tankcalc.limits.latch import Action
from tankcalc.limits.looks import Look, look_of
from tankcalc.limits.rates import Timed
from tankcalc.limits.settings import AlertSettings
from tankcalc.readings import Readings

HOUR = 3_600_000_000
MINUTE = HOUR // 60
AREA_M2 = 314.159265
LIMITS = {
    "low_low": 0.7,
    "minimum_working": 0.9,
    "maximum_working": 13.6,
    "high_high": 14.0,
    "critical_high": 14.5,
}
TANK = upright(
    limits_m=LIMITS,
    transmitters=transmitters(p1=0.5, p3=14.9),
    relief_pa=(-500.0, 2000.0),
    largest_in_m3_s=600.0 / 3600.0,
    largest_out_m3_s=450.0 / 3600.0,
)
PLAIN = AlertSettings(stale_after_s=1e9)


def look(hour: float, level: float | None = 10.0, *, u: float = 0.5, **more: Any) -> Look:
    """A look at an hour; the level alone tells the volume."""
    held = {} if level is None else {"volume_m3": level * AREA_M2}
    stated: dict[str, Any] = {"level_m": level, "vapour_gauge_pa": 0.0}
    return Look(Timed(round(hour * HOUR), held, {"volume_m3": u} if held else {}), **stated | more)


def standing(
    looks: list[Look], *actions: Action, at: float, settings: AlertSettings = PLAIN
) -> tuple[Alert, ...]:
    return alerts_from(TANK, looks, actions, round(at * HOUR), settings)


def states(found: tuple[Alert, ...]) -> dict[str, str]:
    return {one.key: one.state for one in found}


def ack(key: str, hour: float, by: str = "A. Rook") -> Action:
    return Action(key, "acknowledge", by, round(hour * HOUR))


def aside(key: str, hour: float, until: float, why: str = "valve under repair") -> Action:
    return Action(key, "set aside", "B. Tern", round(hour * HOUR), round(until * HOUR), why)


def test_nothing_is_told_of_an_ordinary_shift() -> None:
    assert standing([look(n, 10.0 + 0.01 * n) for n in range(12)], at=12) == ()
    assert standing([], at=12) == ()


def test_a_level_is_raised_acknowledged_and_gone() -> None:
    looks = [look(0, 13.5), look(1, 13.7), look(2, 13.0)]
    assert standing(looks, at=0.5) == ()
    (raised,) = standing(looks, at=1.5)
    assert (raised.key, raised.state, raised.first_out) == ("above_maximum_working", "raised", True)
    assert (raised.since_us, raised.raised_us, raised.times) == (HOUR, HOUR, 1)
    assert "level 13.700 m is above the maximum working level, 13.600 m" in raised.text
    (known,) = standing(looks, ack(raised.key, 1.2), at=1.5)
    assert (known.state, known.by, known.by_us) == ("acknowledged", "A. Rook", round(1.2 * HOUR))
    assert standing(looks, ack(raised.key, 1.2), at=2.5) == ()


def test_it_stays_until_somebody_acknowledges_it() -> None:
    looks = [look(0, 13.7), look(1, 13.0), look(2, 13.0, movement="static")]
    (left,) = standing(looks, at=100)
    assert (left.state, left.active, left.returned_us) == ("returned", False, HOUR)
    assert standing(looks, ack(left.key, 50), at=100) == ()
    # It was acknowledged before it came: that counts for nothing.
    assert states(standing(looks, ack(left.key, -1), at=100)) == {left.key: "returned"}


def test_the_dead_band_holds_an_alert_on_its_way_back() -> None:
    # 2 % of a vessel 15 m high: 0.3 m, so 13.3 m.
    for level, state in ((13.55, "raised"), (13.31, "raised"), (13.29, "returned")):
        found = standing([look(0, 13.7), look(1, level, u=1e6)], at=2)
        assert states(found) == {"above_maximum_working": state}
    # On the way up it says nothing below the limit.
    assert standing([look(0, 13.31), look(1, 13.6)], at=2) == ()
    sharp = replace(PLAIN, level_dead_band=0.0)
    found = standing([look(0, 13.7), look(1, 13.6)], at=2, settings=sharp)
    assert states(found) == {"above_maximum_working": "returned"}


def test_a_lost_reading_clears_nothing() -> None:
    looks = [look(0, 13.7), look(1, None), look(2, None)]
    assert states(standing(looks, at=3)) == {"above_maximum_working": "raised"}


def test_chatter_counts_but_remains_one_alert() -> None:
    looks = [look(n, 13.7 if n % 2 == 0 else 13.0, u=1e6) for n in range(7)]
    (one,) = standing(looks, at=6.5)
    assert (one.times, one.since_us, one.state) == (4, 0, "raised")


def test_the_higher_level_speaks_for_those_below_it() -> None:
    looks = [look(0, 13.7), look(1, 14.1), look(2, 14.6), look(3, 14.25), look(4, 14.1)]
    assert states(standing(looks, at=1.5)) == {"above_high_high": "raised"}
    for hour in (2.5, 3.5):  # 14.25 m is within the dead band of 14.5 m
        (critical,) = standing(looks, at=hour)
        assert critical.key == "above_critical_high"
        assert len(critical.consequences) == 2
    found = standing(looks, ack("above_high_high", 1.2), at=4.5)
    assert states(found) == {"above_critical_high": "returned", "above_high_high": "acknowledged"}
    below = [*looks, look(5, 13.65)]
    found = standing(below, ack("above_critical_high", 4.2), at=5.5)
    assert states(found) == {"above_high_high": "returned", "above_maximum_working": "raised"}


def test_low_levels_likewise() -> None:
    (low,) = standing([look(0, 0.8), look(1, 0.6)], at=2)
    assert (low.key, len(low.consequences)) == ("below_low_low", 1)


def test_a_delay_holds_back_what_does_not_last() -> None:
    slow = replace(PLAIN, on_delay_s=1800.0, off_delay_s=1800.0)
    looks = [look(0, 13.7), look(0.25, 13.0, u=1e6), look(1, 13.7, u=1e6)]
    assert standing(looks, at=0.9, settings=slow) == ()
    assert standing(looks, at=1.4, settings=slow) == ()
    (one,) = standing(looks, at=1.6, settings=slow)
    assert (one.since_us, one.raised_us) == (HOUR, round(1.5 * HOUR))
    looks.append(look(2, 13.0, u=1e6))
    assert states(standing(looks, at=2.4, settings=slow)) == {"above_maximum_working": "raised"}
    (gone,) = standing(looks, at=2.6, settings=slow)
    assert (gone.state, gone.returned_us) == ("returned", round(2.5 * HOUR))


def test_critical_high_waits_for_nothing() -> None:
    slow = replace(PLAIN, on_delay_s=1800.0)
    assert states(standing([look(0, 14.6)], at=0, settings=slow)) == {
        "above_critical_high": "raised"
    }


def test_set_aside_with_reason_and_end() -> None:
    looks = [look(0, 13.7)]
    (hidden,) = standing(looks, aside("above_maximum_working", 1, 5), at=2)
    assert (hidden.state, hidden.by, hidden.reason) == (
        "set aside",
        "B. Tern",
        "valve under repair",
    )
    assert (hidden.until_us, hidden.active) == (5 * HOUR, True)
    # At its end it is raised anew, although it had been acknowledged.
    (back,) = standing(
        looks, ack("above_maximum_working", 0.5), aside("above_maximum_working", 1, 5), at=6
    )
    assert (back.state, back.raised_us, back.since_us, back.by) == ("raised", 5 * HOUR, 0, "")


def test_set_aside_before_it_comes_and_brought_back() -> None:
    looks = [look(0, 13.0), look(2, 13.7), look(4, 13.0, u=1e6)]
    put = aside("above_maximum_working", 1, 10)
    (waiting,) = standing(looks[:1], put, at=1.5)
    assert (waiting.state, waiting.active) == ("set aside", False)
    assert "(not on)" in waiting.words()
    (hidden,) = standing(looks[:2], put, at=3)
    assert (hidden.state, hidden.active, hidden.since_us) == ("set aside", True, 2 * HOUR)
    back = Action("above_maximum_working", "bring back", "A. Rook", 3 * HOUR)
    assert states(standing(looks[:2], put, back, at=3.5)) == {"above_maximum_working": "raised"}
    # Gone while it was set aside, or before: somebody has answered for it.
    assert standing(looks, put, at=11) == ()
    late = aside("above_maximum_working", 5, 6)
    assert states(standing(looks, late, at=5.5)) == {"above_maximum_working": "set aside"}
    assert standing(looks, late, at=7) == ()


@pytest.mark.parametrize(
    "wrong",
    [
        {"by": " "},
        {"what": "set aside", "until_us": 10},
        {"what": "set aside", "until_us": 10, "reason": " "},
        {"what": "set aside", "reason": "repair"},
        {"what": "set aside", "reason": "repair", "until_us": 5},
    ],
)
def test_what_nobody_answers_for_is_refused(wrong: dict[str, Any]) -> None:
    whole: dict[str, Any] = {"key": "stale", "what": "acknowledge", "by": "A. Rook", "at_us": 5}
    with pytest.raises(InputError):
        Action(**whole | wrong)


def test_a_failed_p3_raises_one_alert_and_not_six() -> None:
    told = {"refused": "p3 was not read.", "disagreement": "p1 and the dip disagree."}
    looks = [
        look(0, 10.0, vapour_gauge_pa=100.0, movement="static"),
        look(1, 2.0, vapour_gauge_pa=-600.0, failed=("p3",), movement="static", **told),
    ]
    (one,) = standing(looks, at=2)
    assert (one.key, one.state) == ("failed_p3", "raised")
    assert len(one.consequences) == 6  # vacuum, vent, rate, refused, disagreement, movement
    assert "with it: " in one.words()
    # Acknowledged and mended, nothing of it is left over.
    mended = look(2, 2.0, movement="static", readings={"p1": 1.0, "level": 2.0})
    assert standing([*looks, mended], ack("failed_p3", 1.5), at=3) == ()
    # Mended, but the readings disagree all the same: now that is an alert of its own.
    still = replace(mended, disagreement="p1 and the dip disagree.")
    found = standing([*looks, still], ack("failed_p3", 1.5), at=3)
    assert states(found) == {"disagreement": "raised"}


def test_causes_are_alerts_there_are_with_the_roots_first() -> None:
    for key in ORDER:
        causes = causes_of(key)
        assert key not in causes
        assert set(causes) <= set(ORDER)
        for cause in causes:
            for root in causes_of(cause):
                assert causes.index(root) < causes.index(cause)


def test_a_level_that_matters_is_never_a_mere_consequence_of_an_instrument() -> None:
    found = standing([look(0, 14.6, failed=("p1", "p3"), disagreement="x")], at=1)
    assert {"above_critical_high", "failed_p1", "failed_p3"} == set(states(found))
    assert found[0].key == "above_critical_high"


def test_rates_beyond_the_largest_flow() -> None:
    # 10 -> 12 m in an hour: 628 m3/h in; the way back is beyond 450 m3/h out.
    up = standing([look(0, 10.0), look(1, 12.0)], at=1.5)
    assert states(up) == {"rate_in": "raised"}
    assert "628.3" in up[0].text
    assert states(standing([look(0, 12.0), look(1, 10.0)], at=1.5)) == {"rate_out": "raised"}
    # Within its uncertainty it is not known to be beyond.
    assert standing([look(0, 10.0, u=15.0), look(1, 12.0, u=15.0)], at=1.5) == ()
    # 5 % of 600 m3/h below the limit it returns: 570 m3/h are 1.814 m.
    for rise, state in ((1.85, "raised"), (1.75, "returned")):
        looks = [look(0, 6.0), look(1, 8.0), look(2, 8.0 + rise)]
        assert states(standing(looks, at=3)) == {"rate_in": state}


def test_vapour_pressure_beyond_the_relief_settings() -> None:
    high = [look(0, vapour_gauge_pa=2100.0), look(1, vapour_gauge_pa=1960.0)]
    assert states(standing(high, at=2)) == {"pressure_beyond_relief": "raised"}
    gone = [*high, look(2, vapour_gauge_pa=1940.0)]  # 2 % of 2500 Pa below: 1950 Pa
    assert states(standing(gone, at=3)) == {"pressure_beyond_relief": "returned"}
    low = standing([look(0, vapour_gauge_pa=-520.0)], at=1)
    assert states(low) == {"vacuum_beyond_relief": "raised"}


def test_a_vent_that_may_be_blocked_is_told_at_once() -> None:
    slow = replace(PLAIN, on_delay_s=3600.0)
    looks = [look(0, 10.0, vapour_gauge_pa=0.0), look(1, 9.5, vapour_gauge_pa=-100.0)]
    (one,) = standing(looks, at=1, settings=slow)
    assert (one.key, one.state) == ("vent_blocked", "raised")
    # Not while filling, not for less than the dead band (50 Pa), not when p3 was not read.
    for change in (
        [looks[0], look(1, 10.5, vapour_gauge_pa=-100.0)],
        [looks[0], look(1, 9.5, vapour_gauge_pa=-40.0)],
        [looks[0], look(1, 9.5, vapour_gauge_pa=None)],
    ):
        assert standing(change, at=1, settings=slow) == ()
    # Emptying goes on, p3 recovers.
    after = [*looks, look(2, 9.0, vapour_gauge_pa=-50.0)]
    assert states(standing(after, at=3)) == {"vent_blocked": "returned"}
    # Beyond the vacuum setting that is the one alert.
    worse = [*looks, look(2, 9.0, vapour_gauge_pa=-600.0)]
    assert states(standing(worse, at=3)) == {"vacuum_beyond_relief": "raised"}


def test_identical_readings_are_stuck_or_copied() -> None:
    same = [look(n, 8.0, readings={"p1": 60_000.0}) for n in range(4)]
    assert standing(same[:2], at=2) == ()
    (one,) = standing(same[:3], at=3)
    assert (one.key, one.since_us) == ("stuck_p1", 2 * HOUR)
    assert "60.000 kPa at the last 3 readings: stuck, or copied" in one.text
    moved = look(4, 8.0, readings={"p1": 60_001.0})
    assert states(standing([*same, moved], at=5)) == {"stuck_p1": "returned"}
    # A tank at rest may read the same; a transmitter above the liquid feels nothing.
    resting = [replace(one, movement="static") for one in same]
    assert standing(resting, at=5) == ()
    bare = [look(n, 0.4, readings={"p1": 0.0}) for n in range(4)]
    assert set(states(standing(bare, at=5))) == {"below_low_low"}
    many = replace(PLAIN, stuck_after=5)
    assert standing(same, at=5, settings=many) == ()


def test_a_receipt_of_which_nothing_is_seen_is_the_stuck_instrument() -> None:
    # A gauge that stands still while the tank is filled: one alert, with the contradiction.
    looks = [look(n, 8.0, readings={"level": 8.0}, movement="receiving") for n in range(3)]
    (one,) = standing(looks, at=3)
    assert one.key == "stuck_level"
    assert "declared receiving, but nothing is seen of it" in one.consequences[0]


def test_a_declared_movement_is_held_against_the_rate() -> None:
    looks = [look(0, 8.0), look(1, 7.5, movement="receiving")]
    (one,) = standing(looks, at=2)
    assert one.key == "movement"
    assert "declared receiving, but: emptying" in one.text


def test_a_reading_grows_stale_by_the_clock_alone() -> None:
    daily = AlertSettings(stale_after_s=2 * 3600.0)
    looks = [look(0), look(5)]
    assert standing(looks[:1], at=2, settings=daily) == ()
    (one,) = standing(looks[:1], at=2.1, settings=daily)
    assert (one.key, one.since_us) == ("stale", 2 * HOUR)
    assert "no reading for more than 2 h 0 min" in one.text
    assert states(standing(looks, at=5.5, settings=daily)) == {"stale": "returned"}
    assert standing(looks, ack("stale", 5.2), at=5.5, settings=daily) == ()


def test_a_temperature_outside_the_model_explains_the_refusal() -> None:
    outside = look(
        0, None, temperature_k=400.0, temperature_limits_k=(270.0, 350.0), refused="too hot."
    )
    (one,) = standing([outside], at=1)
    assert one.key == "temperature_outside"
    assert one.consequences == ("no honest answer: too hot.",)


def test_one_reading_alone_clears_no_disagreement() -> None:
    looks = [
        look(0, disagreement="p1 and the dip disagree.", readings={"p1": 1.0, "level": 10.0}),
        look(1, readings={"p1": 1.0}),
    ]
    assert states(standing(looks, at=2)) == {"disagreement": "raised"}
    agreed = look(2, readings={"p1": 1.5, "level": 10.0})
    assert states(standing([*looks, agreed], at=3)) == {"disagreement": "returned"}


def test_words_carry_symbol_state_and_text_and_nothing_to_act_on() -> None:
    looks = [look(0, 13.7)]
    (raised,) = standing(looks, at=1)
    assert raised.words().startswith("! RAISED: V-1: level 13.700 m is above")
    by = ack(raised.key, 0.5, "A\x1b[31m Rook")
    assert standing(looks, by, at=1)[0].words().startswith("* ACKNOWLEDGED by A[31m Rook: V-1")
    why = aside(raised.key, 0.5, 2, "x\n\x1b]0;y\x07")
    assert standing(looks, why, at=1)[0].words().startswith("~ SET ASIDE by B. Tern (x ]0;y): V-1")
    (back,) = standing([look(0, 13.7), look(1, 13.0, u=1e6)], at=2)
    assert back.words().startswith("- RETURNED: V-1")
    assert len({one.symbol for one in (raised, back)}) == 2


def test_the_first_of_several_is_marked() -> None:
    looks = [look(0, 10.0, failed=("p1",)), look(1, 13.7, u=1e6, failed=("p1",))]
    found = {one.key: one.first_out for one in standing(looks, at=2)}
    assert found == {"failed_p1": True, "above_maximum_working": False}


def test_a_look_is_made_of_readings_and_their_result() -> None:
    fitted = transmitters(p1=0.5) | {"p3": Transmitter("p3", 14.9, "absolute")}
    tank = upright(transmitters=fitted)
    oil = single(Expansion(845.0, 288.15, 8.3e-4))
    readings = Readings(
        p1_pa=80_000.0,
        p3_pa=101_425.0,
        barometer_pa=101_300.0,
        temperatures=((None, 288.15),),
        signals=(("dp", "failed"), ("p1", "uncertain")),
    )
    result = evaluate(tank, oil, readings)
    made = look_of(tank, oil, readings, result, HOUR, random={"mass_kg": 5.0}, movement="static")
    assert made.at_us == HOUR
    assert made.level_m == result.level_m
    assert made.point.values["mass_kg"] == result.mass_kg
    assert made.point.random == {"mass_kg": 5.0}
    assert made.readings == {"p1": 80_000.0}
    assert made.vapour_gauge_pa == pytest.approx(125.0)
    assert made.failed == ("dp",)
    assert made.temperature_limits_k == pytest.approx((138.15, 438.15))
    assert (made.refused, made.disagreement, made.movement) == ("", "", "static")


def test_a_refusal_and_a_disagreement_are_seen() -> None:
    tank = upright()
    oil = single(850.0)
    refused = Readings(level_m=16.0)
    made = look_of(tank, oil, refused, evaluate(tank, oil, refused), 0)
    assert made.level_m is None
    assert made.refused
    apart = Readings(p1_pa=80_000.0, level_m=10.0)
    made = look_of(tank, oil, apart, evaluate(tank, oil, apart), 0)
    assert made.disagreement


LEVELS = st.one_of(st.none(), st.floats(0.2, 14.9))
STEPS = st.lists(st.tuples(st.integers(1, 200), LEVELS, st.booleans()), min_size=1, max_size=12)


@given(
    steps=STEPS,
    acks=st.lists(st.tuples(st.integers(0, 2000), st.sampled_from(ORDER)), max_size=6),
    delays=st.tuples(st.integers(0, 90), st.integers(0, 90)),
    shuffled=st.randoms(use_true_random=False),
)
def test_the_fold_is_the_same_in_any_order_and_forgets_the_future(
    steps: list[tuple[int, float | None, bool]],
    acks: list[tuple[int, str]],
    delays: tuple[int, int],
    shuffled: random.Random,
) -> None:
    settings = AlertSettings(
        on_delay_s=60.0 * delays[0], off_delay_s=60.0 * delays[1], stale_after_s=3 * 3600.0
    )
    minute, looks = 0, []
    for gap, level, failed in steps:
        minute += gap
        looks.append(look(minute / 60.0, level, failed=("p3",) if failed else ()))
    actions = [Action(key, "acknowledge", "A. Rook", at * MINUTE) for at, key in acks]
    now = (minute + 30) * MINUTE
    found = alerts_from(TANK, looks, actions, now, settings)
    mixed = shuffled.sample(looks, len(looks))
    assert alerts_from(TANK, mixed, actions, now, settings) == found
    later = look(minute / 60.0 + 5.0, 14.9)
    assert alerts_from(TANK, [*looks, later], actions, now, settings) == found
    assert sum(one.first_out for one in found) == bool(found)
    keys = [one.key for one in found]
    assert len(set(keys)) == len(keys)
    # Nothing that is on stands beside its own cause that is on.
    on = {one.key for one in found if one.active}
    assert not any(set(causes_of(key)) & on for key in on)


@given(steps=STEPS)
def test_everything_acknowledged_and_gone_leaves_nothing(
    steps: list[tuple[int, float | None, bool]],
) -> None:
    minute, looks = 0, []
    for gap, level, failed in steps:
        minute += gap
        looks.append(look(minute / 60.0, level, u=1e9, failed=("p3",) if failed else ()))
    looks.append(look(minute / 60.0 + 10, 8.0, u=1e9))
    end = minute * MINUTE + 11 * HOUR
    actions = [Action(key, "acknowledge", "A. Rook", end) for key in ORDER]
    assert alerts_from(TANK, looks, actions, end + 1, PLAIN) == ()

"""What in a timed result is worth an alert.

A condition is on, off, or (within a dead band, or where nothing is known) as it was before: a lost
reading clears no alert.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.limits.kinds import (
    DISAGREEMENT,
    MOVEMENT,
    PRESSURE,
    REFUSED,
    TEMPERATURE,
    VACUUM,
    VENT,
)
from tankcalc.limits.levels import HIGH_LIMITS, LOW_LIMITS, limit_words
from tankcalc.limits.looks import FOLLOWERS, Look
from tankcalc.limits.rates import COVERAGE, Rate, against_declared, rate_of, volume_flow
from tankcalc.limits.settings import AlertSettings
from tankcalc.result import Notice
from tankcalc.tank import Tank

if TYPE_CHECKING:
    from tankcalc.units import System


@dataclass(frozen=True, slots=True)
class Condition:
    """Whether one alert's condition holds (None: as before), and what is to be said of it.

    ``say`` makes the text when it is asked for: of a year's readings hardly any is.
    """

    key: str
    holds: bool | None
    say: Callable[[], str] = str


def conditions(
    tank: Tank, looks: Sequence[Look], settings: AlertSettings, system: System = "metric"
) -> tuple[Condition, ...]:
    """Return the conditions at the last of the looks.

    Parameters
    ----------
    looks : sequence of Look
        Of one tank, in the order of time, at least one; so many of the latest as
        ``settings.stuck_after`` are needed.
    """
    rate = rate_of([look.point for look in looks[-2:]])
    return (
        *_levels(tank, looks[-1], settings, system),
        *_flows(tank, looks[-1], rate, settings, system),
        *_vapour_space(tank, looks, rate, settings, system),
        *_instruments(tank, looks, settings, system),
        *_judgements(looks[-1], rate, system),
    )


def _levels(tank: Tank, look: Look, settings: AlertSettings, system: System) -> Iterator[Condition]:
    band = settings.level_dead_band * (tank.vessel.z_max - tank.vessel.z_min)
    level = look.level_m
    for name in (n for n in (*HIGH_LIMITS, *LOW_LIMITS) if n in tank.limits_m):
        at, high = tank.limits_m[name], name in HIGH_LIMITS
        side = "above" if high else "below"
        if level is None:
            yield Condition(f"{side}_{name}", None)
            continue
        beyond = level - at if high else at - level
        say = partial(_say_level, level, side, name, at, system)
        yield Condition(f"{side}_{name}", _held(beyond, band), say)


def _say_level(level_m: float, side: str, name: str, at_m: float, system: System) -> str:
    return (
        f"level {units.show(level_m, 'length', system)} is {side} the {limit_words(name)} level, "
        f"{units.show(at_m, 'length', system)}"
    )


def _held(beyond: float, band: float) -> bool | None:
    """Return whether a figure is beyond its limit, None where it has come back by too little."""
    return True if beyond > 0.0 else False if beyond < -band or band == 0.0 else None


def _flows(
    tank: Tank, look: Look, rate: Rate | None, settings: AlertSettings, system: System
) -> Iterator[Condition]:
    found = None if rate is None else volume_flow(rate, look.point.values)
    for key, sign, largest in (
        ("rate_in", 1.0, tank.largest_in_m3_s),
        ("rate_out", -1.0, tank.largest_out_m3_s),
    ):
        if largest is None:
            continue
        if found is None:
            yield Condition(key, None)
            continue
        flow, u = sign * found[0], found[1] or 0.0
        beyond = flow - largest
        holds = _held(beyond, settings.flow_dead_band * largest)
        # Within its uncertainty of the limit it is not known to be above.
        holds = None if holds and beyond <= COVERAGE * u else holds
        yield Condition(key, holds, partial(_say_flow, flow, key, largest, system))


def _say_flow(flow_m3_s: float, key: str, largest_m3_s: float, system: System) -> str:
    way = key.removeprefix("rate_")
    return (
        f"{units.show(flow_m3_s, 'volume_flow', system)} {way} is more than the largest flow "
        f"{way}, {units.show(largest_m3_s, 'volume_flow', system)}"
    )


def _vapour_space(
    tank: Tank,
    looks: Sequence[Look],
    rate: Rate | None,
    settings: AlertSettings,
    system: System,
) -> Iterator[Condition]:
    pressure = looks[-1].vapour_gauge_pa
    if tank.relief_pa is not None:
        yield from _relief(tank.relief_pa, pressure, settings, system)
    span = _breathing_span(tank)
    before = looks[-2].vapour_gauge_pa if len(looks) > 1 else None
    if span is None or pressure is None or before is None or rate is None:
        yield Condition(VENT, None)
        return
    emptying = rate.per_s < 0.0 and not rate.static
    fallen = before - pressure
    holds = True if emptying and fallen > settings.pressure_dead_band * span else None
    over = not emptying or fallen <= 0.0
    yield Condition(VENT, False if over else holds, partial(_say_vent, fallen, system))


def _relief(
    settings_pa: tuple[float, float],
    pressure_pa: float | None,
    settings: AlertSettings,
    system: System,
) -> Iterator[Condition]:
    vacuum, relief = settings_pa
    band = settings.pressure_dead_band * (relief - vacuum)
    for key, sign, at in ((PRESSURE, 1.0, relief), (VACUUM, -1.0, vacuum)):
        if pressure_pa is None:
            yield Condition(key, None)
        else:
            say = partial(_say_relief, pressure_pa, key, at, system)
            yield Condition(key, _held(sign * (pressure_pa - at), band), say)


def _say_relief(pressure_pa: float, key: str, at_pa: float, system: System) -> str:
    side = "above the relief" if key == PRESSURE else "below the vacuum"
    return (
        f"p3, {units.show(pressure_pa, 'pressure', system)} against outside, is {side} setting, "
        f"{units.show(at_pa, 'pressure', system)}"
    )


def _say_vent(fallen_pa: float, system: System) -> str:
    return (
        f"p3 falls with the level, by {units.show(fallen_pa, 'pressure', system)} since the last "
        "reading: the vent may be blocked while the tank is emptied"
    )


def _breathing_span(tank: Tank) -> float | None:
    """Return the span that p3 may breathe in, or else that it can measure, Pa."""
    fitted = tank.transmitters.get("p3")
    both = tank.relief_pa or (fitted.range_pa if fitted is not None else None)
    return None if both is None else both[1] - both[0]


def _instruments(
    tank: Tank, looks: Sequence[Look], settings: AlertSettings, system: System
) -> Iterator[Condition]:
    now = looks[-1]
    for tag in (*tank.transmitters, *(("dp",) if tank.dp is not None else ())):
        read = tag in now.readings or (tag == "p3" and now.vapour_gauge_pa is not None)
        holds = True if tag in now.failed else False if read else None
        yield Condition(f"failed_{tag}", holds, partial(_say_failed, tag))
    run = looks[-settings.stuck_after :]
    for name in FOLLOWERS:
        if name not in now.readings or len(run) < settings.stuck_after:
            yield Condition(f"stuck_{name}", None)
            continue
        values = {look.readings.get(name) for look in run}
        at_rest = all(look.movement == "static" for look in run)
        yield Condition(
            f"stuck_{name}",
            len(values) == 1 and not at_rest and _covered(tank, name, run),
            partial(_say_stuck, name, now.readings[name], len(run), system),
        )


def _say_failed(tag: str) -> str:
    return f"{tag} is in fault: its signal is out of bounds"


def _say_stuck(name: str, value: float, count: int, system: System) -> str:
    shown = units.show(value, "length" if name in ("level", "ullage") else "pressure", system)
    return f"{name} has read {shown} at the last {count} readings: stuck, or copied"


def _covered(tank: Tank, name: str, run: Sequence[Look]) -> bool:
    """Return whether an instrument felt the liquid all through a run, as far as that is known."""
    if name not in tank.transmitters:
        return True
    tap = tank.transmitters[name].elevation_m
    return all(look.level_m is None or look.level_m > tap for look in run)


def _judgements(look: Look, rate: Rate | None, system: System) -> Iterator[Condition]:
    low, high = look.temperature_limits_k
    kelvin = look.temperature_k
    if kelvin is not None:
        yield Condition(TEMPERATURE, not low <= kelvin <= high, partial(_say_warm, kelvin, system))
    yield Condition(REFUSED, bool(look.refused), lambda: f"no honest answer: {look.refused}")
    # One reading alone cannot disagree with anything: it is not known whether they still would.
    agree = False if len(look.readings) > 1 else None
    apart = True if look.disagreement else agree
    yield Condition(DISAGREEMENT, apart, lambda: look.disagreement)
    if rate is None:
        yield Condition(MOVEMENT, None)
        return
    found = None if not look.movement else against_declared(rate, look.movement, system)
    yield Condition(MOVEMENT, found is not None, partial(_said, found))


def _say_warm(kelvin: float, system: System) -> str:
    return f"{units.show(kelvin, 'temperature', system)} is outside what the density covers"


def _said(notice: Notice | None) -> str:
    return "" if notice is None else notice.message

"""One tank as it stands: alerts, rate, times to its limits, ages, open faults."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import astuple, dataclass, replace
from typing import TYPE_CHECKING

from tankcalc.errors import TankcalcError
from tankcalc.limits.alerts import Alert, alerts_from
from tankcalc.limits.levels import Distance, distances, pumpable_m3, ullage_volume_m3
from tankcalc.limits.rates import Rate, against_declared, rate_of, volume_flow
from tankcalc.limits.times import Arrival, times_to_limits
from tankcalc.shiftlog.standing import Standing
from tankcalc.watch.looks import Maker, answered
from tankcalc.watch.past import remarkable

if TYPE_CHECKING:
    from tankcalc.limits.looks import Look
    from tankcalc.limits.settings import AlertSettings, RateSettings
    from tankcalc.result import Notice
    from tankcalc.shiftlog.entry import Entry
    from tankcalc.shiftlog.store import Row
    from tankcalc.tank import Tank
    from tankcalc.units import System
    from tankcalc.watch.past import Past

DIPS = ("level", "ullage")
SAMPLE = "density"
WATER_DIP = "water_level"


@dataclass(frozen=True, slots=True)
class Ages:
    """When each was last taken, µs of UTC; None: not in the time that was read."""

    reading_us: int | None = None
    dip_us: int | None = None
    sample_us: int | None = None
    water_dip_us: int | None = None

    @property
    def complete(self) -> bool:
        """Whether all of them are known."""
        return None not in (self.reading_us, self.dip_us, self.sample_us, self.water_dip_us)

    def or_else(self, older: Ages) -> Ages:
        """Return these, and where one is not known that of an older time."""
        own, other = astuple(self), astuple(older)
        pairs = zip(own, other, strict=True)
        return Ages(*(mine if mine is not None else theirs for mine, theirs in pairs))


@dataclass(frozen=True, slots=True)
class Fault:
    """An instrument in fault: since when, by whom it was noted, in which words."""

    instrument: str
    since_us: int
    row: Row


@dataclass(frozen=True, slots=True)
class TankWatch:
    """One tank at one instant.

    Attributes
    ----------
    name : str
        Name of its file; what the log calls it.
    tank : Tank or None
        As it is now; None where its file cannot be read.
    problem : str
        Why a file cannot be read; empty: all could.
    product : str
        What is in it, as the last reading says or the tank's file.
    last : Row or None
        The last reading, refused or not.
    held : Row or None
        The last reading that has an answer: the figures rest on it.
    looks : tuple of Look
        Its readings as the alerts see them, by their times; none without a tank.
    alerts : tuple of Alert
        As they stand, the most pressing first.
    movement : str
        What was declared with the last reading: "static", "receiving", "delivering"; or nothing.
    rate : Rate or None
        From the last two readings that have an answer.
    flow_m3_s : (float, float or None) or None
        The rate as a volume at tank temperature, with its standard uncertainty.
    contradiction : Notice or None
        How the rate contradicts what was declared.
    arrivals : tuple of Arrival
        When each limit is reached, counted from ``held``; none for a tank at rest.
    distances : tuple of Distance
        How far each limit is, from the lowest up.
    ullage_volume_m3, pumpable_m3 : float or None
        Empty volume up to the vessel's top; volume above the minimum working level.
    ages : Ages
        When things were last taken.
    faults : tuple of Fault
        Open, the oldest first.
    corrections : tuple of Standing
        Late, amended and withdrawn readings and movements of the time that was read.
    """

    name: str
    tank: Tank | None = None
    problem: str = ""
    product: str = ""
    last: Row | None = None
    held: Row | None = None
    looks: tuple[Look, ...] = ()
    alerts: tuple[Alert, ...] = ()
    movement: str = ""
    rate: Rate | None = None
    flow_m3_s: tuple[float, float | None] | None = None
    contradiction: Notice | None = None
    arrivals: tuple[Arrival, ...] = ()
    distances: tuple[Distance, ...] = ()
    ullage_volume_m3: float | None = None
    pumpable_m3: float | None = None
    ages: Ages = Ages()
    faults: tuple[Fault, ...] = ()
    corrections: tuple[Standing, ...] = ()

    def figure(self, key: str) -> float | None:
        """Return a figure of the last answer by its JSON key, None where it is not known."""
        value = None if self.held is None else (self.held.entry.result or {}).get(key)
        return float(value) if isinstance(value, int | float) else None

    def half(self, key: str) -> float | None:
        """Return the expanded uncertainty (k = 2) of a figure, None where it is not known."""
        given = None if self.held is None else self.held.entry.result or {}
        known = (given or {}).get("expanded_uncertainty")
        value = known.get(key) if isinstance(known, Mapping) else None
        return float(value) if isinstance(value, int | float) else None

    @property
    def refused(self) -> bool:
        """Whether the last reading has no answer, so that the figures are older than it."""
        return self.last is not None and self.last is not self.held

    @property
    def room_m3(self) -> float | None:
        """Volume up to the maximum working level, or else the next high one; None without any."""
        rising = [one for one in self.distances if one.limit in _ROOM]
        return min(rising, key=lambda one: _ROOM.index(one.limit)).room_m3 if rising else None


_ROOM = ("maximum_working", "high_high", "overfill_action", "critical_high")


def ages_of(entries: Sequence[Entry]) -> Ages:
    """Return when a tank was last read, dipped, sampled; entries in the order of their times."""
    return Ages(
        _last(entries),
        _last(entries, *DIPS),
        _last(entries, SAMPLE),
        _last(entries, WATER_DIP),
    )


def _last(entries: Sequence[Entry], *names: str) -> int | None:
    for entry in reversed(entries):
        if not names or any(entry.typed.get(name, "").strip() for name in names):
            return entry.t_us
    return None


def without_tank(name: str, past: Past, problem: str, product: str = "") -> TankWatch:
    """Return what the log alone says of a tank whose file cannot be read."""
    rows = past.entries(name)
    entries = [row.entry for row in rows]
    return TankWatch(
        name,
        problem=problem,
        product=product or next((e.fluid or "" for e in reversed(entries)), ""),
        last=rows[-1] if rows else None,
        held=next((row for row in reversed(rows) if answered(row.entry)), None),
        movement=entries[-1].movement if entries else "",
        ages=ages_of(entries),
        faults=_faults(name, past),
        corrections=_corrections(name, past),
    )


def with_tank(
    name: str,
    past: Past,
    maker: Maker,
    settings: tuple[AlertSettings, RateSettings],
    product: str,
    problem: str = "",
    system: System = "metric",
) -> TankWatch:
    """Return a tank as it stands.

    Parameters
    ----------
    maker : Maker
        Of its looks; remembers them.
    settings : (AlertSettings, RateSettings)
        Of the site.
    product, problem : str
        What is in it, in words; why a fluid cannot be read.
    """
    tank = maker.tank
    plain = without_tank(name, past, problem, product)
    rows = past.entries(name)
    looks = maker.looks([row.entry for row in rows])
    alerts = alerts_from(tank, looks, past.actions.get(name, ()), past.now_us, settings[0], system)
    found = replace(plain, tank=tank, looks=looks, alerts=alerts)
    found = _with_rate(found, past, rows, system)
    return _with_limits(found, tank, settings[1])


def _with_rate(found: TankWatch, past: Past, rows: Sequence[Row], system: System) -> TankWatch:
    """Return a tank with its rate, from two readings that no step of the clock lies between."""
    pairs = zip(rows, found.looks, strict=True)
    latest = [(row, look) for row, look in pairs if answered(row.entry)][-2:]
    if len(latest) < 2:
        return found
    between = range(latest[0][0].seq, latest[1][0].seq)
    if any(step.seq in between for step in past.steps):
        return found
    rate = rate_of([look.point for _, look in latest])
    if rate is None:
        return found
    return replace(
        found,
        rate=rate,
        flow_m3_s=volume_flow(rate, latest[1][1].point.values),
        contradiction=against_declared(rate, found.movement, system),
    )


def _with_limits(found: TankWatch, tank: Tank, rates: RateSettings) -> TankWatch:
    """Return a tank with room and times; a level that lies outside the vessel now has none."""
    level, shell = found.figure("level_m"), found.figure("ctsh") or 1.0
    if level is None:
        return found
    try:
        return replace(
            found,
            distances=distances(tank, level, shell),
            ullage_volume_m3=shell * ullage_volume_m3(tank.vessel, level),
            pumpable_m3=pumpable_m3(tank, level),
            arrivals=_arrivals(found, tank, level, shell, rates),
        )
    except TankcalcError as error:
        return replace(found, problem=found.problem or str(error))


def _arrivals(
    found: TankWatch, tank: Tank, level_m: float, shell: float, rates: RateSettings
) -> tuple[Arrival, ...]:
    flow = found.flow_m3_s
    if flow is None or found.rate is None or found.rate.static or flow[0] == 0.0:
        return ()
    return times_to_limits(
        tank,
        level_m,
        flow[0] / shell,
        level_uncertainty_m=(found.half("level_m") or 0.0) / 2.0,
        flow_uncertainty_m3_s=(flow[1] or 0.0) / shell,
        next_reading_s=rates.read_every_s,
    )


def _faults(name: str, past: Past) -> tuple[Fault, ...]:
    found = (
        Fault(instrument, row.entry.t_us, row)
        for (tank, instrument), row in past.faults.items()
        if tank == name
    )
    return tuple(sorted(found, key=lambda fault: (fault.since_us, fault.instrument)))


def _corrections(name: str, past: Past) -> tuple[Standing, ...]:
    both = (*past.readings.get(name, ()), *past.movements.get(name, ()))
    return tuple(sorted((s for s in both if remarkable(s)), key=lambda s: s.row.seq))

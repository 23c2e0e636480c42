"""One timed result as the alerts see it."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING

from tankcalc.limits.rates import BASES, Timed
from tankcalc.readings import Readings
from tankcalc.result import Notice, Result
from tankcalc.tank import Tank

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid

FOLLOWERS = ("p1", "p2", "dp", "level", "ullage")
"""Readings that follow the surface; a pressure above the liquid may well stand still."""

APART = ("disagreement", "density_differs")
"""Notices of readings that contradict each other, or the density of the profile."""

_NOTHING: Mapping[str, float] = MappingProxyType({})


@dataclass(frozen=True, slots=True)
class Look:
    """What was known of a tank at one instant.

    Attributes
    ----------
    point : Timed
        Instant (µs of UTC), what the tank held, and the random part of its uncertainty.
    level_m : float or None
        The answer; None where it was refused.
    readings : mapping of str to float
        As read, SI, by the names of `FOLLOWERS`.
    vapour_gauge_pa : float or None
        Pressure above the liquid against outside, Pa, where it was read.
    failed : tuple of str
        Tags of instruments in fault.
    temperature_k : float or None
        Of the liquid, K, where it was read.
    temperature_limits_k : (float, float)
        What the density model covers, K.
    refused, disagreement : str
        What the result said of it; empty where there was nothing of the kind.
    movement : {"static", "receiving", "delivering", ""}
        What was declared; empty: nothing.
    """

    point: Timed
    level_m: float | None = None
    readings: Mapping[str, float] = field(default_factory=lambda: _NOTHING)
    vapour_gauge_pa: float | None = None
    failed: tuple[str, ...] = ()
    temperature_k: float | None = None
    temperature_limits_k: tuple[float, float] = (0.0, float("inf"))
    refused: str = ""
    disagreement: str = ""
    movement: str = ""

    @property
    def at_us(self) -> int:
        """Instant of the reading, µs of UTC."""
        return self.point.at_us


def look_of(
    tank: Tank,
    fluid: Fluid,
    readings: Readings,
    result: Result,
    at_us: int,
    *,
    random: Mapping[str, float] = _NOTHING,
    movement: str = "",
) -> Look:
    """Return what the alerts need of one set of readings and its result.

    Parameters
    ----------
    at_us : int
        Instant of the readings, µs of UTC.
    random : mapping of str to float
        Random part of the standard uncertainties, by JSON key (`rates.random_parts`).
    movement : {"static", "receiving", "delivering", ""}
        What was declared.
    """
    values = {key: getattr(result, key) for key in BASES}
    held = {key: float(value) for key, value in values.items() if value is not None}
    given = {name: _field(readings, name) for name in FOLLOWERS}
    temperatures = [k for _, k in readings.temperatures]
    limits = [layer.model.limits_k for layer in fluid.layers if layer.model.needs_temperature]
    return Look(
        Timed(at_us, held, random),
        level_m=None if result.level_m is None else float(result.level_m),
        readings={name: value for name, value in given.items() if value is not None},
        vapour_gauge_pa=_gauge(tank, readings),
        failed=tuple(tag for tag, worth in readings.signals if worth == "failed"),
        temperature_k=temperatures[-1] if temperatures else None,
        temperature_limits_k=(
            max((low for low, _ in limits), default=0.0),
            min((high for _, high in limits), default=float("inf")),
        ),
        refused=_said(result.refusals),
        disagreement=_said([n for n in result.warnings if n.code in APART]),
        movement=movement,
    )


def _field(readings: Readings, name: str) -> float | None:
    value = getattr(readings, f"{name}_m" if name in ("level", "ullage") else f"{name}_pa")
    return None if value is None else float(value)


def _gauge(tank: Tank, readings: Readings) -> float | None:
    """Return p3 against the outside pressure, Pa; None where either is not known."""
    fitted = tank.transmitters.get("p3")
    if fitted is None or readings.p3_pa is None:
        return None
    if fitted.reads == "gauge":
        return float(readings.p3_pa)
    outside = readings.barometer_pa
    if outside is None:
        outside = tank.surroundings.outside_pressure_pa
    return None if outside is None else float(readings.p3_pa) - outside


def _said(notices: Iterable[Notice]) -> str:
    return " ".join(notice.message for notice in notices)

"""One question to the calculation, with everything it depends on made ready."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
import numpy.typing as npt

from tankcalc.fluids.column import Column
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.liquid import Liquid, liquid_in
from tankcalc.gauging.shell import ShellState, tank_as_it_stands
from tankcalc.hydrostatics import Filling
from tankcalc.instruments import Conditions, FilledLeg, tap_from_reading
from tankcalc.readings import Readings
from tankcalc.tank import Tank

FloatArray = npt.NDArray[np.float64]
BoolArray = npt.NDArray[np.bool_]

ARRAY_FIELDS = (
    "p1_pa",
    "p2_pa",
    "p3_pa",
    "dp_pa",
    "level_m",
    "ullage_m",
    "volume_m3",
    "mass_kg",
)
"""Readings that may be arrays; the others are of the whole array."""


@dataclass(frozen=True)
class Case:
    """Tank, fluid and readings with the column and the conditions.

    The tank is as it stands: its vessel and taps at the shell's temperature, under the head.
    """

    tank: Tank
    fluid: Fluid
    readings: Readings
    conditions: Conditions
    liquid: Liquid
    given: Mapping[str, FloatArray]
    shape: tuple[int, ...]
    shell: ShellState = field(default_factory=ShellState)

    @classmethod
    def of(
        cls, tank: Tank, fluid: Fluid, readings: Readings, surface_m: float | None = None
    ) -> Case:
        """Make a case ready; ``surface_m`` where the surface is known already (m).

        Raises
        ------
        RangeError
            A temperature lies outside what a density model covers.
        InputError
            A gas-filled leg without a temperature.
        """
        around = tank.surroundings
        air_k = _first(readings.air_temperature_k, around.air_temperature_k)
        conditions = Conditions(
            gravity_m_s2=around.gravity_m_s2,
            air_density_kg_m3=around.air_density_kg_m3,
            barometer_pa=_first(readings.barometer_pa, around.outside_pressure_pa) or 0.0,
            leg_temperature_k=_first(readings.leg_temperature_k, air_k, _stated_fill_k(tank)),
        )
        values = {name: getattr(readings, name) for name in ARRAY_FIELDS}
        given = {
            name: np.asarray(value, dtype=float)
            for name, value in values.items()
            if value is not None
        }
        shape = np.broadcast_shapes(*(value.shape for value in given.values()))
        liquid = liquid_in(tank, fluid, readings, surface_m).under(
            _gauge_pa(tank, given, conditions)
        )
        tank, shell = tank_as_it_stands(tank, liquid, air_k, around.gravity_m_s2)
        return cls(tank, fluid, readings, conditions, liquid, given, shape, shell)

    @property
    def column(self) -> Column:
        """Density of the liquid over elevation."""
        return self.liquid.column

    @cached_property
    def filling(self) -> Filling:
        """The column standing in the vessel."""
        return Filling(self.tank.vessel, self.column, self.conditions.gravity_m_s2)

    @property
    def legs_known_by(self) -> str:
        """How the legs' temperature is known: "read", "air", "assumed", or "" with no such leg."""
        if _stated_fill_k(self.tank) is None:
            return ""
        if self.readings.leg_temperature_k is not None:
            return "read"
        air = (self.readings.air_temperature_k, self.tank.surroundings.air_temperature_k)
        return "assumed" if air == (None, None) else "air"

    def fitted(self) -> tuple[str, ...]:
        """Return the tags of the fitted transmitters."""
        tags = tuple(tag for tag in ("p1", "p2", "p3") if tag in self.tank.transmitters)
        return (*tags, "dp") if self.tank.dp is not None else tags


def _gauge_pa(tank: Tank, given: Mapping[str, FloatArray], conditions: Conditions) -> float:
    """Return the pressure above the liquid as p3 reads it, Pa gauge; zero where it does not.

    Of many readings the mean: what it is for, the liquid's density under pressure, changes by a
    part in ten thousand per bar.
    """
    p3 = tank.transmitters.get("p3")
    if p3 is None or "p3_pa" not in given or not given["p3_pa"].size:
        return 0.0
    tap = tap_from_reading(p3, given["p3_pa"], conditions)
    return float(np.mean(tap)) - conditions.outside_pa(p3.elevation_m)


def _stated_fill_k(tank: Tank) -> float | None:
    """Return the temperature (K) at which the fill of a leg is stated, None without such a leg."""
    legs = [t.leg for t in tank.transmitters.values() if isinstance(t.leg, FilledLeg)]
    sides = [] if tank.dp is None else [tank.dp.high, tank.dp.low]
    stated = [leg.fill_density_at_k for leg in legs if leg.fill_expansion_per_k]
    stated += [side.fill_density_at_k for side in sides if side.fill_expansion_per_k]
    return _first(*stated)


def _first(*values: float | None) -> float | None:
    """Return the first value that is there."""
    return next((value for value in values if value is not None), None)

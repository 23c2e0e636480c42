"""One question to the calculation, with everything it depends on made ready."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt

from tankcalc.constants import GAS_CONSTANT_J_MOL_K, ICE_POINT_K
from tankcalc.fluids.column import Column
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.liquid import Liquid, liquid_in
from tankcalc.hydrostatics import Filling, head_pa
from tankcalc.instruments import (
    Conditions,
    reading_from_tap,
    side_head_pa,
    tap_from_reading,
)
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


@dataclass(frozen=True, slots=True)
class VapourSpace:
    """A known pressure in the space above the liquid, and what fills that space.

    Attributes
    ----------
    at_m : float
        Elevation of the known pressure, m.
    pressure_pa : array
        That pressure, Pa absolute.
    density_kg_m3 : array
        Density of the vapour, kg/m3.
    known_by : str
        "p3", "vent" (open to the outside air at the top) or "assumed" (p3 is fitted but was
        not read; outside pressure taken).
    """

    at_m: float
    pressure_pa: FloatArray
    density_kg_m3: FloatArray
    known_by: str


@dataclass(frozen=True)
class Case:
    """Tank, fluid and readings with the column, the conditions and the vapour space."""

    tank: Tank
    fluid: Fluid
    readings: Readings
    conditions: Conditions
    liquid: Liquid
    given: Mapping[str, FloatArray]
    shape: tuple[int, ...]

    @classmethod
    def of(cls, tank: Tank, fluid: Fluid, readings: Readings) -> Case:
        """Make a case ready.

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
            leg_temperature_k=_first(readings.leg_temperature_k, air_k),
        )
        values = {name: getattr(readings, name) for name in ARRAY_FIELDS}
        given = {
            name: np.asarray(value, dtype=float)
            for name, value in values.items()
            if value is not None
        }
        shape = np.broadcast_shapes(*(value.shape for value in given.values()))
        liquid = liquid_in(tank, fluid, readings)
        return cls(tank, fluid, readings, conditions, liquid, given, shape)

    @property
    def column(self) -> Column:
        """Density of the liquid over elevation."""
        return self.liquid.column

    @cached_property
    def filling(self) -> Filling:
        """The column standing in the vessel."""
        return Filling(self.tank.vessel, self.column, self.conditions.gravity_m_s2)

    @cached_property
    def vapour_space(self) -> VapourSpace:
        """The known pressure above the liquid: p3 where it was read, else the outside air."""
        p3 = self.tank.transmitters.get("p3")
        if p3 is not None and "p3_pa" in self.given:
            at = p3.elevation_m
            pressure = tap_from_reading(p3, self.given["p3_pa"], self.conditions)
            known_by = "p3"
        else:
            at = self.tank.vessel.z_max
            pressure = self.conditions.outside_pa(at)
            known_by = "vent" if p3 is None else "assumed"
        anchor = np.asarray(pressure, dtype=float)
        return VapourSpace(at, anchor, self._vapour_density(anchor), known_by)

    def _vapour_density(self, pressure_pa: FloatArray) -> FloatArray:
        """Return the density (kg/m3) of what fills the space above the liquid."""
        vapour = self.tank.vapour or self.fluid.vapour
        if vapour is None:
            return np.asarray(self.conditions.air_density_kg_m3)
        if vapour.density_kg_m3 is not None:
            return np.asarray(vapour.density_kg_m3)
        molar_mass = vapour.molar_mass_kg_mol or 0.0
        air_k = _first(self.readings.air_temperature_k, self.tank.surroundings.air_temperature_k)
        temperature = _first(self.liquid.temperature_k, air_k, ICE_POINT_K + 15.0) or 0.0
        scale = vapour.compressibility * GAS_CONSTANT_J_MOL_K * temperature
        return np.asarray(pressure_pa * molar_mass / scale)

    def tank_pressure(self, z_m: float, surface_m: npt.ArrayLike) -> FloatArray:
        """Return the pressure in the tank (Pa absolute) at an elevation, for surfaces (m)."""
        space, g = self.vapour_space, self.conditions.gravity_m_s2
        surface = np.asarray(surface_m, dtype=float)
        at_surface = space.pressure_pa + g * space.density_kg_m3 * (space.at_m - surface)
        in_vapour = at_surface - g * space.density_kg_m3 * (z_m - surface)
        in_liquid = at_surface + head_pa(self.column, g, np.minimum(z_m, surface), surface)
        return np.where(surface > z_m, in_liquid, in_vapour)

    def expected(self, tag: str, surface_m: npt.ArrayLike) -> FloatArray:
        """Return what a fitted transmitter reads (Pa, its own reference) for surfaces (m)."""
        if tag == "dp":
            dp = self.tank.dp
            assert dp is not None
            high = self.tank_pressure(dp.high.elevation_m, surface_m)
            low = self.tank_pressure(dp.low.elevation_m, surface_m)
            return np.asarray(high - low + self.line_difference_pa())
        transmitter = self.tank.transmitters[tag]
        tap = self.tank_pressure(transmitter.elevation_m, surface_m)
        return np.asarray(reading_from_tap(transmitter, tap, self.conditions))

    def line_difference_pa(self) -> FloatArray:
        """Return what the two lines of the differential transmitter add to its reading, Pa."""
        dp = self.tank.dp
        assert dp is not None
        liquid = self.column.density(dp.high.elevation_m)
        vapour = self.vapour_space.density_kg_m3
        high = side_head_pa(dp.high, dp.sensor_elevation_m, liquid, self.conditions)
        low = side_head_pa(dp.low, dp.sensor_elevation_m, vapour, self.conditions)
        return np.asarray(high - low)

    def fitted(self) -> tuple[str, ...]:
        """Return the tags of the fitted transmitters."""
        tags = tuple(tag for tag in ("p1", "p2", "p3") if tag in self.tank.transmitters)
        return (*tags, "dp") if self.tank.dp is not None else tags


def _first(*values: float | None) -> float | None:
    """Return the first value that is there."""
    return next((value for value in values if value is not None), None)

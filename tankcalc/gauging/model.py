"""What every instrument should show for a state of the tank, and how that changes with it.

A state is three numbers: where the surface is, how heavy the product is against its profile,
and the pressure above it. One equation gives all the rest.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
import numpy.typing as npt

from tankcalc.constants import GAS_CONSTANT_J_MOL_K, ICE_POINT_K
from tankcalc.fluids.column import Column
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.roof import less_roof
from tankcalc.hydrostatics import Filling
from tankcalc.instruments import reading_from_tap, side_head_pa, tap_from_reading


@dataclass(frozen=True, slots=True)
class State:
    """A state of the tank; arrays of one shape.

    Attributes
    ----------
    surface_m : array
        Elevation of the surface, m.
    factor : array
        Density of the product against its profile; 1 where the profile is taken as it is.
    vapour_pa : array
        Pressure at the vapour space's reference point, Pa absolute.
    """

    surface_m: FloatArray
    factor: FloatArray
    vapour_pa: FloatArray

    def take(self, rows: npt.NDArray[np.bool_]) -> State:
        """Return the state of some rows."""
        return State(self.surface_m[rows], self.factor[rows], self.vapour_pa[rows])


Slopes = tuple[FloatArray, FloatArray, FloatArray]
"""Derivatives by surface (per m), factor and vapour pressure (per Pa)."""


@dataclass(frozen=True)
class Model:
    """The hydrostatic equation of one case.

    Attributes
    ----------
    case : Case
        Tank, column and readings. Elevations, gravity and air may be arrays of the readings'
        shape, which is how their uncertainty is propagated.
    vapour_scale : float or array
        Factor on the density of a stated vapour.
    """

    case: Case
    vapour_scale: float | FloatArray = 1.0

    @property
    def gravity(self) -> float:
        """Local gravity, m/s2."""
        return self.case.conditions.gravity_m_s2

    @cached_property
    def product(self) -> Column:
        """The column of everything that the factor scales: all but free water."""
        layers = self.case.liquid.layers
        if self.case.liquid.water_top_m is None:
            return self.case.column
        return self.case.column.scaled([0.0] + [1.0] * (len(layers) - 1))

    @cached_property
    def water(self) -> Column | None:
        """The column of the free water, which the factor does not scale."""
        if self.case.liquid.water_top_m is None:
            return None
        return self.case.column.scaled([1.0] + [0.0] * (len(self.case.liquid.layers) - 1))

    @cached_property
    def product_filling(self) -> Filling:
        """The product standing in the vessel."""
        return Filling(self.case.tank.vessel, self.product, self.gravity)

    @cached_property
    def water_filling(self) -> Filling | None:
        """The free water standing in the vessel."""
        water = self.water
        return None if water is None else Filling(self.case.tank.vessel, water, self.gravity)

    @cached_property
    def vapour_at_m(self) -> float:
        """Where the pressure of the vapour space is stated: p3's tap, or the top of the vessel."""
        p3 = self.case.tank.transmitters.get("p3")
        return self.case.tank.vessel.z_max if p3 is None else p3.elevation_m

    @cached_property
    def vent_pa(self) -> float | None:
        """Pressure above the liquid of a tank open to the air, Pa absolute.

        None where a p3 or a differential transmitter says that the space has a pressure of its
        own.
        """
        if "p3" in self.case.tank.transmitters or self.case.tank.dp is not None:
            return None
        return self.case.conditions.outside_pa(self.vapour_at_m)

    def areal_mass(self, low_m: npt.ArrayLike, state: State) -> FloatArray:
        """Return the liquid above an elevation, kg/m2."""
        total = state.factor * self.product.areal_mass(low_m, state.surface_m)
        if self.water is not None:
            total = total + self.water.areal_mass(low_m, state.surface_m)
        return np.asarray(total)

    def density(self, z_m: npt.ArrayLike, state: State) -> FloatArray:
        """Return the density of the liquid at elevations, kg/m3."""
        rho = state.factor * self.product.density(z_m)
        return np.asarray(rho if self.water is None else rho + self.water.density(z_m))

    def contents(self, state: State) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Return the volume (m3) and the masses of the product and of the free water (kg).

        All of it is liquid: a floating roof is taken off.
        """
        surface = state.surface_m
        volume, moment = self.case.tank.vessel.volume_and_moment(surface)
        product = state.factor * self.product_filling.mass_from(surface, volume, moment)
        water = np.zeros(surface.shape)
        if self.water_filling is not None:
            water = self.water_filling.mass_from(surface, volume, moment)
        liquid, product = less_roof(self, state, np.asarray(volume), np.asarray(product))
        return liquid, product, water

    def without_roof(self) -> Model:
        """Return the model of the same tank without its floating roof."""
        bare = replace(self.case.tank, floating_roof=None)
        return replace(self, case=replace(self.case, tank=bare))

    def volume(self, state: State) -> FloatArray:
        """Return the volume (m3) of all liquid, a floating roof taken off."""
        return self.contents(state)[0]

    def vapour_density(self, vapour_pa: FloatArray) -> FloatArray:
        """Return the density of what fills the space above the liquid, kg/m3."""
        case = self.case
        vapour = case.tank.vapour or case.fluid.vapour
        if vapour is None:
            return np.broadcast_to(case.conditions.air_density_kg_m3, vapour_pa.shape)
        if vapour.density_kg_m3 is not None:
            return np.broadcast_to(
                vapour.density_kg_m3 * np.asarray(self.vapour_scale), vapour_pa.shape
            )
        scale = vapour.compressibility * GAS_CONSTANT_J_MOL_K * self._vapour_temperature_k
        molar_mass = (vapour.molar_mass_kg_mol or 0.0) * self.vapour_scale
        return np.asarray(vapour_pa * molar_mass / scale)

    def vapour_mass(self, state: State) -> FloatArray:
        """Return the mass of what fills the space above the liquid, kg: stock, where it is vapour.

        Notes
        -----
        A vapour of stated molar mass thins out upwards, P = P0 exp(-M g (z - z0) / (Z R T)); its
        density at the middle of the space's height stands for all of it, to 1e-6.
        """
        vessel = self.case.tank.vessel
        empty = vessel.capacity - np.asarray(vessel.volume(state.surface_m))
        middle = 0.5 * (state.surface_m + vessel.z_max)
        at = self.vapour_pressure(middle, state)
        return np.asarray(self.vapour_density(at) * empty)

    def vapour_pressure(self, z_m: npt.ArrayLike, state: State) -> FloatArray:
        """Return the pressure at an elevation above the liquid, Pa absolute.

        Notes
        -----
        Isothermal gas of stated molar mass: P = P0 exp(M g (z0 - z) / (Z R T)). A vapour of stated
        density, or outside air, is the same density all the way.
        """
        rise = self.vapour_at_m - np.asarray(z_m)
        if not self.vapour_thins:
            return np.asarray(
                state.vapour_pa + self.gravity * self.vapour_density(state.vapour_pa) * rise
            )
        per_pa = self.vapour_density(np.ones(state.vapour_pa.shape))
        return np.asarray(state.vapour_pa * np.exp(self.gravity * per_pa * rise))

    def mean_vapour_density(self, low_m: npt.ArrayLike, high_m: float, state: State) -> FloatArray:
        """Return the mean density of the vapour between two elevations, kg/m3."""
        rise = high_m - np.asarray(low_m)
        flat = np.where(np.abs(rise) > 1e-6, rise, 1.0)
        drop = self.vapour_pressure(high_m - flat, state) - self.vapour_pressure(high_m, state)
        return np.asarray(drop / (self.gravity * flat))

    @property
    def vapour_thins(self) -> bool:
        """Whether the vapour's density follows from its pressure, and so falls with height."""
        vapour = self.case.tank.vapour or self.case.fluid.vapour
        return vapour is not None and vapour.density_kg_m3 is None

    @cached_property
    def _vapour_temperature_k(self) -> float:
        case = self.case
        stated = (
            case.liquid.temperature_k,
            case.readings.air_temperature_k,
            case.tank.surroundings.air_temperature_k,
        )
        return next((t for t in stated if t is not None), ICE_POINT_K + 15.0)

    def pressure(self, z_m: float, state: State) -> FloatArray:
        """Return the pressure in the tank at an elevation, Pa absolute."""
        in_vapour = self.vapour_pressure(z_m, state)
        at_surface = self.vapour_pressure(state.surface_m, state)
        low = np.minimum(z_m, state.surface_m)
        in_liquid = at_surface + self._head(self.areal_mass(low, state))
        return np.where(state.surface_m > z_m, in_liquid, in_vapour)

    def _head(self, areal_mass: FloatArray) -> FloatArray:
        """Return the pressure rise under an areal mass, compressed where the liquid is."""
        modulus = self.case.column.bulk_modulus_pa
        weight = self.gravity * areal_mass
        if modulus is None:
            return weight
        with np.errstate(invalid="ignore", divide="ignore"):
            # No column is as heavy as its modulus: the surface then comes out as no number.
            return np.asarray(-modulus * np.log1p(-weight / modulus))

    def pressure_slopes(self, z_m: float, state: State) -> Slopes:
        """Return how the pressure at an elevation changes with the state."""
        g, covered = self.gravity, state.surface_m > z_m
        rv = self.vapour_density(self.vapour_pressure(state.surface_m, state))
        per_pa: FloatArray | float = 0.0
        if self.vapour_thins:
            per_pa = self.vapour_density(np.ones(state.vapour_pa.shape))
        low = np.minimum(z_m, state.surface_m)
        modulus = self.case.column.bulk_modulus_pa
        squeeze: FloatArray | float = 1.0
        if modulus is not None:
            squeeze = 1.0 / (1.0 - g * self.areal_mass(low, state) / modulus)
        by_surface = g * (squeeze * self.density(state.surface_m, state) - rv)
        by_factor = g * squeeze * self.product.areal_mass(low, state.surface_m)
        height = self.vapour_at_m - np.where(covered, state.surface_m, z_m)
        return (
            np.where(covered, by_surface, 0.0),
            np.where(covered, by_factor, 0.0),
            np.exp(g * per_pa * height),
        )

    def expected(self, tag: str, state: State) -> FloatArray:
        """Return what a transmitter reads, Pa in its own reference."""
        if tag == "dp":
            return self._differential(state)
        transmitter = self.case.tank.transmitters[tag]
        tap = self.pressure(transmitter.elevation_m, state)
        return np.asarray(reading_from_tap(transmitter, tap, self.case.conditions))

    def _differential(self, state: State) -> FloatArray:
        dp = self.case.tank.dp
        assert dp is not None
        high = self.pressure(dp.high.elevation_m, state)
        low = self.pressure(dp.low.elevation_m, state)
        return np.asarray(high - low + self.line_difference(state))

    def line_difference(self, state: State) -> FloatArray:
        """Return what the two lines of the differential transmitter add to its reading, Pa."""
        dp, around = self.case.tank.dp, self.case.conditions
        assert dp is not None
        liquid = self.density(np.full(state.factor.shape, dp.high.elevation_m), state)
        vapour = self.vapour_density(state.vapour_pa)
        high = side_head_pa(dp.high, dp.sensor_elevation_m, liquid, around)
        return np.asarray(high - side_head_pa(dp.low, dp.sensor_elevation_m, vapour, around))

    def slopes(self, tag: str, state: State) -> Slopes:
        """Return how a transmitter's reading changes with the state."""
        if tag == "dp":
            dp = self.case.tank.dp
            assert dp is not None
            high = self.pressure_slopes(dp.high.elevation_m, state)
            low = self.pressure_slopes(dp.low.elevation_m, state)
            by_surface, by_factor, by_vapour = (
                np.asarray(a - b) for a, b in zip(high, low, strict=True)
            )
            if dp.high.fill_density_kg_m3 is None:
                rise = dp.high.elevation_m - dp.sensor_elevation_m
                by_factor = by_factor + self.gravity * rise * self.product.density(
                    np.full(state.factor.shape, dp.high.elevation_m)
                )
            return by_surface, by_factor, by_vapour
        transmitter = self.case.tank.transmitters[tag]
        zero, one = (reading_from_tap(transmitter, p, self.case.conditions) for p in (0.0, 1.0))
        per_tap = one - zero
        by_surface, by_factor, by_vapour = (
            np.asarray(per_tap * slope)
            for slope in self.pressure_slopes(transmitter.elevation_m, state)
        )
        return by_surface, by_factor, by_vapour

    def vapour_from_p3(self, reading_pa: FloatArray) -> FloatArray:
        """Return the pressure of the vapour space behind a p3 in the vapour, Pa absolute."""
        p3 = self.case.tank.transmitters["p3"]
        return np.asarray(tap_from_reading(p3, reading_pa, self.case.conditions))

"""Transmitters and what their diaphragms feel, against what is in the tank.

A leg between the tap and the sensor is just another column of the hydrostatic equation, so a
direct-mounted, wet-leg, dry-leg or purged transmitter differs only in that column.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

from tankcalc.constants import GAS_CONSTANT_J_MOL_K
from tankcalc.errors import InputError

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    Pressure = float | npt.NDArray[np.float64]

Reads = Literal["gauge", "absolute"]
"""Pressure reference a transmitter is built for."""


@dataclass(frozen=True, slots=True)
class Accuracy:
    """Accuracy of one instrument, as its maker states it.

    Attributes
    ----------
    fixed : float
        Absolute part, standard uncertainty, in the instrument's own SI unit (Pa, m, K).
    of_span, of_limit, of_reading : float
        Parts proportional to span, to the upper range limit and to the reading (fractions).
    per_kelvin : float
        Effect of ambient temperature, SI unit of the instrument per kelvin.
    drift : float
        Stability since the last calibration, SI unit of the instrument.
    coverage : float
        Coverage factor of the stated parts (1 for a standard uncertainty).
    """

    fixed: float = 0.0
    of_span: float = 0.0
    of_limit: float = 0.0
    of_reading: float = 0.0
    per_kelvin: float = 0.0
    drift: float = 0.0
    coverage: float = 1.0


@dataclass(frozen=True, slots=True)
class FilledLeg:
    """A leg filled with a known liquid, from the tap to the sensor.

    Attributes
    ----------
    sensor_elevation_m : float
        Elevation of the sensor above the datum, m.
    fill_density_kg_m3 : float
        Density of the fill at ``fill_density_at_k``, kg/m3.
    fill_density_at_k : float or None
        Temperature of the stated density, K; None: taken as it is at any temperature.
    fill_expansion_per_k : float
        Volume expansion of the fill, 1/K.
    """

    sensor_elevation_m: float
    fill_density_kg_m3: float
    fill_density_at_k: float | None = None
    fill_expansion_per_k: float = 0.0


@dataclass(frozen=True, slots=True)
class DryLeg:
    """A leg filled with gas, given by its density or its molar mass (kg/mol)."""

    sensor_elevation_m: float
    gas_density_kg_m3: float | None = None
    molar_mass_kg_mol: float | None = None


@dataclass(frozen=True, slots=True)
class Purge:
    """A purge line (bubbler) whose tip is at the transmitter's elevation."""

    sensor_elevation_m: float
    molar_mass_kg_mol: float
    friction_pa: float = 0.0


Leg = FilledLeg | DryLeg | Purge


@dataclass(frozen=True, slots=True)
class Transmitter:
    """A pressure transmitter fitted to a tank.

    Attributes
    ----------
    tag : str
        "p1" (bottom), "p2" (middle) or "p3" (vapour space).
    elevation_m : float
        Where the tank's pressure is felt, above the datum, m.
    reads : {"gauge", "absolute"}
        The reference of its reading.
    vent_elevation_m : float or None
        Where a gauge transmitter's other side is open to the air, m; None: at the sensor.
    range_pa : (float, float) or None
        What 4 mA and 20 mA stand for, Pa, in the transmitter's own reference.
    accuracy : Accuracy or None
        What its maker states; None where nothing is known.
    leg : FilledLeg, DryLeg, Purge or None
        What lies between the tap and the sensor; None: the diaphragm sits on the tank.
    elevation_uncertainty_m : float or None
        Standard uncertainty of the elevation, m, where it is stated.
    """

    tag: str
    elevation_m: float
    reads: Reads
    vent_elevation_m: float | None = None
    range_pa: tuple[float, float] | None = None
    accuracy: Accuracy | None = None
    leg: Leg | None = None
    elevation_uncertainty_m: float | None = None

    @property
    def sensor_elevation_m(self) -> float:
        """Elevation of the sensor itself, m."""
        return self.elevation_m if self.leg is None else self.leg.sensor_elevation_m

    @property
    def vent_m(self) -> float:
        """Elevation of the open side of a gauge transmitter, m."""
        return self.sensor_elevation_m if self.vent_elevation_m is None else self.vent_elevation_m


@dataclass(frozen=True, slots=True)
class Side:
    """One side of a differential transmitter: its tap and what fills its line.

    ``fill_density_kg_m3`` None: the high side holds the tank's liquid at its tap, the low side
    the vapour.
    """

    elevation_m: float
    fill_density_kg_m3: float | None = None
    fill_density_at_k: float | None = None
    fill_expansion_per_k: float = 0.0


@dataclass(frozen=True, slots=True)
class DifferentialTransmitter:
    """A differential transmitter reading high minus low at its own sensor, Pa."""

    sensor_elevation_m: float
    high: Side
    low: Side
    range_pa: tuple[float, float] | None = None
    accuracy: Accuracy | None = None
    tag: str = "dp"


@dataclass(frozen=True, slots=True)
class Conditions:
    """What a transmitter's reading depends on besides the tank.

    Attributes
    ----------
    gravity_m_s2 : float
        Local gravity, m/s2.
    air_density_kg_m3 : float
        Density of the outside air, kg/m3.
    barometer_pa : float
        Outside pressure at the datum, Pa absolute.
    leg_temperature_k : float or None
        Temperature of the legs, K; None where nothing states it.
    """

    gravity_m_s2: float
    air_density_kg_m3: float
    barometer_pa: float
    leg_temperature_k: float | None = None

    def outside_pa(self, z_m: float) -> float:
        """Return the outside pressure (Pa absolute) at an elevation (m)."""
        return self.barometer_pa - self.air_density_kg_m3 * self.gravity_m_s2 * z_m


def fill_density(
    stated_kg_m3: float, at_k: float | None, expansion_per_k: float, conditions: Conditions
) -> float:
    """Return the density of a leg's fill at the leg's temperature, kg/m3.

    Notes
    -----
    density / (1 + expansion (T - at)). Without an expansion, a temperature of reference, or a
    leg temperature the stated density is taken as it is.
    """
    if not expansion_per_k or at_k is None or conditions.leg_temperature_k is None:
        return stated_kg_m3
    return stated_kg_m3 / (1.0 + expansion_per_k * (conditions.leg_temperature_k - at_k))


def _gas_ratio(molar_mass_kg_mol: float, rise_m: float, conditions: Conditions) -> Pressure:
    """Return the pressure at the sensor of a gas column against that at a tap this much higher.

    Isothermal ideal gas: exp(M g rise / (R T)).
    """
    import numpy as np

    temperature = conditions.leg_temperature_k
    if temperature is None:
        raise InputError("a gas-filled leg needs its temperature or the air's.")
    scale = GAS_CONSTANT_J_MOL_K * temperature
    ratio: Pressure = np.exp(molar_mass_kg_mol * conditions.gravity_m_s2 * rise_m / scale)
    return ratio


def sensor_from_tap(transmitter: Transmitter, tap_pa: Pressure, conditions: Conditions) -> Pressure:
    """Return the absolute pressure at the sensor (Pa) for one at the tap (Pa absolute).

    Notes
    -----
    The leg is a column of its own between tap and sensor: P_sensor = P_tap + rho g (z_tap -
    z_sensor), rho being the fill's, or the gas's at the sensor's pressure; a purge line adds
    its friction.
    """
    leg = transmitter.leg
    if leg is None:
        return tap_pa
    drop = transmitter.elevation_m - leg.sensor_elevation_m
    match leg:
        case FilledLeg():
            rho = fill_density(
                leg.fill_density_kg_m3,
                leg.fill_density_at_k,
                leg.fill_expansion_per_k,
                conditions,
            )
            return tap_pa + rho * conditions.gravity_m_s2 * drop
        case DryLeg(gas_density_kg_m3=float(rho)):
            return tap_pa + rho * conditions.gravity_m_s2 * drop
        case DryLeg(molar_mass_kg_mol=float(molar_mass)):
            return tap_pa * _gas_ratio(molar_mass, drop, conditions)
        case Purge():
            ratio = _gas_ratio(leg.molar_mass_kg_mol, drop, conditions)
            return (tap_pa + leg.friction_pa) * ratio
    raise InputError("a dry leg needs its gas density or its molar mass.")


def tap_from_sensor(
    transmitter: Transmitter, sensor_pa: Pressure, conditions: Conditions
) -> Pressure:
    """Return the absolute pressure at the tap (Pa) for one at the sensor (Pa absolute).

    The inverse of `sensor_from_tap`: every leg is linear in the pressure.
    """
    at_zero = sensor_from_tap(transmitter, 0.0, conditions)
    per_pascal = sensor_from_tap(transmitter, 1.0, conditions) - at_zero
    return (sensor_pa - at_zero) / per_pascal


def tap_from_reading(
    transmitter: Transmitter, reading_pa: Pressure, conditions: Conditions
) -> Pressure:
    """Return the tank's absolute pressure at the tap (Pa) behind a reading (Pa).

    The reading is in the transmitter's own reference: a gauge reading is against the outside
    air at its vent.
    """
    outside = conditions.outside_pa(transmitter.vent_m) if transmitter.reads == "gauge" else 0.0
    return tap_from_sensor(transmitter, reading_pa + outside, conditions)


def reading_from_tap(
    transmitter: Transmitter, tap_pa: Pressure, conditions: Conditions
) -> Pressure:
    """Return what a transmitter reads (Pa, its own reference) for a tap pressure (Pa absolute)."""
    outside = conditions.outside_pa(transmitter.vent_m) if transmitter.reads == "gauge" else 0.0
    return sensor_from_tap(transmitter, tap_pa, conditions) - outside


def side_head_pa(
    side: Side, sensor_elevation_m: float, unfilled_kg_m3: Pressure, conditions: Conditions
) -> Pressure:
    """Return what one side's line adds between its tap and a differential sensor, Pa.

    Parameters
    ----------
    unfilled_kg_m3 : float or array
        Density of what stands in the line where the side has no fill of its own, kg/m3.
    """
    rho: Pressure = unfilled_kg_m3
    if side.fill_density_kg_m3 is not None:
        rho = fill_density(
            side.fill_density_kg_m3,
            side.fill_density_at_k,
            side.fill_expansion_per_k,
            conditions,
        )
    return rho * conditions.gravity_m_s2 * (side.elevation_m - sensor_elevation_m)

"""Gravity, outside air and its pressure, from what a site states."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final

from tankcalc.constants import ICE_POINT_K, STANDARD_ATMOSPHERE_PA, STANDARD_GRAVITY_M_S2
from tankcalc.errors import InputError
from tankcalc.surroundings.air import (
    PRESSURES_HPA,
    TEMPERATURES_C,
    moist_air_density,
    standard_pressure,
    standard_temperature,
)
from tankcalc.surroundings.gravity import SITE_HEIGHTS_M, normal_gravity
from tankcalc.surroundings.limits import check

USUAL_HUMIDITY: Final = 0.5
"""Relative humidity where a site states none: at 20 degC within 0.5 % of any air's density."""

MOST_WEATHER: Final = 0.1
"""Largest share by which weather moves a barometer; a kilometre of height moves it by 0.12."""


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What surrounds every tank of a site.

    Attributes
    ----------
    gravity_m_s2 : float
        Local acceleration of free fall, m/s2.
    gravity_from : str
        "value", "latitude", or "standard" where the site states neither.
    air_density_kg_m3 : float
        Density of the outside air, kg/m3.
    air_from : str
        "density", "state" (pressure, temperature, humidity), or "assumed".
    outside_pressure_pa : float
        Outside pressure at the datum, Pa absolute.
    outside_pressure_from : str
        "value", "height" (standard atmosphere at the site's height), or "assumed".
    air_temperature_k : float or None
        Outside temperature, K; None where the site states none.
    gravity_uncertainty_m_s2, air_uncertainty_kg_m3 : float or None
        Standard uncertainties, where the site states them.
    standard_temperature_k : float
        Base of standard volumes where the liquid's own figures state none, K.
    """

    gravity_m_s2: float
    gravity_from: str
    air_density_kg_m3: float
    air_from: str
    outside_pressure_pa: float
    outside_pressure_from: str
    air_temperature_k: float | None = None
    gravity_uncertainty_m_s2: float | None = None
    air_uncertainty_kg_m3: float | None = None
    standard_temperature_k: float = ICE_POINT_K + 15.0


def surroundings(
    *,
    gravity_m_s2: float | None = None,
    latitude_rad: float | None = None,
    height_m: float | None = None,
    air_density_kg_m3: float | None = None,
    outside_pressure_pa: float | None = None,
    air_temperature_k: float | None = None,
    humidity: float | None = None,
) -> Surroundings:
    """Return the surroundings of a site from what it states; what it leaves out is assumed.

    Parameters
    ----------
    gravity_m_s2 : float, optional
        Local acceleration of free fall, m/s2, 9.7 to 9.9.
    latitude_rad, height_m : float, optional
        Geodetic latitude, rad; height above sea level, m, -1000 to 6000. Together they give the
        gravity where no value does; the height gives the outside pressure also beside a value.
    air_density_kg_m3 : float, optional
        Density of the outside air, kg/m3, 0.5 to 2.
    outside_pressure_pa : float, optional
        Barometer at the datum, Pa absolute.
    air_temperature_k : float, optional
        Outside temperature, K, 213.15 to 333.15.
    humidity : float, optional
        Relative humidity, 0 to 1; 0.5 where it is not stated.

    Returns
    -------
    Surroundings
        With the words that say where each figure comes from.

    Raises
    ------
    InputError
        If something is stated twice or by half, is out of range, or if the barometer is not one
        of that height. The message begins with the quantity at fault.

    Notes
    -----
    Without a barometer the outside pressure is the standard atmosphere's at the height of the
    site, or 101 325 Pa. The air's density counts as known from its state only with a barometer
    and a temperature; else it is that of air at the pressure above, at the standard atmosphere's
    temperature for that height: 1.221 kg/m3 at sea level, where it is 1.1 kg/m3 at 40 degC and
    1.4 kg/m3 at -20 degC.

    Examples
    --------
    >>> here = surroundings(gravity_m_s2=9.8124, outside_pressure_pa=101_325.0)
    >>> here.gravity_from, here.air_from, here.outside_pressure_from
    ('value', 'assumed', 'value')
    """
    if height_m is not None:
        check("height", height_m, SITE_HEIGHTS_M, "m above sea level")
    if air_temperature_k is not None:
        check("air temperature", air_temperature_k - ICE_POINT_K, TEMPERATURES_C, "degC")
    gravity, gravity_from = _gravity(gravity_m_s2, latitude_rad, height_m)
    pressure, pressure_from = _outside_pressure(outside_pressure_pa, height_m)
    if air_density_kg_m3 is not None:
        density, air_from = _stated_density(air_density_kg_m3, humidity), "density"
    else:
        usual_k = standard_temperature(0.0 if height_m is None else height_m)
        temperature = usual_k if air_temperature_k is None else air_temperature_k
        moist = USUAL_HUMIDITY if humidity is None else humidity
        density = moist_air_density(pressure, temperature, moist)
        stated = outside_pressure_pa is not None and air_temperature_k is not None
        air_from = "state" if stated else "assumed"
    return Surroundings(
        gravity, gravity_from, density, air_from, pressure, pressure_from, air_temperature_k
    )


def _gravity(
    stated: float | None, latitude_rad: float | None, height_m: float | None
) -> tuple[float, str]:
    """Return the gravity (m/s2) and where it comes from."""
    if stated is not None:
        if latitude_rad is not None:
            raise InputError("gravity: stated twice, by value and by latitude. Keep one of them.")
        return check("gravity", stated, (9.7, 9.9), "m/s2"), "value"
    if latitude_rad is None:
        return STANDARD_GRAVITY_M_S2, "standard"
    if height_m is None:
        raise InputError("gravity: the latitude needs the height above sea level beside it.")
    return normal_gravity(latitude_rad, height_m), "latitude"


def _outside_pressure(stated: float | None, height_m: float | None) -> tuple[float, str]:
    """Return the outside pressure (Pa absolute) and where it comes from."""
    usual = STANDARD_ATMOSPHERE_PA if height_m is None else standard_pressure(height_m)
    if stated is None:
        return usual, "assumed" if height_m is None else "height"
    check("air pressure", stated / 100.0, PRESSURES_HPA, "hPa")
    if height_m is not None and abs(stated / usual - 1.0) > MOST_WEATHER:
        raise InputError(
            f"air pressure: {stated / 100.0:.1f} hPa is not the barometer at {height_m:.0f} m, "
            f"where it is near {usual / 100.0:.0f} hPa. Give the pressure at the site, not the "
            "one reduced to sea level."
        )
    return stated, "value"


def _stated_density(density_kg_m3: float, humidity: float | None) -> float:
    if humidity is not None:
        raise InputError("air: a density and a humidity are stated. Keep one of them.")
    return check("air density", density_kg_m3, (0.5, 2.0), "kg/m3")

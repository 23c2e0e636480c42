"""Gravity from latitude and height."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Final

from tankcalc.surroundings.limits import check


@dataclass(frozen=True, slots=True)
class Ellipsoid:
    """A reference ellipsoid with its gravity field.

    Attributes
    ----------
    equatorial_radius_m : float
        Semi-major axis a, m.
    flattening : float
        Flattening f = (a - b) / a.
    eccentricity_squared : float
        First eccentricity squared, e2 = f (2 - f).
    gravity_at_equator_m_s2 : float
        Normal gravity on the ellipsoid at the equator, m/s2.
    somigliana : float
        Constant k = b g(pole) / (a g(equator)) - 1.
    centrifugal : float
        m = omega^2 a^2 b / GM.
    """

    equatorial_radius_m: float
    flattening: float
    eccentricity_squared: float
    gravity_at_equator_m_s2: float
    somigliana: float
    centrifugal: float


WGS84: Final = Ellipsoid(
    equatorial_radius_m=6_378_137.0,
    flattening=1 / 298.257223563,
    eccentricity_squared=6.69437999013e-3,
    gravity_at_equator_m_s2=9.7803253359,
    somigliana=1.93185265241e-3,
    centrifugal=3.44978650684e-3,
)
"""World Geodetic System 1984: NIMA TR8350.2, 3rd ed. (2000), Tables 3.1 to 3.4."""

GRS80: Final = Ellipsoid(
    equatorial_radius_m=6_378_137.0,
    flattening=1 / 298.257222101,
    eccentricity_squared=6.69438002290e-3,
    gravity_at_equator_m_s2=9.7803267715,
    somigliana=1.931851353e-3,
    centrifugal=3.44978600308e-3,
)
"""Geodetic Reference System 1980: Moritz, Journal of Geodesy 74 (2000) 128."""

SITE_HEIGHTS_M: Final = (-1_000.0, 6_000.0)
"""Heights that are believed of a site, m above sea level."""


def normal_gravity(latitude_rad: float, height_m: float, ellipsoid: Ellipsoid = WGS84) -> float:
    """Return the acceleration of free fall at a latitude and a height above sea level.

    Parameters
    ----------
    latitude_rad : float
        Geodetic latitude, rad, north positive, -pi/2 to pi/2.
    height_m : float
        Height above sea level, m, -1000 to 6000.
    ellipsoid : Ellipsoid
        `WGS84`, or `GRS80`.

    Returns
    -------
    float
        Normal gravity, m/s2.

    Raises
    ------
    InputError
        If there is no such latitude, or the height is out of range.

    Notes
    -----
    Somigliana's closed formula on the ellipsoid, carried up by the second-order free-air series::

        g0 = ge (1 + k s) / sqrt(1 - e2 s),    s = sin(latitude)^2
        g  = g0 (1 - 2 (1 + f + m - 2 f s) H / a + 3 H^2 / a^2)

    Rocks and hills make the true value differ by some 0.005 % (50 mGal), rarely three times as
    much; the height is taken above sea level instead of the ellipsoid, at most 0.003 %.

    References
    ----------
    NIMA TR8350.2, 3rd ed. (2000), eq. (4-1) and (4-3).

    Examples
    --------
    >>> round(normal_gravity(math.radians(52.0), 12.0), 5)
    9.81244
    """
    check("latitude", math.degrees(latitude_rad), (-90.0, 90.0), "deg")
    check("height", height_m, SITE_HEIGHTS_M, "m above sea level")
    a, f, k = ellipsoid.equatorial_radius_m, ellipsoid.flattening, ellipsoid.somigliana
    s = math.sin(latitude_rad) ** 2
    on_ellipsoid = ellipsoid.gravity_at_equator_m_s2 * (1.0 + k * s)
    on_ellipsoid /= math.sqrt(1.0 - ellipsoid.eccentricity_squared * s)
    h = height_m / a
    free_air = 1.0 - 2.0 * (1.0 + f + ellipsoid.centrifugal - 2.0 * f * s) * h + 3.0 * h * h
    return on_ellipsoid * free_air

"""The ends a cylinder can have: bottoms, roofs and heads, as a tank file names them.

An end holds what was typed and nothing else; `tankcalc.geometry.meridian` turns it into a
profile once the diameter is known, and checks it there.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

from tankcalc.errors import GeometryError


@dataclass(frozen=True, slots=True)
class FlatEnd:
    """A plane square to the axis."""


@dataclass(frozen=True, slots=True)
class ConeEnd:
    """A cone.

    Attributes
    ----------
    depth_m : float
        Apex to rim along the axis, m.
    points : {"down", "up"}
        For a bottom: apex below the rim, or above it, inside the vessel. The apex of a roof or
        of a head points away from the vessel, and only "down", the default, is taken there.
    """

    depth_m: float
    points: Literal["down", "up"] = "down"


@dataclass(frozen=True, slots=True)
class SlopeEnd:
    """A plane floor, lowest at one side, falling by ``fall_m`` across the diameter."""

    fall_m: float


@dataclass(frozen=True, slots=True)
class DishedEnd:
    """A spherical cap, by its depth or by the radius of its sphere (one of them), m."""

    depth_m: float | None = None
    radius_m: float | None = None


@dataclass(frozen=True, slots=True)
class HemisphericalEnd:
    """Half a sphere of the shell's diameter."""


@dataclass(frozen=True, slots=True)
class EllipsoidalEnd:
    """Half a spheroid of the given depth, m; None: a quarter of the diameter (the 2:1 head)."""

    depth_m: float | None = None


@dataclass(frozen=True, slots=True)
class TorisphericalEnd:
    """A spherical crown and a toroidal knuckle, by their radii, m."""

    crown_radius_m: float
    knuckle_radius_m: float


End: TypeAlias = (
    FlatEnd | ConeEnd | SlopeEnd | DishedEnd | HemisphericalEnd | EllipsoidalEnd | TorisphericalEnd
)

TORISPHERICAL_STANDARDS: Final = {
    "ASME F&D": (1.0, 0.06),
    "DIN 28011": (1.0, 0.1),
    "DIN 28013": (0.8, 0.154),
}
"""Crown and knuckle radius in diameters.

DIN 28011 and DIN 28013 give them in outside diameters; here they are taken of the inside one.
ASME F&D: crown of one diameter, knuckle of 6 % of it (ASME BPVC VIII-1, UG-32, the smallest).
"""


def torispherical_standard(name: str, diameter_m: float) -> TorisphericalEnd:
    """Return the torispherical end of a standard, by the standard's name.

    Parameters
    ----------
    name : str
        One of `TORISPHERICAL_STANDARDS`.
    diameter_m : float
        Inside diameter of the shell, m.

    Returns
    -------
    TorisphericalEnd
        With its radii in metres.

    Raises
    ------
    GeometryError
        No such standard.

    Examples
    --------
    >>> torispherical_standard("DIN 28011", 3.0)
    TorisphericalEnd(crown_radius_m=3.0, knuckle_radius_m=0.30000000000000004)
    """
    if name not in TORISPHERICAL_STANDARDS:
        known = ", ".join(f'"{standard}"' for standard in TORISPHERICAL_STANDARDS)
        raise GeometryError("standard", f"no such torispherical standard; known are {known}.")
    crown, knuckle = TORISPHERICAL_STANDARDS[name]
    return TorisphericalEnd(crown * diameter_m, knuckle * diameter_m)

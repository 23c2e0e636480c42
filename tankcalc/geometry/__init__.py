"""Vessel shapes: horizontal area, volume and its first moment against elevation, and back.

Names resolve on demand (PEP 562): importing the package loads neither NumPy nor a shape.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tankcalc.geometry.datum import moved_datum
    from tankcalc.geometry.deadwood import with_deadwood
    from tankcalc.geometry.ends import (
        ConeEnd,
        DishedEnd,
        EllipsoidalEnd,
        End,
        FlatEnd,
        HemisphericalEnd,
        SlopeEnd,
        TorisphericalEnd,
        torispherical_standard,
    )
    from tankcalc.geometry.frusta import stack
    from tankcalc.geometry.horizontal import horizontal_cylinder
    from tankcalc.geometry.loaded import Course, LoadedVessel, Stretch
    from tankcalc.geometry.ovals import oval
    from tankcalc.geometry.rectangular import box
    from tankcalc.geometry.spheres import sphere, spheroid
    from tankcalc.geometry.strapping import strapped
    from tankcalc.geometry.vertical import vertical_cylinder
    from tankcalc.geometry.vessel import Vessel

__all__ = [
    "ConeEnd",
    "Course",
    "DishedEnd",
    "EllipsoidalEnd",
    "End",
    "FlatEnd",
    "HemisphericalEnd",
    "LoadedVessel",
    "SlopeEnd",
    "Stretch",
    "TorisphericalEnd",
    "Vessel",
    "box",
    "horizontal_cylinder",
    "moved_datum",
    "oval",
    "sphere",
    "spheroid",
    "stack",
    "strapped",
    "torispherical_standard",
    "vertical_cylinder",
    "with_deadwood",
]

_HOMES = {
    "Course": "loaded",
    "LoadedVessel": "loaded",
    "Stretch": "loaded",
    "box": "rectangular",
    "horizontal_cylinder": "horizontal",
    "moved_datum": "datum",
    "oval": "ovals",
    "sphere": "spheres",
    "spheroid": "spheres",
    "stack": "frusta",
    "strapped": "strapping",
    "vertical_cylinder": "vertical",
    "Vessel": "vessel",
    "with_deadwood": "deadwood",
}


def __getattr__(name: str) -> object:
    """Return a public name, loading the module it lives in."""
    if name not in __all__:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    home = import_module(f"{__name__}.{_HOMES.get(name, 'ends')}")
    value: object = getattr(home, name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    """Return the public names."""
    return list(__all__)

"""Internals that take space, and nozzles or manholes that add some."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.body import Array, Assembly, Body
from tankcalc.geometry.dimensions import elevation
from tankcalc.geometry.polynomial import PiecewisePolynomial, Slab
from tankcalc.geometry.vessel import ROUNDING_M, Vessel

_LOOKS = 64
"""Between two breaks."""


def with_deadwood(vessel: Vessel, pieces: Sequence[tuple[float, float, float]]) -> Vessel:
    """Return the vessel less its deadwood.

    Parameters
    ----------
    vessel : Vessel
        Without it.
    pieces : sequence of (bottom_m, top_m, volume_m3)
        Range of elevations above the datum, m, inside the vessel, and the volume taken there,
        m3, evenly with height. A negative volume is an added space (a manhole).

    Returns
    -------
    Vessel
        With area, volume, moment and capacity reduced.

    Raises
    ------
    GeometryError
        A range outside the vessel or upside down, or more taken than there is; keys
        "deadwood.1.bottom", "deadwood.1.top", "deadwood.1.volume", counted from 1.

    Examples
    --------
    >>> from tankcalc.geometry import box, with_deadwood
    >>> tank = with_deadwood(box(2.0, 1.0, 3.0), [(1.0, 2.0, 0.5)])
    >>> tank.volume(1.5), tank.capacity
    (2.75, 5.5)
    """
    if not pieces:
        return vessel
    slabs = [
        _slab(vessel, f"deadwood.{number}", *piece) for number, piece in enumerate(pieces, start=1)
    ]
    body = Assembly([vessel.body, PiecewisePolynomial.of(slabs)])
    _refuse_lost_space(vessel, body, slabs)
    return vessel.with_body(body)


def _slab(vessel: Vessel, key: str, bottom: float, top: float, volume: float) -> Slab:
    bottom, top = elevation(f"{key}.bottom", bottom), elevation(f"{key}.top", top)
    for name, z in (("bottom", bottom), ("top", top)):
        if not vessel.z_min - ROUNDING_M <= z <= vessel.z_max + ROUNDING_M:
            raise GeometryError(
                f"{key}.{name}",
                f"{z:g} m is outside the vessel, {vessel.z_min:g} m to {vessel.z_max:g} m.",
            )
    if not top > bottom:
        raise GeometryError(f"{key}.top", f"must be above the bottom, {bottom:g} m.")
    if not np.isfinite(volume):
        raise GeometryError(f"{key}.volume", "must be a finite volume.")
    low = max(bottom + vessel.datum, vessel.body.bottom)
    high = min(top + vessel.datum, vessel.body.top)
    return Slab(low, high, -volume / (high - low))


def _refuse_lost_space(vessel: Vessel, body: Body, slabs: Sequence[Slab]) -> None:
    """Refuse where no space is left: the volume would not rise, and no level would be sure."""
    share = 0.5 - 0.5 * np.cos(np.pi * (np.arange(_LOOKS) + 0.5) / _LOOKS)
    low, high = body.breaks[:-1, None], body.breaks[1:, None]
    z: Array = (low + (high - low) * share).ravel()
    lost = z[body.area(z) <= 0.0]
    if not lost.size:
        return
    where = float(lost[0])
    for number, slab in enumerate(slabs, start=1):
        if slab.a0 < 0.0 and slab.bottom <= where <= slab.top:
            raise GeometryError(
                f"deadwood.{number}.volume",
                f"takes more space than there is at {where - vessel.datum:.3f} m.",
            )

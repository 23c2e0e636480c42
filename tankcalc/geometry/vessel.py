"""A vessel: horizontal area, volume and first moment against elevation, and back."""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING, overload

import numpy as np
import numpy.typing as npt

from tankcalc.geometry.body import Array, Body
from tankcalc.geometry.compiled import compiled
from tankcalc.geometry.given import Given, as_given, chunks, flat, held, refuse_outside
from tankcalc.geometry.inverse import Ladder, ladder, level_of_volume

if TYPE_CHECKING:
    from tankcalc.geometry.loaded import Stretch

ROUNDING_M = 1e-9
"""How far outside its range an elevation is still taken as the end of the range, m."""

ROUNDING_SHARE = 1e-12
"""The same for a volume, as a share of capacity."""

MANY = 4096
"""From so many elevations in one call a compiled body pays."""


class Vessel:
    """A vessel of any shape.

    Elevations are in metres above the datum, positive up. Every method takes a float and
    returns a float, or takes an array of any shape and returns arrays of that shape.

    Parameters
    ----------
    kind : str
        The shape, as a tank file names it.
    body : Body
        The space inside.
    outline : ndarray, shape (n, 2)
        Closed side view in the body's elevations, m.
    datum : float
        Elevation of the vessel's datum in the body's elevations, m.

    Attributes
    ----------
    kind : str
        As given.
    z_min, z_max : float
        Lowest and highest inside point, m.
    capacity : float
        Volume at ``z_max``, m3.
    breaks : ndarray
        Elevations where the area is not smooth, m, ascending, from ``z_min`` to ``z_max``.
    """

    def __init__(self, kind: str, body: Body, outline: Array, datum: float = 0.0) -> None:
        self.kind = kind
        self.body = body
        self.datum = datum
        self._outline = outline
        self.z_min = body.bottom - datum
        self.z_max = body.top - datum
        self.breaks = body.breaks - datum
        ends, _ = body.volume_and_moment(np.array([body.bottom, body.top]))
        self._volume_at_bottom, self.capacity = float(ends[0]), float(ends[1])

    def __repr__(self) -> str:
        return (
            f"<{self.kind}, {self.capacity:.6g} m3 from {self.z_min:.6g} m to {self.z_max:.6g} m>"
        )

    @overload
    def area(self, z: float) -> float: ...
    @overload
    def area(self, z: npt.NDArray[np.floating]) -> Array: ...
    def area(self, z: Given) -> float | Array:
        """Return the horizontal area of the inside at an elevation.

        Parameters
        ----------
        z : float or ndarray of any shape
            Elevation above the datum, m, from ``z_min`` to ``z_max``.

        Returns
        -------
        float or ndarray of the same shape
            Area, m2; at a step, that of the layer above.

        Raises
        ------
        RangeError
            An elevation outside the vessel, or not a number.
        """
        return as_given(z, self._area(self._inside(z)))

    @overload
    def volume(self, z: float) -> float: ...
    @overload
    def volume(self, z: npt.NDArray[np.floating]) -> Array: ...
    def volume(self, z: Given) -> float | Array:
        """Return the volume below an elevation.

        Parameters
        ----------
        z : float or ndarray of any shape
            Elevation above the datum, m, from ``z_min`` to ``z_max``.

        Returns
        -------
        float or ndarray of the same shape
            Volume, m3.

        Raises
        ------
        RangeError
            An elevation outside the vessel, or not a number.

        Examples
        --------
        >>> from tankcalc.geometry import sphere
        >>> round(sphere(10.0).volume(6.0), 6)
        339.292007
        """
        return as_given(z, self._volume_and_moment(self._inside(z))[0])

    @overload
    def moment(self, z: float) -> float: ...
    @overload
    def moment(self, z: npt.NDArray[np.floating]) -> Array: ...
    def moment(self, z: Given) -> float | Array:
        """Return the first moment, about the datum, of the volume below an elevation.

        Parameters
        ----------
        z : float or ndarray of any shape
            Elevation above the datum, m, from ``z_min`` to ``z_max``.

        Returns
        -------
        float or ndarray of the same shape
            Integral of A z dz from ``z_min``, m4. A volume that a strapping table holds below
            its first line counts at that line's elevation.

        Raises
        ------
        RangeError
            An elevation outside the vessel, or not a number.
        """
        return as_given(z, self._volume_and_moment(self._inside(z))[1])

    @overload
    def volume_and_moment(self, z: float) -> tuple[float, float]: ...
    @overload
    def volume_and_moment(self, z: npt.NDArray[np.floating]) -> tuple[Array, Array]: ...
    def volume_and_moment(self, z: Given) -> tuple[float | Array, float | Array]:
        """Return `volume` and `moment` together, for little more than either alone."""
        volume, moment = self._volume_and_moment(self._inside(z))
        return as_given(z, volume), as_given(z, moment)

    @overload
    def level(self, volume: float) -> float: ...
    @overload
    def level(self, volume: npt.NDArray[np.floating]) -> Array: ...
    def level(self, volume: Given) -> float | Array:
        """Return the elevation of the surface that closes off a volume.

        Parameters
        ----------
        volume : float or ndarray of any shape
            Volume, m3, from that at ``z_min`` (zero but for a strapping table) to ``capacity``.

        Returns
        -------
        float or ndarray of the same shape
            Elevation above the datum, m; its `volume` is the given one to 1e-12 of capacity.

        Raises
        ------
        RangeError
            A volume that the vessel cannot hold, or not a number.

        Examples
        --------
        >>> from tankcalc.geometry import sphere
        >>> round(sphere(10.0).level(339.29200658769764), 12)
        6.0
        """
        wanted = flat(volume)
        limits = self._volume_at_bottom, self.capacity
        refuse_outside(
            wanted,
            limits,
            ROUNDING_SHARE * self.capacity,
            ("A volume", "m3", "what the vessel can hold"),
        )
        return as_given(volume, self._level(held(wanted, *limits)))

    @property
    def stretch(self) -> Stretch | None:
        """What the head of a liquid adds to the volume; None where nothing is known of it."""
        return None

    @property
    def unstretched(self) -> Vessel:
        """The same vessel without what the head adds."""
        return self

    def volume_below(self, z: Array, surface: Array) -> Array:
        """Return the volume below elevations under a surface.

        Parameters
        ----------
        z : ndarray of any shape
            Elevations inside the vessel, no higher than the surface, m.
        surface : ndarray that broadcasts with it
            The surface, m: a shell that stretches under the head is wider below a high one.

        Returns
        -------
        ndarray
            Volume, m3.
        """
        return np.broadcast_to(self.volume(z), np.broadcast_shapes(np.shape(z), np.shape(surface)))

    def outline(self) -> Array:
        """Return the closed side view, (n, 2): x to the right and elevation above the datum, m."""
        shifted: Array = self._outline - np.array([0.0, self.datum])
        return shifted

    def with_body(self, body: Body) -> Vessel:
        """Return a vessel that looks and measures like this one but holds another space."""
        return Vessel(self.kind, body, self._outline, self.datum)

    def with_datum(self, datum: float) -> Vessel:
        """Return the same vessel, its datum at an elevation of the body's frame, m."""
        return Vessel(self.kind, self.body, self._outline, datum)

    @cached_property
    def _ladder(self) -> Ladder:
        return ladder(self.body)

    def _body_for(self, z: Array) -> Body:
        return self._compiled if z.size >= MANY else self.body

    @cached_property
    def _compiled(self) -> Body:
        return compiled(self.body)

    def _inside(self, z: Given) -> Array:
        """Return the elevations flat, in the body's frame; refuse those outside the vessel."""
        elevations = flat(z)
        limits = self.z_min, self.z_max
        refuse_outside(elevations, limits, ROUNDING_M, ("An elevation", "m", "the vessel"))
        low, high = self.body.bottom, self.body.top
        if self.datum:
            inside = elevations + self.datum
            # The ends, to the last digit: an empty vessel is to hold nothing.
            inside[elevations <= self.z_min], inside[elevations >= self.z_max] = low, high
            elevations = inside
        return held(elevations, low, high)

    def _level(self, volume: Array) -> Array:
        body = self._body_for(volume)
        z = np.empty_like(volume)
        for part in chunks(volume):
            z[part] = level_of_volume(body, self._ladder, volume[part])
        return z - self.datum

    def _area(self, z: Array) -> Array:
        body = self._body_for(z)
        area = np.empty_like(z)
        for part in chunks(z):
            area[part] = body.area(z[part])
        return np.maximum(area, 0.0)

    def _volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        body = self._body_for(z)
        volume, moment = np.empty_like(z), np.empty_like(z)
        for part in chunks(z):
            volume[part], moment[part] = body.volume_and_moment(z[part])
        np.maximum(volume, self._volume_at_bottom, out=volume)
        if self.datum:
            moment -= self.datum * volume
        return volume, moment

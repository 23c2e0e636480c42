"""Bodies made of circular segments: lying cylinders and ovals, and the wedge on a sloped floor."""

from __future__ import annotations

import math

import numpy as np

from tankcalc.geometry.body import Array, Body


def _segment(eta: Array) -> tuple[Array, Array, Array]:
    """Return angle, half chord and area of the unit circle's segment below ``eta``."""
    half_chord = np.sqrt((1.0 - eta) * (1.0 + eta))
    angle = np.arccos(-eta)
    return angle, half_chord, angle + eta * half_chord


class Prism(Body):
    """A horizontal prism whose section is part of an ellipse with one axis upright.

    Parameters
    ----------
    centre : float
        Elevation of the ellipse's centre, m.
    half_height, half_width : float
        Its semi-axes, m.
    length : float
        Length of the prism, m.
    bottom, top : float or None
        The part of the ellipse that counts; None: all of it.

    Notes
    -----
    With eta = (z - centre) / half_height and theta = arccos(-eta):
    A = 2 L a sin(theta), V = L a b (theta + eta sin(theta)),
    integral of eta dV = -2/3 L a b sin(theta)^3.
    """

    def __init__(
        self,
        centre: float,
        half_height: float,
        half_width: float,
        length: float,
        *,
        bottom: float | None = None,
        top: float | None = None,
    ) -> None:
        self.bottom = centre - half_height if bottom is None else bottom
        self.top = centre + half_height if top is None else top
        self.breaks = np.array([self.bottom, self.top])
        self._centre, self._half_height = centre, half_height
        self._width_length = half_width * length
        below_volume, below_moment = self._from_lowest(np.array([self.bottom]))
        self._below_volume, self._below_moment = float(below_volume[0]), float(below_moment[0])

    def _eta(self, z: Array) -> Array:
        eta = (z - self._centre) / self._half_height
        return np.minimum(np.maximum(eta, -1.0), 1.0)

    def _from_lowest(self, z: Array) -> tuple[Array, Array]:
        eta = self._eta(z)
        _, half_chord, segment = _segment(eta)
        scale = self._width_length * self._half_height
        volume = scale * segment
        lever = (-2.0 / 3.0 * scale * self._half_height) * half_chord**3
        return volume, self._centre * volume + lever

    def area(self, z: Array) -> Array:
        """Return the horizontal area at each elevation, m2."""
        eta = self._eta(z)
        area: Array = 2.0 * self._width_length * np.sqrt((1.0 - eta) * (1.0 + eta))
        return area

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4."""
        volume, moment = self._from_lowest(z)
        return volume - self._below_volume, moment - self._below_moment


class Hoof(Body):
    """The wedge of a cylinder between its sloped plane floor and the floor's highest point.

    Parameters
    ----------
    radius : float
        Inside radius of the cylinder, m.
    fall : float
        Height of the wedge, m; it reaches from ``-fall`` to 0.

    Notes
    -----
    At the height u above the low side the liquid covers the segment of the circle below
    eta = 2 u / fall - 1, so that A = R^2 S(eta), and V and M are integrals of S:
    S = theta + eta sin(theta), integral of S = eta S + 2/3 sin(theta)^3,
    integral of eta S = eta^2 S / 2 - (theta + eta sin(theta) (2 eta^2 - 1)) / 8.
    """

    def __init__(self, radius: float, fall: float) -> None:
        self.bottom, self.top = -fall, 0.0
        self.breaks = np.array([self.bottom, self.top])
        self._half = 0.5 * fall
        self._square = radius**2

    def _eta(self, z: Array) -> Array:
        return np.minimum(np.maximum(z / self._half + 1.0, -1.0), 1.0)

    def area(self, z: Array) -> Array:
        """Return the horizontal area at each elevation, m2."""
        _, _, segment = _segment(self._eta(z))
        return self._square * segment

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4."""
        eta = self._eta(z)
        angle, half_chord, segment = _segment(eta)
        scale = self._square * self._half
        volume = scale * (eta * segment + 2.0 / 3.0 * half_chord**3)
        second = 0.125 * (angle + eta * half_chord * (2.0 * eta * eta - 1.0))
        lever = scale * self._half * (0.5 * eta * eta * segment - second)
        return volume, lever - self._half * volume


def circle_area(diameter: float) -> float:
    """Return the area of a circle, m2.

    Examples
    --------
    >>> circle_area(2.0)
    3.141592653589793
    """
    return 0.25 * math.pi * diameter**2

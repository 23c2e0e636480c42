"""Bottoms and roofs: a head's profile about an upright axis, as bodies."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from tankcalc.geometry.body import Array, Body
from tankcalc.geometry.meridian import Arc, Line, Piece
from tankcalc.geometry.polynomial import Slab, frustum


def upright_end(
    pieces: Sequence[Piece], rim: float, *, upward: bool
) -> tuple[list[Slab], list[Body]]:
    """Return the space inside a bottom or a roof.

    Parameters
    ----------
    pieces : sequence of Line or Arc
        The end's profile, from the rim outward.
    rim : float
        Elevation of the rim, m.
    upward : bool
        True for a roof.

    Returns
    -------
    tuple of list
        Layers whose area is a quadratic, and the knuckles.
    """
    slabs: list[Slab] = []
    knuckles: list[Body] = []
    joint = rim
    for piece in pieces:
        if isinstance(piece, Line):
            slabs.append(_cone(piece, rim, upward=upward))
        elif piece.r0 == 0.0:
            slabs.append(_cap(piece, joint, rim, upward=upward))
        else:
            knuckle = Knuckle(piece, rim, upward=upward)
            knuckles.append(knuckle)
            joint = knuckle.top if upward else knuckle.bottom
    return slabs, knuckles


def _cone(line: Line, rim: float, *, upward: bool) -> Slab:
    if upward:
        return frustum(rim + line.x0, rim + line.x1, line.r0, line.r1)
    return frustum(rim - line.x1, rim - line.x0, line.r1, line.r0)


def _cap(arc: Arc, joint: float, rim: float, *, upward: bool) -> Slab:
    """Return the layer from a joint to the pole of a dish, a crown or a spheroid.

    At the distance t from the pole, A = pi (q/p)^2 (2 p t - t^2).
    """
    k = math.pi * (arc.q / arc.p) ** 2
    if not upward:
        return Slab(rim - arc.tip, joint, 0.0, 2.0 * k * arc.p, -k)
    pole = rim + arc.tip
    depth = pole - joint
    return Slab(joint, pole, k * depth * (2.0 * arc.p - depth), 2.0 * k * (depth - arc.p), -k)


class Knuckle(Body):
    """The ring of a torispherical bottom or roof between its crown and the shell.

    Parameters
    ----------
    arc : Arc
        Profile of the knuckle, from the rim of the shell outward.
    rim : float
        Elevation of the rim, m.
    upward : bool
        A roof's knuckle reaches up from the rim, a bottom's down.

    Notes
    -----
    A = pi (r0 + q sin psi)^2 with psi from cos psi = 1 - t / p, t the distance from the tip;
    V and M are differences of `tankcalc.geometry.meridian.swept`.
    """

    def __init__(self, arc: Arc, rim: float, *, upward: bool) -> None:
        reach = arc.tip - float(arc.from_tip(np.array(arc.start)))
        self.bottom, self.top = (rim, rim + reach) if upward else (rim - reach, rim)
        self.breaks = np.array([self.bottom, self.top])
        self._arc = arc
        self._rim = rim
        self._up = 1.0 if upward else -1.0
        self._low_volume, self._low_moment = arc.swept(self._psi(np.array(self.bottom)))

    def _psi(self, z: Array) -> Array:
        outward = self._up * (z - self._rim)
        psi = np.arccos(np.clip(outward / self._arc.p, 0.0, 1.0))
        return np.clip(psi, self._arc.start, self._arc.end)

    def area(self, z: Array) -> Array:
        """Return the horizontal area at each elevation, m2."""
        radius = self._arc.r0 + self._arc.q * np.sin(self._psi(z))
        area: Array = np.pi * radius * radius
        return area

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4.

        With t the distance from the tip, z = rim + up (tip - t).
        """
        volume, about_tip = self._arc.swept(self._psi(z))
        below = -self._up * (volume - self._low_volume)
        lever = about_tip - self._low_moment
        return below, (self._rim + self._up * self._arc.tip) * below + lever

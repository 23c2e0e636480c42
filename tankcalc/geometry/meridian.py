"""Profiles of heads: what turns round the axis to make an end, piece by piece.

A profile starts at the rim of the shell (x = 0) and runs outward along the axis. The same
profile serves a bottom, a roof and a horizontal head.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TypeAlias, assert_never

import numpy as np

from tankcalc.errors import GeometryError
from tankcalc.geometry.body import Array
from tankcalc.geometry.dimensions import at_least, at_most, length
from tankcalc.geometry.ends import (
    ConeEnd,
    DishedEnd,
    EllipsoidalEnd,
    End,
    FlatEnd,
    HemisphericalEnd,
    SlopeEnd,
    TorisphericalEnd,
)


@dataclass(frozen=True, slots=True)
class Line:
    """A straight piece: x from ``x0`` to ``x1``, radius from ``r0`` to ``r1``, m."""

    x0: float
    x1: float
    r0: float
    r1: float


@dataclass(frozen=True, slots=True)
class Arc:
    """A curved piece: x = tip - p (1 - cos psi), r = r0 + q sin psi.

    Attributes
    ----------
    tip : float
        Where the arc meets (or would meet) psi = 0, m.
    p, q : float
        Semi-axes along and square to the axis, m; equal for a circle.
    r0 : float
        Distance of the arc's centre from the axis, m; 0 but for a knuckle.
    start, end : float
        Range of psi, 0 at the pole, rising towards the rim, rad.

    Notes
    -----
    Measured from the pole, a cap that is nearly flat keeps all its digits, although the radius
    of its sphere is enormous.
    """

    tip: float
    p: float
    q: float
    r0: float
    start: float
    end: float

    def from_tip(self, psi: Array) -> Array:
        """Return the distance from the tip along the axis, m."""
        return 2.0 * self.p * np.sin(0.5 * psi) ** 2

    def swept(self, psi: Array) -> Array:
        """Return the space turned round the axis from the pole to ``psi``, (2, ...).

        Volume, m3, and its moment about the tip, m4.
        """
        ones = (1,) * np.ndim(psi)
        terms = sweep_terms(np.array(self.p), np.array(self.q), np.array(self.r0))
        return swept(psi, terms.reshape(6, 2, *ones))


def sweep_terms(p: Array, q: Array, r0: Array) -> Array:
    """Return the coefficients of `swept`, (6, 2, ...), for arcs as in `Arc`.

    Notes
    -----
    With v = 1 - cos psi and t = p v, the integrals of pi r^2 dt and of pi r^2 t dt are sums of
    v, v^2, v^3, v^4, the wedge (psi - sin psi cos psi) / 2 and sin^3 psi.
    """
    zero = np.zeros_like(p)
    square, mixed, centre = q * q, 2.0 * r0 * q, r0 * r0
    volume = np.array([centre, square, -square / 3.0, zero, mixed, zero])
    moment = np.array([zero, centre / 2.0, square / 1.5, -square / 4.0, mixed, -mixed / 3.0])
    return np.stack([np.pi * p * volume, np.pi * p * p * moment], axis=1)


def swept(psi: Array, terms: Array) -> Array:
    """Return what arcs sweep from the pole to ``psi``, by their `sweep_terms`.

    The sum keeps its digits also for a cap that is nearly flat: no term is small beside others
    that cancel.
    """
    half_sine = np.sin(0.5 * psi)
    v = 2.0 * half_sine * half_sine
    total: Array = v * (terms[0] + v * (terms[1] + v * (terms[2] + v * terms[3])))
    if terms[4].any():
        sine = 2.0 * half_sine * np.cos(0.5 * psi)
        wedge = 0.5 * (psi - sine * (1.0 - v))
        total += terms[4] * wedge + terms[5] * sine**3
    return total


Piece: TypeAlias = Line | Arc


def profile(end: End, radius: float, key: str) -> tuple[Piece, ...]:
    """Return the profile of an end that bulges out of the vessel, from the rim outward.

    Parameters
    ----------
    end : End
        Any but a sloped floor or a cone that points into the vessel.
    radius : float
        Inside radius of the shell, m.
    key : str
        What the tank file calls the end ("bottom", "left"); refusals begin with it.

    Returns
    -------
    tuple of Line or Arc
        Empty for a flat end.

    Raises
    ------
    GeometryError
        The end does not fit the shell, or cannot be one of this kind.
    """
    match end:
        case FlatEnd():
            return ()
        case ConeEnd():
            if end.points != "down":
                raise GeometryError(
                    f"{key}.points", 'a cone points "down"; only a bottom can point "up".'
                )
            return (Line(0.0, length(f"{key}.depth", end.depth_m), radius, 0.0),)
        case SlopeEnd():
            raise GeometryError(f"{key}.kind", "a sloped plane can only be a bottom.")
        case DishedEnd():
            return (_cap(_dish_depth(end, radius, key), radius),)
        case HemisphericalEnd():
            return (Arc(radius, radius, radius, 0.0, 0.0, 0.5 * math.pi),)
        case EllipsoidalEnd():
            depth = 0.5 * radius if end.depth_m is None else length(f"{key}.depth", end.depth_m)
            return (Arc(depth, depth, radius, 0.0, 0.0, 0.5 * math.pi),)
        case TorisphericalEnd():
            return _torispherical(end, radius, key)
    assert_never(end)


def depth_of(pieces: tuple[Piece, ...]) -> float:
    """Return how far a profile reaches out of the shell, m."""
    if not pieces:
        return 0.0
    outermost = pieces[-1]
    return outermost.x1 if isinstance(outermost, Line) else outermost.tip


def points_of(pieces: tuple[Piece, ...], radius: float) -> Array:
    """Return (x, r) along a profile from the rim to the pole, m, for drawing."""
    points = [np.array([[0.0, radius]])]
    for piece in pieces:
        if isinstance(piece, Line):
            points.append(np.array([[piece.x1, piece.r1]]))
        else:
            psi = np.linspace(piece.end, piece.start, 25)[1:]
            points.append(
                np.column_stack([piece.tip - piece.from_tip(psi), piece.r0 + piece.q * np.sin(psi)])
            )
    return np.concatenate(points)


def _dish_depth(end: DishedEnd, radius: float, key: str) -> float:
    match end.depth_m, end.radius_m:
        case float() | int() as depth, None:
            at_most(f"{key}.depth", length(f"{key}.depth", depth), radius, "the shell's radius")
            return float(depth)
        case None, float() | int() as dish:
            at_least(f"{key}.radius", length(f"{key}.radius", dish), radius, "the shell's radius")
            return radius**2 / (dish + math.sqrt((dish - radius) * (dish + radius)))
    raise GeometryError(key, 'a dished end takes one of "depth" and "radius".')


def _cap(depth: float, radius: float) -> Arc:
    sphere = 0.5 * (radius**2 / depth + depth)
    return Arc(depth, sphere, sphere, 0.0, 0.0, 2.0 * math.atan(depth / radius))


def _torispherical(end: TorisphericalEnd, radius: float, key: str) -> tuple[Piece, ...]:
    crown = length(f"{key}.crown_radius", end.crown_radius_m)
    knuckle = length(f"{key}.knuckle_radius", end.knuckle_radius_m)
    at_least(f"{key}.crown_radius", crown, radius, "the shell's radius")
    at_most(f"{key}.knuckle_radius", knuckle, radius, "the shell's radius")
    if knuckle >= crown:
        raise GeometryError(f"{key}.knuckle_radius", "must be less than the crown radius.")
    centre = radius - knuckle
    junction = math.asin(centre / (crown - knuckle))
    depth = knuckle + 2.0 * (crown - knuckle) * math.sin(0.5 * junction) ** 2
    pieces = (
        Arc(knuckle, knuckle, knuckle, centre, junction, 0.5 * math.pi),
        Arc(depth, crown, crown, 0.0, 0.0, junction),
    )
    return tuple(piece for piece in pieces if piece.end > piece.start)

"""Lying bodies of round section, level or tilted, cut by horizontal planes: quadrature.

The axis is x; the distance from it, upward and square to it, is y. A plane of elevation z cuts
the section at x along the chord y = alpha - beta x; the section is a circle of radius r(x). The
body is convex and made of straight pieces and arcs: on each the chord lies within the circle on
one interval at most, whose ends have closed forms. Outside it the section is dry, or full.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from tankcalc.geometry.body import Array, Body, merged_breaks
from tankcalc.geometry.meridian import Arc, Line
from tankcalc.geometry.pieces import Arcs, Lines, Pieces
from tankcalc.geometry.quadrature import gauss_legendre

NODES, WEIGHTS = gauss_legendre(40)

PLANES_AT_ONCE = 64
"""Planes cut in one pass, so that their nodes stay in the cache."""


class Lying(Body):
    """A convex body of round section about an axis that is level, or tilted.

    Parameters
    ----------
    radius : float
        Of the shell, m.
    sine : float
        Sine of the tilt, positive when larger x is higher.
    dip_at : float
        The x where the inside bottom of the shell has elevation 0, m.
    lines, arcs : sequence
        The pieces of the body; see `Lines` and `Arcs`.

    Notes
    -----
    With s and c the sine and cosine of the tilt, the point (x, y) has the elevation
    (x - dip_at) s + (y + R) c; the plane of elevation z cuts the section at x at the height
    y = (z - (x - dip_at) s) / c - R. With S the area of the circle's segment below y and
    Q = -2/3 (r^2 - y^2)^(3/2) its moment about the axis,

    V = integral of S dx,  A = integral of 2 sqrt(r^2 - y^2) dx / c,
    M = integral of ((x - dip_at) s + R c) S + c Q dx.
    """

    def __init__(
        self,
        radius: float,
        sine: float,
        dip_at: float,
        lines: Sequence[Line],
        arcs: Sequence[tuple[Arc, float, float]],
    ) -> None:
        self._radius, self._sine, self._dip_at = radius, sine, dip_at
        self._cosine = float(np.sqrt((1.0 - sine) * (1.0 + sine)))
        self._beta = sine / self._cosine
        self._groups: list[Pieces] = [Lines(lines, self._beta)]
        if arcs:
            self._groups.append(Arcs(arcs, self._beta))
        self.breaks = self._find_breaks()
        self.bottom, self.top = float(self.breaks[0]), float(self.breaks[-1])

    def area(self, z: Array) -> Array:
        """Return the horizontal area at each elevation, m2."""
        return np.asarray(self._cut(z)[0])

    def volume_and_moment(self, z: Array) -> tuple[Array, Array]:
        """Return the volume below each elevation, m3, and its moment about z = 0, m4."""
        _, volume, moment = self._cut(z)
        return volume, moment

    def area_and_volume(self, z: Array) -> tuple[Array, Array]:
        """Return the area at each elevation, m2, and the volume below it, m3."""
        area, volume, _ = self._cut(z)
        return area, volume

    def _find_breaks(self) -> Array:
        """Return the elevations where a joint's circle, or the body itself, starts and ends."""
        found = []
        for group in self._groups:
            for up in (-1.0, 1.0):
                extreme = group.highest(up * self._sine, self._cosine)
                x, r, _ = group.at(np.stack([group.first, group.last, extreme], axis=-1))
                along = (x - self._dip_at) * self._sine
                found.append((along + (up * r + self._radius) * self._cosine).ravel())
        return merged_breaks(found)

    def _cut(self, z: Array) -> Array:
        """Return area, volume and moment below each plane, (3, n)."""
        cuts = [
            self._cut_few(z[at : at + PLANES_AT_ONCE]) for at in range(0, len(z), PLANES_AT_ONCE)
        ]
        cut: Array = np.concatenate(cuts, axis=1)
        cut[:, z <= self.bottom] = 0.0
        return cut

    def _cut_few(self, z: Array) -> Array:
        alpha = z / self._cosine + (self._dip_at * self._beta - self._radius)
        integrals = np.zeros((4, len(z)))
        for group in self._groups:
            integrals += _cut_pieces(group, alpha, self._beta)
        chord, wet, along, lever = integrals
        axis = self._radius * self._cosine - self._dip_at * self._sine
        moment = axis * wet + self._sine * along + self._cosine * lever
        return np.array([chord / self._cosine, wet, moment])


def _cut_pieces(group: Pieces, alpha: Array, beta: float) -> Array:
    """Return the integrals of chord, S, x S and Q over pieces of one sort, (4, n)."""
    low, high = group.inside(alpha)
    integrals = _partly_wet(group, np.maximum(*low), np.minimum(*high), alpha, beta)
    integrals[1:3] += _full(group, low[1], high[1])
    return integrals


def _full(group: Pieces, cut_from: Array, cut_to: Array) -> Array:
    """Return the integrals of S and x S where sections are full: before and behind the cut."""
    before = np.minimum(np.maximum(cut_from, group.first), group.last)
    behind = np.minimum(np.maximum(cut_to, before), group.last)
    full: Array = (group.full - (group.filled(behind) - group.filled(before))).sum(axis=1)
    return full


def _partly_wet(group: Pieces, low: Array, high: Array, alpha: Array, beta: float) -> Array:
    """Return the integrals where planes cut circles: of chord, S, x S and Q, (4, n).

    The half chord ends like a square root where the cut ends. With t = middle + half sin(theta)
    between these ends the integrand is smooth in theta, also where a piece stops just short of
    them; an end further away than the group's near range does not matter.
    """
    first, last = group.first, group.last
    low, high = np.maximum(low, group.near_first), np.minimum(high, group.near_last)
    is_cut = np.minimum(high, last) > np.maximum(low, first)
    middle = np.where(is_cut, 0.5 * (low + high), first)
    half = np.where(is_cut, 0.5 * (high - low), 1.0)
    start = np.arcsin(np.maximum((first - middle) / half, -1.0))
    end = np.where(is_cut, np.arcsin(np.minimum((last - middle) / half, 1.0)), start)
    span = 0.5 * (end - start)
    theta = (start + span)[:, :, None] + span[:, :, None] * NODES
    x, r, pace = group.at(middle[:, :, None] + half[:, :, None] * np.sin(theta))
    y = alpha[:, None] - beta * x
    square = np.maximum((r - y) * (r + y), 0.0)
    half_chord = np.sqrt(square)
    segment = r * r * np.arctan2(half_chord, -y) + y * half_chord
    lengths = np.cos(theta) * pace
    chords, wet = lengths * half_chord, lengths * segment
    sums = np.array(
        [
            2.0 * (chords @ WEIGHTS),
            wet @ WEIGHTS,
            (wet * x) @ WEIGHTS,
            (-2.0 / 3.0) * ((chords * square) @ WEIGHTS),
        ]
    )
    integrals: Array = (sums * (span * half)).sum(axis=1)
    return integrals

"""Lying vessels against a quadrature of their own definition that shares no formula with them.

The vessel is cut by upright planes along its axis instead of across it: at the distance w from
the middle plane the section is the region |y| < sqrt(r(x)^2 - w^2), a plain function of x, and
the liquid in it is what lies below the surface. No segment of a circle is involved, no break
point, no closed form; only how r depends on x, written out anew.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import numpy.typing as npt
import pytest
from scipy.integrate import quad

from tankcalc.geometry import (
    ConeEnd,
    DishedEnd,
    EllipsoidalEnd,
    End,
    FlatEnd,
    HemisphericalEnd,
    TorisphericalEnd,
    horizontal_cylinder,
)

Array = npt.NDArray[np.float64]
Radius = Callable[[Array], Array]

R, LENGTH = 1.5, 4.0


def sphere_part(radius: float, centre: float) -> Radius:
    return lambda x: np.sqrt(np.maximum(radius**2 - (x - centre) ** 2, 0.0))


def torus_part(knuckle: float) -> Radius:
    return lambda x: R - knuckle + np.sqrt(np.maximum(knuckle**2 - x**2, 0.0))


def torispherical(crown: float, knuckle: float) -> tuple[float, Radius]:
    """Depth and radius: the knuckle up to where the crown touches it, then the crown."""
    depth = crown - math.sqrt((crown - knuckle) ** 2 - (R - knuckle) ** 2)
    junction = knuckle * math.sqrt(1.0 - ((R - knuckle) / (crown - knuckle)) ** 2)
    inner, outer = torus_part(knuckle), sphere_part(crown, depth - crown)
    return depth, lambda x: np.where(x <= junction, inner(x), outer(x))


HEADS: list[tuple[End, float, Radius]] = [
    (FlatEnd(), 0.0, lambda x: 0.0 * x),
    (ConeEnd(1.2), 1.2, lambda x: R * (1.0 - x / 1.2)),
    (DishedEnd(0.4), 0.4, sphere_part((R**2 + 0.16) / 0.8, 0.4 - (R**2 + 0.16) / 0.8)),
    (HemisphericalEnd(), R, sphere_part(R, 0.0)),
    (EllipsoidalEnd(), R / 2, lambda x: R * np.sqrt(np.maximum(1.0 - (2.0 * x / R) ** 2, 0.0))),
    (TorisphericalEnd(3.0, 0.3), *torispherical(3.0, 0.3)),
    (TorisphericalEnd(2.4, 0.462), *torispherical(2.4, 0.462)),
]


def midpoints(low: float, high: float, count: int) -> tuple[Array, Array]:
    """Points and widths of the midpoint rule after x = middle + half sin(u), dense at both ends."""
    u = math.pi * ((np.arange(count) + 0.5) / count - 0.5)
    half = 0.5 * (high - low)
    return 0.5 * (low + high) + half * np.sin(u), half * np.cos(u) * math.pi / count


def liquid(
    left: tuple[float, Radius], right: tuple[float, Radius], slope: float, dip: float, level: float
) -> tuple[float, float]:
    """Volume below a level, and its moment about the datum."""
    w, dw = midpoints(-R, R, 600)
    cosine = math.sqrt(1.0 - slope**2)
    spans: list[tuple[float, float, Radius]] = [
        (-left[0], 0.0, lambda x: left[1](-x)),
        (0.0, LENGTH, lambda x: R + 0.0 * x),
        (LENGTH, LENGTH + right[0], lambda x: right[1](x - LENGTH)),
    ]
    volume = moment = 0.0
    for low, high, radius in spans:
        if high == low:
            continue
        x, dx = midpoints(low, high, 900)
        half = np.sqrt(np.maximum(radius(x)[:, None] ** 2 - w**2, 0.0))
        # The surface, as a height above the axis; and the elevation of the axis.
        axis = (x - dip) * slope + R * cosine
        surface = (level - axis) / cosine
        top = np.clip(surface[:, None], -half, half)
        cells = dx[:, None] * dw
        volume += float((cells * (top + half)).sum())
        along = axis[:, None] * (top + half) + 0.5 * cosine * (top**2 - half**2)
        moment += float((cells * along).sum())
    return volume, moment


@pytest.mark.parametrize("slope", [0.0, 0.02, -0.15])
@pytest.mark.parametrize("number", range(len(HEADS)))
def test_each_head_on_either_end_tilted_or_level(number: int, slope: float) -> None:
    left, left_depth, left_radius = HEADS[number]
    right, right_depth, right_radius = HEADS[(number + 2) % len(HEADS)]
    tank = horizontal_cylinder(2 * R, LENGTH, left, right, slope, 1.0)
    of_left, of_right = (left_depth, left_radius), (right_depth, right_radius)
    for share in (0.07, 0.4, 0.8):
        level = tank.z_min + share * (tank.z_max - tank.z_min)
        volume, moment = liquid(of_left, of_right, slope, 1.0, level)
        assert tank.volume(level) == pytest.approx(volume, abs=8e-7 * tank.capacity)
        assert tank.moment(level) == pytest.approx(moment, abs=1e-6 * tank.capacity)


@pytest.mark.parametrize("slope", [0.0, 0.02, -0.15])
@pytest.mark.parametrize("number", range(1, len(HEADS)))
def test_the_area_by_adaptive_quadrature_of_the_chord(number: int, slope: float) -> None:
    """The chord of a level plane at each x, integrated along the plane by scipy."""
    head, depth, radius = HEADS[number]
    tank = horizontal_cylinder(2 * R, LENGTH, FlatEnd(), head, slope, LENGTH)
    level = 0.37 * tank.z_max

    def chord(x: float) -> float:
        height = (level - (x - LENGTH) * slope) / math.sqrt(1.0 - slope**2) - R
        r = R if x <= LENGTH else float(radius(np.array(x - LENGTH)))
        return 2.0 * math.sqrt(max(r**2 - height**2, 0.0))

    shell, _ = quad(chord, 0.0, LENGTH, epsabs=1e-12)
    in_head, _ = quad(chord, LENGTH, LENGTH + depth, epsabs=1e-9, limit=400)
    area = (shell + in_head) / math.sqrt(1.0 - slope**2)
    assert tank.area(level) == pytest.approx(area, abs=1e-8)

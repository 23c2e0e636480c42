"""Every kind of shape under three density profiles, against quadrature coded apart.

Nothing of the package computes the figures wanted here: areas are written out from the shapes'
textbook equations, and volume, mass and pressure are integrated by scipy.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import pytest
from scipy.integrate import quad
from tanks import around, single, stacked, transmitters, upright

from tankcalc import geometry as g
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.fluid import Fluid
from tankcalc.fluids.samples import Samples
from tankcalc.gauging import evaluate
from tankcalc.readings import Readings

GRAVITY, AIR = 9.8142, 1.2250
NODES, WEIGHTS = np.polynomial.legendre.leggauss(50)


@dataclass(frozen=True)
class Shape:
    """A vessel of ours beside its area written out, with the elevations where that has kinks."""

    vessel: Any
    area: Callable[[float], float]
    kinks: Sequence[float]


def dished_vertical() -> Shape:
    def area(z: float) -> float:
        radius2 = 9.0
        if z < 0.0:
            return math.pi * radius2 * (1.0 - (z / 1.5) ** 2)
        return math.pi * radius2 * (1.0 if z < 8.0 else (9.0 - z) ** 2)

    vessel = g.vertical_cylinder([(8.0, 6.0)], g.EllipsoidalEnd(), g.ConeEnd(1.0))
    return Shape(vessel, area, (-1.5, 0.0, 8.0, 9.0))


def tilted_horizontal() -> Shape:
    radius, length, slope, dip = 1.5, 7.0, 0.03, 2.0
    cosine = math.sqrt(1.0 - slope**2)

    def half_width2(u: Any, z: float) -> Any:
        """Square of the half width at u along the ground, z above the datum."""
        rise = z - radius * cosine
        x = dip + u * cosine + rise * slope
        y = rise * cosine - u * slope
        beyond = np.maximum(np.maximum(-x, x - length), 0.0)
        return radius**2 - beyond**2 - y**2

    def area(z: float) -> float:
        u = np.linspace(-12.0, 12.0, 4001)
        inside = u[half_width2(u, z) > 0.0]
        if not len(inside):
            return 0.0
        step = u[1] - u[0]
        ends = [
            _bisect(lambda v: half_width2(v, z), inside[0] - step, inside[0]),
            _bisect(lambda v: half_width2(v, z), inside[-1] + step, inside[-1]),
        ]
        joints = [(x - dip - (z - radius * cosine) * slope) / cosine for x in (0.0, length)]
        stops = sorted([ends[0], ends[1], *(j for j in joints if ends[0] < j < ends[1])])
        total = 0.0
        for low, high in itertools.pairwise(stops):
            # u = middle - half cos(t) smooths the square roots at both ends.
            t = 0.5 * math.pi * (NODES + 1.0)
            v = 0.5 * (low + high) - 0.5 * (high - low) * np.cos(t)
            jacobian = 0.25 * math.pi * (high - low) * np.sin(t)
            widths = 2.0 * np.sqrt(np.maximum(half_width2(v, z), 0.0))
            total += float(np.sum(WEIGHTS * jacobian * widths))
        return total

    end = g.HemisphericalEnd()
    vessel = g.horizontal_cylinder(2 * radius, length, end, end, slope=slope, dip_at_m=dip)
    low = radius * cosine - dip * slope - radius
    high = radius * cosine + (length - dip) * slope + radius
    rims = [
        radius * cosine + (x - dip) * slope + side * radius * cosine
        for x in (0.0, length)
        for side in (-1.0, 1.0)
    ]
    return Shape(vessel, area, sorted((low, high, *rims)))


def _bisect(function: Callable[[float], float], outside: float, inside: float) -> float:
    for _ in range(60):
        middle = 0.5 * (outside + inside)
        outside, inside = (middle, inside) if function(middle) <= 0.0 else (outside, middle)
    return inside


def ball() -> Shape:
    return Shape(g.sphere(12.0), lambda z: math.pi * z * (12.0 - z), (0.0, 12.0))


def egg() -> Shape:
    def area(z: float) -> float:
        return math.pi * 36.0 * (1.0 - ((z - 5.0) / 5.0) ** 2)

    return Shape(g.spheroid(12.0, 10.0), area, (0.0, 10.0))


def basin() -> Shape:
    vessel = g.box(10.0, 4.0, 6.0, 0.5)
    return Shape(vessel, lambda z: 40.0 * min(z / 0.5, 1.0), (0.0, 0.5, 6.0))


def lying_oval() -> Shape:
    def area(z: float) -> float:
        return 6.0 * 2.4 * math.sqrt(max(1.0 - ((z - 0.8) / 0.8) ** 2, 0.0))

    return Shape(g.oval("ellipse", 2.4, 1.6, 6.0), area, (0.0, 1.6))


def hopper() -> Shape:
    def area(z: float) -> float:
        diameter = 0.3 + (3.0 - 0.3) * z / 2.0 if z < 2.0 else 3.0
        return 0.25 * math.pi * diameter**2

    return Shape(g.stack([(2.0, 0.3, 3.0), (4.0, 3.0, 3.0)]), area, (0.0, 2.0, 6.0))


def table() -> Shape:
    levels, volumes = [0.0, 1.0, 2.0, 4.0, 7.0], [0.0, 31.0, 62.5, 124.9, 219.3]

    def area(z: float) -> float:
        k = min(max(int(np.searchsorted(levels, z, side="right")) - 1, 0), 3)
        return (volumes[k + 1] - volumes[k]) / (levels[k + 1] - levels[k])

    return Shape(g.strapped(levels, volumes), area, levels)


SHAPES = {
    "vertical cylinder": dished_vertical,
    "horizontal cylinder": tilted_horizontal,
    "sphere": ball,
    "spheroid": egg,
    "box": basin,
    "oval": lying_oval,
    "stack": hopper,
    "strapped": table,
}


@dataclass(frozen=True)
class Profile:
    """A fluid of ours beside its density written out."""

    fluid: Fluid
    density: Callable[[float], float]
    kinks: Sequence[float]


def sampled(z: float) -> float:
    return float(np.interp(z, [0.4, 0.9, 1.4], [872.0, 861.0, 858.5]))


PROFILES = {
    "expansion": Profile(
        single(Expansion(845.0, 288.15, 8.3e-4)), lambda _: 845.0 / (1.0 + 8.3e-4 * 12.5), ()
    ),
    "samples": Profile(
        single(Samples((0.4, 0.9, 1.4), (872.0, 861.0, 858.5))), sampled, (0.4, 0.9, 1.4)
    ),
    "layers": Profile(
        stacked((1010.0, 0.3), (880.0, 0.8), (840.0, None)),
        lambda z: 1010.0 if z < 0.3 else 880.0 if z < 0.8 else 840.0,
        (0.3, 0.8),
    ),
}


def integral(function: Callable[[float], float], low: float, high: float, kinks: Any) -> float:
    stops = [low, *sorted(k for k in set(kinks) if low < k < high), high]
    total = 0.0
    for a, b in itertools.pairwise(stops):
        t = 0.5 * math.pi * (NODES + 1.0)
        z = 0.5 * (a + b) - 0.5 * (b - a) * np.cos(t)
        jacobian = 0.25 * math.pi * (b - a) * np.sin(t)
        total += float(np.sum(WEIGHTS * jacobian * [function(v) for v in z]))
    return total


@pytest.mark.parametrize("profile", PROFILES.values(), ids=PROFILES)
@pytest.mark.parametrize("make", SHAPES.values(), ids=SHAPES)
def test_level_volume_mass_and_pressure_against_quadrature(
    make: Callable[[], Shape], profile: Profile
) -> None:
    shape = make()
    bottom, top = shape.kinks[0], shape.kinks[-1]
    tap = bottom + 0.02 * (top - bottom)
    tank = upright(
        vessel=shape.vessel,
        transmitters=transmitters(p1=tap, p3=top),
        surroundings=around(gravity_m_s2=GRAVITY, air_density_kg_m3=AIR),
    )
    warm = {"temperatures": ((None, 288.15 + 12.5),)}
    for share in (0.08, 0.5, 0.97):
        level = bottom + share * (top - bottom)
        kinks = (*shape.kinks, *profile.kinks)
        volume = integral(shape.area, bottom, level, kinks)
        mass = integral(lambda z: shape.area(z) * profile.density(z), bottom, level, kinks)
        head, _ = quad(profile.density, tap, level, points=sorted(profile.kinks) or None,
                       epsabs=0.0, epsrel=1e-12, limit=200)  # fmt: skip
        # Gas above the liquid is outside air here: only the liquid displaces it.
        p1 = 700.0 + GRAVITY * (head - AIR * (level - tap))
        found = evaluate(tank, profile.fluid, Readings(p1_pa=p1, p3_pa=700.0, **warm))
        assert found.level_m == pytest.approx(level, abs=2e-6)
        assert found.volume_m3 == pytest.approx(volume, rel=3e-6)
        assert found.mass_kg == pytest.approx(mass, rel=3e-6)
        for given in ({"level_m": level}, {"volume_m3": volume}, {"mass_kg": mass}):
            back = evaluate(tank, profile.fluid, Readings(p3_pa=700.0, **given, **warm))
            assert back.p1_pa == pytest.approx(p1, rel=2e-6)

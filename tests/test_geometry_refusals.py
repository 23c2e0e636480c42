"""Dimensions that make no vessel, and elevations and volumes that are not in it."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from tankcalc.errors import GeometryError, RangeError
from tankcalc.geometry import (
    ConeEnd,
    DishedEnd,
    EllipsoidalEnd,
    End,
    FlatEnd,
    SlopeEnd,
    TorisphericalEnd,
    Vessel,
    box,
    horizontal_cylinder,
    moved_datum,
    oval,
    sphere,
    spheroid,
    stack,
    strapped,
    torispherical_standard,
    vertical_cylinder,
    with_deadwood,
)

FLAT = FlatEnd()


def on(bottom: End = FLAT, roof: End = FLAT) -> Vessel:
    return vertical_cylinder([(5.0, 4.0)], bottom, roof)


def between(left: End = FLAT, right: End = FLAT, **tilt: float) -> Vessel:
    return horizontal_cylinder(2.0, 5.0, left, right, **tilt)


REFUSED: list[tuple[str, str, Callable[[], object]]] = [
    ("courses", "at least one course", lambda: vertical_cylinder([], FLAT, FLAT)),
    ("height", "above zero", lambda: vertical_cylinder([(0.0, 4.0)], FLAT, FLAT)),
    ("diameter", "finite", lambda: vertical_cylinder([(5.0, math.nan)], FLAT, FLAT)),
    (
        "courses.2.height",
        "above zero; it is -1 m",
        lambda: vertical_cylinder([(5.0, 4.0), (-1.0, 4.0)], FLAT, FLAT),
    ),
    (
        "courses.1.diameter",
        "no dimension of a vessel",
        lambda: vertical_cylinder([(5.0, 4e9), (1.0, 4.0)], FLAT, FLAT),
    ),
    ("bottom.depth", "above zero", lambda: on(ConeEnd(0.0))),
    ("bottom.depth", "more than the height of the shell", lambda: on(ConeEnd(5.1, "up"))),
    (
        "bottom.depth",
        "wider than course 2",
        lambda: vertical_cylinder([(1.0, 4.0), (3.0, 2.0)], ConeEnd(3.0, "up"), FLAT),
    ),
    ("bottom.fall", "above zero", lambda: on(SlopeEnd(-0.1))),
    ("bottom.depth", "more than the shell's radius, 2 m", lambda: on(DishedEnd(2.1))),
    ("bottom.radius", "less than the shell's radius, 2 m", lambda: on(DishedEnd(radius_m=1.9))),
    ("bottom", 'one of "depth" and "radius"', lambda: on(DishedEnd())),
    ("bottom", 'one of "depth" and "radius"', lambda: on(DishedEnd(0.5, 4.25))),
    ("bottom.depth", "no dimension", lambda: on(EllipsoidalEnd(1e-9))),
    ("bottom.crown_radius", "less than the shell's radius", lambda: on(TorisphericalEnd(1.9, 0.2))),
    ("bottom.knuckle_radius", "above zero", lambda: on(TorisphericalEnd(4.0, 0.0))),
    (
        "bottom.knuckle_radius",
        "more than the shell's radius",
        lambda: on(TorisphericalEnd(4.0, 2.1)),
    ),
    (
        "bottom.knuckle_radius",
        "less than the crown radius",
        lambda: on(TorisphericalEnd(2.0, 2.0)),
    ),
    ("roof.kind", "can only be a bottom", lambda: on(roof=SlopeEnd(0.1))),
    ("roof.points", "only a bottom", lambda: on(roof=ConeEnd(1.0, "up"))),
    ("left.kind", "can only be a bottom", lambda: between(left=SlopeEnd(0.1))),
    ("right.points", "only a bottom", lambda: between(right=ConeEnd(1.0, "up"))),
    ("right.depth", "above zero", lambda: between(right=ConeEnd(-1.0))),
    ("left.depth", "more than the shell's radius", lambda: between(left=DishedEnd(1.1))),
    ("slope", "between -1 and 1", lambda: between(slope=1.0)),
    ("slope", "between -1 and 1", lambda: between(slope=math.nan)),
    ("dip_at", "on the straight shell, 0 m to 5 m", lambda: between(dip_at_m=5.1)),
    ("dip_at", "on the straight shell", lambda: between(dip_at_m=math.nan)),
    ("length", "above zero", lambda: horizontal_cylinder(2.0, -5.0, FLAT, FLAT)),
    ("diameter", "above zero", lambda: sphere(0.0)),
    ("height", "finite", lambda: spheroid(2.0, math.inf)),
    ("width", "above zero", lambda: box(1.0, -1.0, 1.0)),
    ("floor_fall", "more than the height, 1 m", lambda: box(1.0, 1.0, 1.0, 1.5)),
    ("floor_fall", "above zero", lambda: box(1.0, 1.0, 1.0, -0.1)),
    ("section", '"ellipse" or "obround"', lambda: oval("square", 1.0, 1.0, 1.0)),  # type: ignore[arg-type]
    ("width", "above zero", lambda: oval("ellipse", 0.0, 1.0, 1.0)),
    ("sections", "at least one section", lambda: stack([])),
    ("sections.1.top_diameter", "only one end", lambda: stack([(1.0, 0.0, 0.0)])),
    ("sections.2.height", "above zero", lambda: stack([(1.0, 1.0, 2.0), (0.0, 2.0, 2.0)])),
    ("sections.1.bottom_diameter", "above zero", lambda: stack([(1.0, -1.0, 2.0)])),
    ("table", "at least two lines", lambda: strapped([0.0], [0.0])),
    ("table", "2 levels but 3 volumes", lambda: strapped([0.0, 1.0], [0.0, 1.0, 2.0])),
    (
        "table.3",
        "level does not rise: 1 m, then 1 m",
        lambda: strapped([0.0, 1.0, 1.0], [0.0, 1.0, 2.0]),
    ),
    (
        "table.3",
        "volume does not rise: 9 m3, then 8 m3",
        lambda: strapped([0.0, 1.0, 2.0], [0.0, 9.0, 8.0]),
    ),
    ("table.1", "no volume of a vessel", lambda: strapped([0.0, 1.0], [-1.0, 1.0])),
    ("table.2", "no volume of a vessel", lambda: strapped([0.0, 1.0], [0.0, math.inf])),
    ("table.2", "finite elevation", lambda: strapped([0.0, math.nan], [0.0, 1.0])),
    (
        "deadwood.1.bottom",
        "outside the vessel, 0 m to 2 m",
        lambda: with_deadwood(sphere(2.0), [(-0.1, 1.0, 0.1)]),
    ),
    (
        "deadwood.2.top",
        "outside the vessel",
        lambda: with_deadwood(sphere(2.0), [(0.5, 1.0, 0.1), (0.5, 2.1, 0.1)]),
    ),
    ("deadwood.1.top", "above the bottom", lambda: with_deadwood(sphere(2.0), [(1.0, 1.0, 0.1)])),
    ("deadwood.1.volume", "finite", lambda: with_deadwood(sphere(2.0), [(0.5, 1.0, math.nan)])),
    (
        "deadwood.1.volume",
        "more space than there is",
        lambda: with_deadwood(sphere(2.0), [(0.5, 1.0, 3.0)]),
    ),
    (
        "deadwood.1.volume",
        "more space than there is at 0.000 m",
        lambda: with_deadwood(sphere(2.0), [(0.0, 1.0, 0.1)]),
    ),
    ("datum", "finite elevation", lambda: moved_datum(sphere(2.0), math.inf)),
    ("datum", "away from the datum", lambda: moved_datum(sphere(2.0), 1e7)),
    ("standard", '"DIN 28011"', lambda: torispherical_standard("DIN 28012", 1.0)),
]


@pytest.mark.parametrize(("key", "why", "build"), REFUSED, ids=[f"{k}: {w}" for k, w, _ in REFUSED])
def test_impossible_dimensions_are_refused_by_the_key_at_fault(
    key: str, why: str, build: Callable[[], object]
) -> None:
    with pytest.raises(GeometryError) as refusal:
        build()
    assert refusal.value.key == key
    assert why in refusal.value.why


VESSELS = [sphere(2.0), between(ConeEnd(0.5), slope=0.02), strapped([0.2, 2.0], [0.1, 5.0])]


@pytest.mark.parametrize("tank", VESSELS, ids=repr)
def test_an_elevation_outside_is_refused_never_clamped(tank: Vessel) -> None:
    for ask in (tank.area, tank.volume, tank.moment):
        with pytest.raises(RangeError, match="below the vessel"):
            ask(tank.z_min - 1e-6)
        with pytest.raises(RangeError, match="above the vessel"):
            ask(np.array([tank.z_min, tank.z_max + 1e-6]))
        with pytest.raises(RangeError, match="not a number"):
            ask(np.array([1.0, math.nan]))
        with pytest.raises(RangeError, match="above the vessel"):
            ask(math.inf)


@pytest.mark.parametrize("tank", VESSELS, ids=repr)
def test_a_volume_the_vessel_cannot_hold_is_refused(tank: Vessel) -> None:
    with pytest.raises(RangeError, match="above what the vessel can hold"):
        tank.level(tank.capacity * (1 + 1e-9))
    with pytest.raises(RangeError, match="below what the vessel can hold"):
        tank.level(np.array([1.0, -1e-6]))
    with pytest.raises(RangeError, match="not a number"):
        tank.level(math.nan)


def test_a_table_does_not_reach_below_its_first_line() -> None:
    with pytest.raises(RangeError, match=r"A volume of 0.05 m3 is below .* \(0.1 m3 to 5 m3\)"):
        strapped([0.2, 2.0], [0.1, 5.0]).level(0.05)

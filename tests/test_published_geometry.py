"""Published volumes and depths of vessels and heads; source and tolerance are in the data."""

from __future__ import annotations

import math
from typing import Any

import pytest
from published import Published, published

from tankcalc.geometry import (
    ConeEnd,
    DishedEnd,
    EllipsoidalEnd,
    End,
    FlatEnd,
    HemisphericalEnd,
    SlopeEnd,
    TorisphericalEnd,
    Vessel,
    horizontal_cylinder,
    oval,
    sphere,
    stack,
    torispherical_standard,
    vertical_cylinder,
)

ROWS = published("geometry.csv")
INCH_M = 0.0254
US_GALLON_M3 = 231 * INCH_M**3


def rows(**wanted: str) -> list[Published]:
    """The rows of which an input begins as wanted."""
    return [
        row
        for row in ROWS
        if all(str(row.inputs.get(key, "")).startswith(text) for key, text in wanted.items())
    ]


def end(kind: str, inputs: dict[str, Any], diameter_m: float) -> End:
    """The end a row describes, by the first word of its name there."""
    depth = abs(inputs.get("a_in", 0.0)) * INCH_M
    match kind.split():
        case ["conical", *concave]:
            return ConeEnd(depth, points="up" if concave else "down")
        case ["ellipsoidal"]:
            return EllipsoidalEnd(depth)
        case ["spherical"]:
            return DishedEnd(depth_m=depth)
        case ["torispherical"]:
            return TorisphericalEnd(inputs["f"] * diameter_m, inputs["k"] * diameter_m)
    raise AssertionError(f"no such end: {kind}")


@pytest.mark.parametrize("row", rows(orientation="horizontal"), ids=str)
def test_a_horizontal_vessel_with_two_heads(row: Published) -> None:
    diameter, length = row.inputs["D_in"] * INCH_M, row.inputs["L_in"] * INCH_M
    head = end(row.inputs["heads"], row.inputs, diameter)
    tank = horizontal_cylinder(diameter, length, head, head)
    row.agrees(tank.volume(row.inputs["h_in"] * INCH_M) / US_GALLON_M3)


@pytest.mark.parametrize("row", rows(orientation="vertical"), ids=str)
def test_a_vertical_vessel_with_a_shaped_bottom(row: Published) -> None:
    diameter = row.inputs["D_in"] * INCH_M
    bottom = end(row.inputs["bottom"], row.inputs, diameter)
    tank = vertical_cylinder([(100 * INCH_M, diameter)], bottom, FlatEnd())
    row.agrees(tank.volume(tank.z_min + row.inputs["h_in"] * INCH_M) / US_GALLON_M3)


def headed(name: str) -> Vessel:
    """A vertical vessel of one metre's diameter on the head that a row names."""
    heads: dict[str, End] = {
        "ASME F&D": torispherical_standard("ASME F&D", 1.0),
        "2:1 ellipsoidal": EllipsoidalEnd(),
        "hemispherical": HemisphericalEnd(),
        "DIN 28011": torispherical_standard("DIN 28011", 1.0),
        "DIN 28013": torispherical_standard("DIN 28013", 1.0),
    }
    [head] = [head for known, head in heads.items() if name.startswith(known)]
    return vertical_cylinder([(1.0, 1.0)], head, FlatEnd())


@pytest.mark.parametrize("row", [row for row in ROWS if "head" in row.inputs], ids=str)
def test_depth_or_volume_of_a_head(row: Published) -> None:
    tank = headed(row.inputs["head"])
    row.agrees(-tank.z_min if "depth" in row.quantity else tank.volume(0.0))


@pytest.mark.parametrize("row", rows(shape="horizontal cylinder, flat ends"), ids=str)
def test_share_of_a_horizontal_cylinder(row: Published) -> None:
    tank = horizontal_cylinder(1.0, 1.0, FlatEnd(), FlatEnd())
    row.agrees(tank.volume(row.inputs["h_over_D"]) / tank.capacity)


@pytest.mark.parametrize("row", rows(shape="ellipsoidal or hemispherical head"), ids=str)
@pytest.mark.parametrize("head", [EllipsoidalEnd(), HemisphericalEnd()])
def test_share_of_a_head_on_a_horizontal_cylinder(row: Published, head: End) -> None:
    level = row.inputs["h_over_D"]
    whole = horizontal_cylinder(1.0, 1.0, head, head)
    shell = horizontal_cylinder(1.0, 1.0, FlatEnd(), FlatEnd())
    heads = whole.volume(level) - shell.volume(level)
    row.agrees(heads / (whole.capacity - shell.capacity))
    row.agrees(sphere(1.0).volume(level) / sphere(1.0).capacity)


@pytest.mark.parametrize("row", rows(shape="sphere"), ids=str)
def test_a_sphere(row: Published) -> None:
    row.agrees(sphere(row.inputs["D_m"]).volume(row.inputs["h_m"]))


@pytest.mark.parametrize("row", rows(shape="horizontal elliptical cylinder"), ids=str)
def test_an_oval_of_elliptical_section(row: Published) -> None:
    of = row.inputs
    row.agrees(oval("ellipse", of["width_m"], of["height_m"], of["L_m"]).volume(of["h_m"]))


@pytest.mark.parametrize("row", rows(shape="stadium"), ids=str)
def test_an_obround_that_lies_flat(row: Published) -> None:
    of = row.inputs
    width = of["flat_width_m"] + of["total_height_m"]
    row.agrees(oval("obround", width, of["total_height_m"], of["L_m"]).volume(of["h_m"]))


@pytest.mark.parametrize("row", rows(shape="conical frustum hopper"), ids=str)
def test_a_hopper(row: Published) -> None:
    of = row.inputs
    row.agrees(stack([(of["H_m"], of["D_bottom_m"], of["D_top_m"])]).volume(of["h_m"]))


@pytest.mark.parametrize("row", rows(shape="cylinder with tilted free surface"), ids=str)
def test_a_wedge_of_a_cylinder_over_half_its_base(row: Published) -> None:
    """A floor sloped by twice the wedge's height, half of it wet, holds the same wedge."""
    of = row.inputs
    tank = vertical_cylinder([(1.0, 2 * of["R_m"])], SlopeEnd(2 * of["H_m"]), FlatEnd())
    row.agrees(tank.volume(-of["H_m"]))


def test_every_row_is_used() -> None:
    """A row that no test above picks would be a check that nobody makes."""
    used = [
        *rows(orientation="horizontal"),
        *rows(orientation="vertical"),
        *[row for row in ROWS if "head" in row.inputs],
        *[row for row in ROWS if "shape" in row.inputs],
    ]
    assert sorted(row.id for row in used) == sorted(row.id for row in ROWS)
    assert all(math.isfinite(float(row.value)) for row in ROWS)

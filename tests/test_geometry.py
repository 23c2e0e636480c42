"""Shapes and ends against independent quadrature, and what each of them means."""

from __future__ import annotations

import math
import subprocess
import sys
from collections.abc import Callable

import numpy as np
import pytest

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


def upright(diameter: float, bottom: End, height: float = 20.0) -> Vessel:
    return vertical_cylinder([(height, diameter)], bottom, FLAT)


def lying(*heads: End) -> Vessel:
    """A level cylinder of 3 m by 6 m with one or two heads."""
    left, right = heads if len(heads) == 2 else (heads[0], FLAT)
    return horizontal_cylinder(3.0, 6.0, left, right)


def head_only(head: End, level: float) -> float:
    return lying(head).volume(level) - lying(FLAT).volume(level)


KLOEPPER = torispherical_standard("DIN 28011", 3.0)

# Check values by independent quadrature (each integrated from the shape's definition, not from
# the closed form in use here); the level counts from the lowest inside point unless it says so.
CHECK_VALUES: list[tuple[str, Callable[[], float], float]] = [
    ("flat", lambda: upright(20.0, FLAT).volume(12.0), 3769.9112),
    ("cone down, in the cone", lambda: upright(10.0, ConeEnd(2.0)).volume(-1.0), 6.544985),
    ("cone down, above it", lambda: upright(10.0, ConeEnd(2.0)).volume(3.0), 287.979327),
    ("cone up, in the cone", lambda: upright(20.0, ConeEnd(0.5, "up")).volume(0.25), 32.724923),
    ("cone up, above it", lambda: upright(20.0, ConeEnd(0.5, "up")).volume(5.0), 1518.436449),
    ("dish, in the dish", lambda: upright(4.0, DishedEnd(0.5)).volume(-0.2), 1.173385),
    ("dish, above it", lambda: upright(4.0, DishedEnd(0.5)).volume(1.5), 22.056598),
    ("slope, half wet", lambda: upright(20.0, SlopeEnd(0.4)).volume(-0.2), 13.333333),
    ("slope, all wet", lambda: upright(20.0, SlopeEnd(0.4)).volume(0.0), 62.831853),
    ("slope, above it", lambda: upright(20.0, SlopeEnd(0.4)).volume(4.6), 1507.964474),
    ("frustum", lambda: stack([(3.0, 0.6, 4.0)]).volume(1.5), 2.760675),
    ("lying, 0.3 m", lambda: lying(FLAT).volume(0.3), 2.207265),
    ("lying, 1.0 m", lambda: lying(FLAT).volume(1.0), 12.375311),
    ("lying, 1.5 m", lambda: lying(FLAT).volume(1.5), 21.205750),
    ("lying, 2.7 m", lambda: lying(FLAT).volume(2.7), 40.204236),
    ("lying, full", lambda: lying(FLAT).volume(3.0), 42.411501),
    ("two 2:1 heads, 1.0 m", lambda: 2 * head_only(EllipsoidalEnd(), 1.0), 1.832596),
    ("two 2:1 heads, 1.5 m", lambda: 2 * head_only(EllipsoidalEnd(), 1.5), 3.534292),
    ("two 2:1 heads, full", lambda: 2 * head_only(EllipsoidalEnd(), 3.0), 7.068583),
    ("hemispherical pair, 1.0 m", lambda: 2 * head_only(HemisphericalEnd(), 1.0), 3.665191),
    ("cone head, 1.0 m", lambda: head_only(ConeEnd(1.0), 1.0), 0.500780),
    ("cone head, full", lambda: head_only(ConeEnd(1.0), 3.0), 2.356194),
    ("cap head, 1.0 m", lambda: head_only(DishedEnd(0.4), 1.0), 0.339392),
    ("cap head, full", lambda: head_only(DishedEnd(0.4), 3.0), 1.447227),
    ("torispherical head, 1.0 m", lambda: head_only(KLOEPPER, 1.0), 0.691486),
    ("torispherical head, 1.5 m", lambda: head_only(KLOEPPER, 1.5), 1.336041),
    ("torispherical head, full", lambda: head_only(KLOEPPER, 3.0), 2.672082),
    ("sphere, part", lambda: sphere(10.0).volume(6.0), 339.292007),
    ("sphere, full", lambda: sphere(10.0).capacity, 523.598776),
    ("spheroid, part", lambda: spheroid(12.0, 10.0).volume(6.0), 488.580489),
    ("spheroid, full", lambda: spheroid(12.0, 10.0).capacity, 753.982237),
    ("ellipse, part", lambda: oval("ellipse", 2.0, 1.4, 3.0).volume(0.5), 2.115205),
    ("ellipse, full", lambda: oval("ellipse", 2.0, 1.4, 3.0).capacity, 6.597345),
    ("obround lying, part", lambda: oval("obround", 2.0, 1.2, 2.0).volume(0.5), 1.692089),
    ("obround lying, full", lambda: oval("obround", 2.0, 1.2, 2.0).capacity, 4.181947),
    ("obround standing, 0.5 m", lambda: oval("obround", 1.2, 2.0, 2.0).volume(0.5), 0.892089),
    ("obround standing, 1.0 m", lambda: oval("obround", 1.2, 2.0, 2.0).volume(1.0), 2.090973),
    ("ASME F&D head", lambda: standing_head("ASME F&D").volume(0.0), 0.080999),
    ("DIN 28011 head", lambda: standing_head("DIN 28011").volume(0.0), 0.098966),
    ("DIN 28013 head", lambda: standing_head("DIN 28013").volume(0.0), 0.130772),
    ("ASME F&D depth", lambda: -standing_head("ASME F&D").z_min, 0.169338),
    ("DIN 28011 depth", lambda: -standing_head("DIN 28011").z_min, 0.193774),
    ("DIN 28013 depth", lambda: -standing_head("DIN 28013").z_min, 0.254473),
]


def standing_head(standard: str) -> Vessel:
    return upright(1.0, torispherical_standard(standard, 1.0), height=1.0)


@pytest.mark.parametrize(
    ("found", "wanted"), [row[1:] for row in CHECK_VALUES], ids=[row[0] for row in CHECK_VALUES]
)
def test_check_values_by_independent_quadrature(found: Callable[[], float], wanted: float) -> None:
    half_a_digit = 0.5e-4 if wanted > 1000.0 and round(wanted, 4) == wanted else 0.5e-6
    assert found() == pytest.approx(wanted, abs=half_a_digit * 1.0001)


@pytest.mark.parametrize(
    ("dip_at", "wanted"), [(3.0, 12.377858), (0.0, 11.367961), (6.0, 13.403052)]
)
def test_a_tilted_cylinder_by_independent_quadrature(dip_at: float, wanted: float) -> None:
    """The check values take the tilt by its tangent, 0.02, and the dip, 1 m, square to the axis."""
    angle = math.atan(0.02)
    # With the dip at the left end the liquid deepens to the left: the right end is higher.
    tank = horizontal_cylinder(3.0, 6.0, FLAT, FLAT, math.sin(angle), dip_at)
    assert tank.volume(math.cos(angle)) == pytest.approx(wanted, abs=0.5e-6)


def test_the_datum_is_where_each_shape_says() -> None:
    assert upright(10.0, ConeEnd(2.0)).z_min == -2.0
    assert upright(10.0, ConeEnd(2.0, "up")).z_min == 0.0
    assert upright(10.0, SlopeEnd(0.3)).z_min == -0.3
    assert upright(10.0, HemisphericalEnd()).z_min == -5.0
    assert lying(KLOEPPER, KLOEPPER).z_min == 0.0
    assert sphere(2.0).z_min == spheroid(2.0, 1.0).z_min == box(1.0, 1.0, 1.0).z_min == 0.0
    assert oval("obround", 1.0, 2.0, 3.0).z_min == stack([(1.0, 1.0, 2.0)]).z_min == 0.0


def test_a_tilted_vessel_reaches_from_its_lowest_to_its_highest_inside_point() -> None:
    slope, cosine = 0.03, math.sqrt(1 - 0.03**2)
    flat = horizontal_cylinder(3.0, 8.0, FLAT, FLAT, slope, 2.0)
    assert flat.z_min == pytest.approx(-2.0 * slope, abs=1e-14)
    assert flat.z_max == pytest.approx(6.0 * slope + 3.0 * cosine, abs=1e-14)
    round_ended = horizontal_cylinder(3.0, 8.0, HemisphericalEnd(), HemisphericalEnd(), slope, 2.0)
    # The lowest point of a hemisphere is its radius below its centre, however it is turned.
    assert round_ended.z_min == pytest.approx(-2.0 * slope + 1.5 * cosine - 1.5, abs=1e-14)
    assert round_ended.z_max == pytest.approx(6.0 * slope + 1.5 * cosine + 1.5, abs=1e-14)


def test_an_end_fits_the_course_it_sits_on() -> None:
    shell = [(2.0, 6.0), (2.0, 4.0)]
    tank = vertical_cylinder(shell, HemisphericalEnd(), HemisphericalEnd())
    assert (tank.z_min, tank.z_max) == (-3.0, 6.0)
    shells = math.pi * (9.0 * 2.0 + 4.0 * 2.0)
    assert tank.capacity == pytest.approx(shells + 2 / 3 * math.pi * (27.0 + 8.0), rel=1e-14)


def test_the_roof_counts_for_the_capacity() -> None:
    coned = vertical_cylinder([(5.0, 6.0)], FLAT, ConeEnd(1.0))
    assert coned.capacity == pytest.approx(math.pi * 9.0 * (5.0 + 1.0 / 3.0), rel=1e-14)
    assert coned.z_max == 6.0


def test_a_cone_that_points_up_past_the_first_course_takes_its_space_from_both() -> None:
    courses = [(2.0, 20.0), (2.0, 19.98), (6.0, 19.96)]
    with_cone = vertical_cylinder(courses, ConeEnd(5.0, "up"), FLAT)
    without = vertical_cylinder(courses, FLAT, FLAT)
    for z in (0.5, 2.0, 3.0, 4.0, 5.0, 9.0):
        dry = 1.0 - min(z, 5.0) / 5.0
        cone = math.pi * 100.0 * 5.0 / 3.0 * (1.0 - dry**3)
        assert with_cone.volume(z) == pytest.approx(without.volume(z) - cone, rel=1e-13)
    assert with_cone.area(0.0) == 0.0


def test_heads_of_a_tilted_vessel_fill_at_their_own_depth() -> None:
    """Hemispheres at both ends make a sphere when the shell is taken out, each at its depth."""
    slope, cosine = 0.1, math.sqrt(1 - 0.01)
    whole = horizontal_cylinder(2.0, 5.0, HemisphericalEnd(), FLAT, slope, 0.0)
    shell = horizontal_cylinder(2.0, 5.0, FLAT, FLAT, slope, 0.0)
    # A level through the centre of the left hemisphere, which tilts about it: half of the
    # half sphere is below any plane through the centre that contains its axis, and the plane
    # here is off the axis by the angle of the tilt.
    level = cosine
    head = whole.volume(level) - shell.volume(level)
    angle = math.asin(slope)
    assert head == pytest.approx(2.0 / 3.0 * (math.pi / 2 + angle), rel=1e-12)


def test_a_cone_head_points_away_from_the_vessel() -> None:
    assert lying(ConeEnd(1.0)).capacity > lying(FLAT).capacity


def test_mirrored_vessels_hold_the_same() -> None:
    one = horizontal_cylinder(2.0, 5.0, ConeEnd(0.7), KLOEPPER_2, 0.04, 1.0)
    other = horizontal_cylinder(2.0, 5.0, KLOEPPER_2, ConeEnd(0.7), -0.04, 4.0)
    z = np.linspace(one.z_min, one.z_max, 41)
    np.testing.assert_allclose(other.volume(z), one.volume(z), atol=1e-14 * one.capacity)
    np.testing.assert_allclose(other.moment(z), one.moment(z), atol=1e-13 * one.capacity)


KLOEPPER_2 = torispherical_standard("DIN 28011", 2.0)


def test_two_hemispheres_make_a_sphere_whatever_the_tilt() -> None:
    tiny = 1e-6
    ball = horizontal_cylinder(2.0, tiny, HemisphericalEnd(), HemisphericalEnd(), 0.2)
    shift = ball.z_min - sphere(2.0).z_min
    assert ball.volume(0.7 + shift) == pytest.approx(sphere(2.0).volume(0.7), abs=4 * tiny)


def test_a_dish_is_the_same_by_its_depth_or_by_its_radius() -> None:
    depth, radius = 0.5, 2.0
    sphere_radius = (radius**2 + depth**2) / (2 * depth)
    by_radius = upright(4.0, DishedEnd(radius_m=sphere_radius))
    assert by_radius.z_min == pytest.approx(-depth, rel=1e-14)
    assert by_radius.capacity == pytest.approx(upright(4.0, DishedEnd(depth)).capacity, rel=1e-14)


def test_ends_of_limiting_dimensions_become_simpler_ones() -> None:
    hemisphere = upright(4.0, HemisphericalEnd()).volume(1.0)
    for same in (DishedEnd(2.0), EllipsoidalEnd(2.0), TorisphericalEnd(2.0, 1.0)):
        assert upright(4.0, same).volume(1.0) == pytest.approx(hemisphere, rel=1e-14)
    all_knuckle = upright(4.0, TorisphericalEnd(9.0, 2.0))
    assert all_knuckle.volume(1.0) == pytest.approx(hemisphere, rel=1e-14)
    for flat in (DishedEnd(1e-6), ConeEnd(1e-6), EllipsoidalEnd(1e-6), SlopeEnd(1e-6)):
        assert upright(4.0, flat).volume(1.0) == pytest.approx(4 * math.pi, rel=1e-6)
        if not isinstance(flat, SlopeEnd):
            assert lying(flat).volume(1.0) == pytest.approx(lying(FLAT).volume(1.0), rel=1e-6)


def test_a_nearly_flat_dish_keeps_its_digits() -> None:
    """A cap of depth c on radius R holds pi c (3 R^2 + c^2) / 6."""
    for depth in (1e-6, 1e-4, 1e-2):
        cap = math.pi * depth * (3 * 4.0 + depth**2) / 6
        assert upright(4.0, DishedEnd(depth)).volume(0.0) == pytest.approx(cap, rel=1e-12)


def test_a_stack_may_have_steps_and_tips() -> None:
    tank = stack([(2.0, 0.0, 3.0), (1.0, 2.0, 2.0), (1.0, 4.0, 0.0)])
    cone = math.pi * 1.5**2 * 2.0 / 3.0
    assert tank.volume(2.0) == pytest.approx(cone, rel=1e-14)
    assert tank.volume(3.0) == pytest.approx(cone + math.pi, rel=1e-14)
    assert tank.capacity == pytest.approx(cone + math.pi + 4 * math.pi / 3, rel=1e-14)
    assert tank.area(2.0) == pytest.approx(math.pi)  # at a step: the layer above


def test_a_box_floor_that_falls_takes_half_its_fall() -> None:
    tank = box(4.0, 2.0, 3.0, floor_fall_m=0.5)
    assert tank.volume(0.25) == pytest.approx(0.5 * 0.25 * 2.0 * 2.0)
    assert tank.capacity == pytest.approx(4.0 * 2.0 * 2.75)
    assert box(4.0, 2.0, 3.0, floor_fall_m=3.0).capacity == pytest.approx(12.0)


def test_a_strapping_table_is_linear_between_its_lines_and_ends_at_them() -> None:
    tank = strapped([0.5, 1.0, 3.0], [2.0, 8.0, 28.0])
    assert (tank.z_min, tank.z_max, tank.capacity) == (0.5, 3.0, 28.0)
    assert tank.volume(np.array([0.5, 0.75, 1.0, 2.0, 3.0])).tolist() == [2.0, 5.0, 8.0, 18.0, 28.0]
    assert tank.level(np.array([2.0, 5.0, 28.0])).tolist() == [0.5, 0.75, 3.0]
    # What lies below the first line counts at its elevation.
    assert tank.moment(0.5) == pytest.approx(2.0 * 0.5)
    assert tank.moment(1.0) == pytest.approx(1.0 + 6.0 * 0.75)


def test_a_long_strapping_table_gives_back_every_line() -> None:
    z = np.arange(1501) * 0.01
    volume = 100.0 * z + np.sin(z)
    tank = strapped(z, volume)
    np.testing.assert_array_equal(tank.volume(z), volume)
    np.testing.assert_allclose(tank.level(volume), z, atol=1e-12)


def test_deadwood_is_taken_evenly_over_its_height() -> None:
    plain = box(2.0, 2.0, 5.0)
    tank = with_deadwood(plain, [(1.0, 2.0, 0.8), (1.5, 4.0, -0.5)])
    assert tank.volume(1.0) == plain.volume(1.0)
    assert tank.volume(1.5) == pytest.approx(6.0 - 0.4)
    assert tank.volume(2.75) == pytest.approx(11.0 - 0.8 + 0.25)
    assert tank.capacity == pytest.approx(20.0 - 0.3)
    assert tank.area(1.25) == pytest.approx(4.0 - 0.8)
    assert tank.moment(5.0) == pytest.approx(50.0 - 0.8 * 1.5 + 0.5 * 2.75)
    assert with_deadwood(plain, []) is plain


def test_deadwood_in_a_table_or_a_tilted_vessel() -> None:
    table = with_deadwood(strapped([0.5, 3.0], [2.0, 27.0]), [(1.0, 2.0, 4.0)])
    assert table.volume(np.array([0.5, 1.5, 3.0])).tolist() == [2.0, 10.0, 23.0]
    plain = horizontal_cylinder(2.0, 5.0, KLOEPPER_2, FLAT, 0.04)
    tank = with_deadwood(plain, [(0.5, 1.0, 0.2)])
    assert tank.volume(0.75) == pytest.approx(plain.volume(0.75) - 0.1, rel=1e-14)


def test_a_moved_datum_moves_every_elevation_and_no_volume() -> None:
    plain = upright(10.0, ConeEnd(2.0))
    moved = moved_datum(plain, 0.75)
    assert (moved.z_min, moved.z_max) == (-2.75, 19.25)
    assert moved.volume(1.25) == plain.volume(2.0)
    assert moved.area(-2.0) == plain.area(-1.25)
    assert moved.level(100.0) == pytest.approx(plain.level(100.0) - 0.75, abs=1e-14)
    # The first moment turns about the new datum.
    assert moved.moment(1.25) == pytest.approx(plain.moment(2.0) - 0.75 * plain.volume(2.0))
    np.testing.assert_allclose(moved.breaks, plain.breaks - 0.75)
    again = with_deadwood(moved, [(0.25, 1.25, 3.0)])
    assert again.volume(0.75) == pytest.approx(plain.volume(1.5) - 1.5)
    assert moved_datum(moved, -0.75).z_min == plain.z_min


def test_floats_give_floats_and_arrays_give_arrays_of_their_shape() -> None:
    tank = lying(KLOEPPER)
    for ask in (tank.area, tank.volume, tank.moment, tank.level):
        assert type(ask(1.0)) is float
        assert type(ask(np.float64(1.0))) is float
        grid = np.linspace(0.1, 2.9, 24).reshape(2, 3, 4)
        answer = ask(grid)
        assert answer.shape == (2, 3, 4)
        assert answer[1, 2, 3] == pytest.approx(ask(float(grid[1, 2, 3])), rel=1e-14)
        assert ask(np.empty((0, 3))).shape == (0, 3)
    volume, moment = tank.volume_and_moment(1.0)
    assert (volume, moment) == (tank.volume(1.0), tank.moment(1.0))


def test_the_tip_and_the_rim_belong_to_the_vessel() -> None:
    for tank in (sphere(3.0), lying(ConeEnd(1.0)), upright(4.0, ConeEnd(1.0)), lying(KLOEPPER)):
        assert tank.volume(tank.z_min) == 0.0
        assert tank.moment(tank.z_min) == 0.0
        assert tank.volume(tank.z_max) == tank.capacity
        assert tank.level(0.0) == pytest.approx(tank.z_min, abs=1e-12)
        assert tank.level(tank.capacity) == pytest.approx(tank.z_max, abs=1e-6)
        assert math.isfinite(tank.area(tank.z_min))
        assert math.isfinite(tank.area(tank.z_max))
        # Rounding of an elevation outside is no refusal.
        assert tank.volume(tank.z_max + 5e-10) == tank.capacity


def test_a_vessel_says_what_it_is() -> None:
    assert repr(sphere(10.0)) == "<sphere, 523.599 m3 from 0 m to 10 m>"


def test_naming_the_package_or_an_end_loads_no_numpy() -> None:
    code = (
        "import sys; from tankcalc.geometry import ConeEnd, FlatEnd; print('numpy' in sys.modules)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout == "False\n"


def test_an_unknown_name_is_no_attribute_of_the_package() -> None:
    import tankcalc.geometry as geometry

    assert "sphere" in dir(geometry)
    with pytest.raises(AttributeError, match="no attribute 'cube'"):
        geometry.cube  # noqa: B018 (the look-up is the test)

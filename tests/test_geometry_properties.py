"""What holds for every vessel: inverses, slopes, moments, symmetry, empty and full."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

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
    vertical_cylinder,
    with_deadwood,
)

metres = st.floats(0.2, 30.0)
shares = st.floats(0.01, 1.0)


@st.composite
def ends(draw: st.DrawFn, diameter: float) -> End:
    """Any end that a bottom, a roof and a head can be."""
    radius = 0.5 * diameter
    knuckle = draw(st.floats(0.02, 0.9)) * radius
    return draw(
        st.sampled_from(
            [
                FlatEnd(),
                ConeEnd(2.0 * draw(shares) * radius),
                DishedEnd(depth_m=draw(shares) * radius),
                HemisphericalEnd(),
                EllipsoidalEnd(),
                EllipsoidalEnd(2.0 * draw(shares) * radius),
                TorisphericalEnd(draw(st.floats(1.0, 4.0)) * radius, knuckle),
            ]
        )
    )


@st.composite
def vertical(draw: st.DrawFn) -> Vessel:
    diameter, height = draw(metres), draw(metres)
    courses = [(height, diameter), (0.5 * height, 0.999 * diameter)][: draw(st.integers(1, 2))]
    bottoms = st.one_of(
        ends(diameter),
        st.builds(SlopeEnd, shares),
        st.builds(lambda share: ConeEnd(share * height, "up"), shares),
    )
    return vertical_cylinder(courses, draw(bottoms), draw(ends(courses[-1][1])))


@st.composite
def horizontal(draw: st.DrawFn) -> Vessel:
    diameter, length = draw(st.floats(0.5, 5.0)), draw(st.floats(0.5, 20.0))
    slope = draw(st.sampled_from([0.0, 0.0, 1e-6, 0.003, -0.02, 0.15]))
    heads = draw(ends(diameter)), draw(ends(diameter))
    return horizontal_cylinder(diameter, length, *heads, slope, draw(st.floats(0.0, 1.0)) * length)


@st.composite
def tables(draw: st.DrawFn) -> Vessel:
    steps = draw(st.lists(st.tuples(st.floats(0.01, 1.0), st.floats(0.1, 50.0)), min_size=1))
    heights, volumes = np.cumsum([(0.0, draw(st.sampled_from([0.0, 1.5]))), *steps], axis=0).T
    return strapped(heights + draw(st.floats(-1.0, 1.0)), volumes)


@st.composite
def stacks(draw: st.DrawFn) -> Vessel:
    sizes = st.tuples(st.floats(0.1, 5.0), st.floats(0.1, 5.0), st.floats(0.1, 5.0))
    tip = [(draw(st.floats(0.1, 5.0)), 0.0, draw(st.floats(0.1, 5.0)))]
    return stack(tip[: draw(st.integers(0, 1))] + draw(st.lists(sizes, min_size=1, max_size=4)))


plain = st.one_of(
    vertical(),
    horizontal(),
    tables(),
    stacks(),
    st.builds(sphere, metres),
    st.builds(spheroid, metres, metres),
    st.builds(lambda a, b, h, f: box(a, b, h, f * h), metres, metres, metres, shares),
    st.builds(oval, st.sampled_from(["ellipse", "obround"]), metres, metres, metres),
)


@st.composite
def vessels(draw: st.DrawFn) -> Vessel:
    """Any vessel; some with their datum moved, some with space added to them."""
    vessel = draw(plain)
    if draw(st.booleans()):
        vessel = moved_datum(vessel, draw(st.floats(-3.0, 3.0)))
    if draw(st.booleans()):
        height = vessel.z_max - vessel.z_min
        low = vessel.z_min + 0.3 * height
        vessel = with_deadwood(vessel, [(low, low + 0.4 * height, -0.05 * vessel.capacity)])
    return vessel


def levels(vessel: Vessel, count: int = 33) -> np.ndarray:
    """Elevations from bottom to top, crowded at both."""
    share = 0.5 - 0.5 * np.cos(np.linspace(0.0, np.pi, count))
    return vessel.z_min + (vessel.z_max - vessel.z_min) * share


@given(vessels())
def test_level_is_the_inverse_of_volume(vessel: Vessel) -> None:
    volume = vessel.volume(levels(vessel))
    again = vessel.volume(vessel.level(volume))
    np.testing.assert_allclose(again, volume, rtol=0.0, atol=1e-12 * vessel.capacity)


@given(vessels())
def test_volume_rises_from_its_least_to_the_capacity(vessel: Vessel) -> None:
    volume = vessel.volume(levels(vessel))
    assert np.all(np.diff(volume) > 0.0)
    assert vessel.volume(vessel.z_max) == vessel.capacity
    if "strapped" not in vessel.kind:
        assert volume[0] == vessel.moment(vessel.z_min) == 0.0


NODES, WEIGHTS = np.polynomial.legendre.leggauss(16)


def integrals_of_area(vessel: Vessel, low: float, high: float) -> tuple[float, float]:
    """Of A and of A z between two breaks, on panels that shrink towards both of them.

    Panels by the factor of 2 settle any power of the distance from a break, and any other break
    close by.
    """
    from_break = np.concatenate([[0.0], np.exp2(np.arange(-44.0, 0.0))]) * (high - low)
    edges = np.concatenate([low + from_break, (high - from_break[:-1])[::-1]])
    middle, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    z = (middle[:, None] + half[:, None] * NODES).ravel()
    slices = (half[:, None] * WEIGHTS).ravel() * vessel.area(z)
    return float(slices.sum()), float((slices * z).sum())


@settings(max_examples=60)
@given(vessels())
def test_volume_and_moment_are_the_integrals_of_the_area(vessel: Vessel) -> None:
    volume, moment = vessel.volume_and_moment(vessel.breaks)
    highest = max(abs(vessel.z_min), abs(vessel.z_max), 1.0)
    for i, (low, high) in enumerate(zip(vessel.breaks[:-1], vessel.breaks[1:], strict=True)):
        found_volume, found_moment = integrals_of_area(vessel, low, high)
        allowed = 1e-11 * vessel.capacity
        assert volume[i + 1] - volume[i] == pytest.approx(found_volume, abs=allowed)
        assert moment[i + 1] - moment[i] == pytest.approx(found_moment, abs=allowed * highest)


@given(vessels(), st.floats(0.02, 0.98))
def test_the_area_is_the_slope_of_the_volume(vessel: Vessel, share: float) -> None:
    z = vessel.z_min + share * (vessel.z_max - vessel.z_min)
    step = 1e-5 * (vessel.z_max - vessel.z_min)
    if np.min(np.abs(vessel.breaks - z)) < 100.0 * step:
        return
    slope = (vessel.volume(z + step) - vessel.volume(z - step)) / (2.0 * step)
    assert vessel.area(z) == pytest.approx(slope, rel=1e-5)


@given(vessels())
def test_one_level_at_a_time_gives_what_all_at_once_give(vessel: Vessel) -> None:
    z = levels(vessel, 9)
    for ask in (vessel.area, vessel.volume, vessel.moment):
        one_by_one = [ask(float(level)) for level in z]
        np.testing.assert_allclose(ask(z), one_by_one, rtol=1e-13, atol=1e-13 * vessel.capacity)


symmetric = st.one_of(
    st.builds(sphere, metres),
    st.builds(spheroid, metres, metres),
    st.builds(oval, st.sampled_from(["ellipse", "obround"]), metres, metres, metres),
    metres.flatmap(
        lambda d: st.builds(
            lambda head, slope: horizontal_cylinder(d, 4.0, head, head, slope),
            ends(d),
            st.sampled_from([0.0, 0.02]),
        )
    ),
    metres.flatmap(
        lambda d: st.builds(
            lambda end: vertical_cylinder([(3.0, d)], end, end),
            ends(d),
        )
    ),
)


@given(symmetric)
def test_what_is_above_a_level_is_what_would_be_below_it_upside_down(vessel: Vessel) -> None:
    z = levels(vessel)
    upside_down = vessel.z_min + vessel.z_max - z
    below = vessel.volume(z) + vessel.volume(np.clip(upside_down, vessel.z_min, vessel.z_max))
    np.testing.assert_allclose(below, vessel.capacity, rtol=1e-12)
    middle = 0.5 * (vessel.z_min + vessel.z_max)
    assert vessel.moment(vessel.z_max) == pytest.approx(
        middle * vessel.capacity, abs=1e-12 * vessel.capacity * (1.0 + vessel.z_max)
    )


@given(st.floats(0.5, 5.0), st.floats(0.5, 20.0), st.floats(0.0, 0.15), st.data())
def test_a_tilt_to_the_other_side_is_the_mirrored_vessel(
    diameter: float, length: float, slope: float, data: st.DataObject
) -> None:
    left, right = data.draw(ends(diameter)), data.draw(ends(diameter))
    dip = data.draw(st.floats(0.0, 1.0)) * length
    one = horizontal_cylinder(diameter, length, left, right, slope, dip)
    other = horizontal_cylinder(diameter, length, right, left, -slope, length - dip)
    share = np.linspace(0.0, 1.0, 17)
    for ask in ("volume", "area", "moment"):
        found, wanted = (
            getattr(tank, ask)(tank.z_min + share * (tank.z_max - tank.z_min))
            for tank in (one, other)
        )
        scale = np.abs(wanted).max() + one.capacity
        np.testing.assert_allclose(found, wanted, rtol=0.0, atol=1e-10 * scale)


@given(vessels())
def test_the_outline_is_a_closed_ring_as_high_as_the_vessel(vessel: Vessel) -> None:
    ring = vessel.outline()
    assert np.all(np.isfinite(ring))
    np.testing.assert_array_equal(ring[0], ring[-1])
    height = vessel.z_max - vessel.z_min
    assert ring[:, 1].min() == pytest.approx(vessel.z_min, abs=0.01 * height)
    assert ring[:, 1].max() == pytest.approx(vessel.z_max, abs=0.01 * height)


@given(st.one_of(vertical(), stacks(), tables(), st.builds(sphere, metres)))
def test_the_outline_of_an_upright_vessel_holds_its_volume_when_turned(vessel: Vessel) -> None:
    """Only a sloped floor is not round; it holds half of what its outline turned would."""
    ring = vessel.outline()
    r, z = np.abs(ring[:, 0]), ring[:, 1]
    side = (
        np.diff(z)
        * (r[1:] ** 2 + r[1:] * r[:-1] + r[:-1] ** 2)
        * np.sign(ring[1:, 0] + ring[:-1, 0])
    )
    turned = math.pi / 6.0 * side.sum()
    gained = vessel.capacity - vessel.volume(vessel.z_min)
    assert turned == pytest.approx(gained, rel=0.01)

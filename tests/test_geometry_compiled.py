"""Very many levels at once are looked up in tables; they must give what one level gives."""

from __future__ import annotations

import numpy as np
import pytest

from tankcalc.geometry import (
    ConeEnd,
    DishedEnd,
    EllipsoidalEnd,
    FlatEnd,
    HemisphericalEnd,
    SlopeEnd,
    Vessel,
    box,
    horizontal_cylinder,
    moved_datum,
    oval,
    sphere,
    strapped,
    torispherical_standard,
    vertical_cylinder,
    with_deadwood,
)
from tankcalc.geometry.compiled import Compiled, compiled
from tankcalc.geometry.table import Table, tabulated
from tankcalc.geometry.vessel import MANY

FLAT = FlatEnd()
KLOEPPER = torispherical_standard("DIN 28011", 3.0)
ASME = torispherical_standard("ASME F&D", 3.0)
TILTED = horizontal_cylinder(3.0, 6.0, KLOEPPER, ASME, 0.02, 1.0)

VESSELS = {
    "level, torispherical heads": horizontal_cylinder(3.0, 6.0, KLOEPPER, KLOEPPER),
    "tilted, torispherical heads": TILTED,
    "tilted, flat ends": horizontal_cylinder(3.0, 6.0, FLAT, FLAT, -0.1),
    "hardly tilted": horizontal_cylinder(3.0, 6.0, HemisphericalEnd(), FLAT, 1e-6),
    "tilted by a rounding error": horizontal_cylinder(3.0, 6.0, FLAT, FLAT, 1e-12),
    "a long cone and a nearly flat dish": horizontal_cylinder(
        3.0, 0.5, ConeEnd(30.0), DishedEnd(1e-4), 0.003
    ),
    "level, 2:1 heads": horizontal_cylinder(3.0, 6.0, EllipsoidalEnd(), EllipsoidalEnd()),
    "tilted, with deadwood": with_deadwood(TILTED, [(0.5, 1.0, 0.3)]),
    "tilted, its datum moved": moved_datum(TILTED, 1.7),
    "oval": oval("obround", 1.0, 2.0, 3.0),
    "standing, torispherical, courses": vertical_cylinder([(2, 3.0), (2, 2.99)], KLOEPPER, ASME),
    "standing, sloped floor": vertical_cylinder([(2, 3.0), (2, 2.99)], SlopeEnd(0.2), FLAT),
    "sphere": sphere(3.0),
    "table": strapped(np.arange(400) * 0.01, np.arange(400) + 0.1 * np.sin(np.arange(400))),
    "table with deadwood": with_deadwood(
        strapped(np.arange(400) * 0.01, np.arange(400) + 0.1 * np.sin(np.arange(400))),
        [(0.5, 1.0, 3.0)],
    ),
}


def many_levels(vessel: Vessel) -> np.ndarray:
    """Levels evenly spread, some crowded on every break, and the breaks themselves."""
    rng = np.random.default_rng(12)
    even = rng.uniform(vessel.z_min, vessel.z_max, MANY)
    near = vessel.breaks[:, None] + np.outer([-1.0, 1.0], 10.0 ** np.arange(-12.0, -1.0)).ravel()
    every = np.concatenate([even, near.ravel(), vessel.breaks])
    return every[(every >= vessel.z_min) & (every <= vessel.z_max)]


@pytest.mark.parametrize("vessel", VESSELS.values(), ids=VESSELS.keys())
def test_many_levels_at_once_give_what_few_give(vessel: Vessel) -> None:
    z = many_levels(vessel)
    at_once = vessel.volume_and_moment(z)
    some = np.linspace(0, len(z) - 1, 700).astype(int)
    few = vessel.volume_and_moment(z[some])
    lever = max(abs(vessel.z_min), abs(vessel.z_max))
    allowed = 1e-12 * vessel.capacity
    np.testing.assert_allclose(at_once[0][some], few[0], rtol=0.0, atol=allowed)
    np.testing.assert_allclose(at_once[1][some], few[1], rtol=0.0, atol=allowed * lever)


@pytest.mark.parametrize("vessel", VESSELS.values(), ids=VESSELS.keys())
def test_many_areas_at_once_give_what_few_give(vessel: Vessel) -> None:
    z = np.random.default_rng(5).uniform(vessel.z_min, vessel.z_max, MANY)
    found = vessel.area(z)[:500]
    wanted = vessel.area(z[:500])
    np.testing.assert_allclose(found, wanted, rtol=0.0, atol=1e-10 * wanted.max())


@pytest.mark.parametrize("vessel", VESSELS.values(), ids=VESSELS.keys())
def test_many_volumes_at_once_give_levels_that_hold_them(vessel: Vessel) -> None:
    volume = np.linspace(vessel.volume(vessel.z_min), vessel.capacity, 2 * MANY).reshape(2, -1)
    z = vessel.level(volume)
    assert z.shape == volume.shape
    held = vessel.volume(z[:, ::40])
    np.testing.assert_allclose(held, volume[:, ::40], rtol=0.0, atol=1e-12 * vessel.capacity)


@pytest.mark.parametrize(
    "vessel", [v for k, v in VESSELS.items() if k != "sphere" and "table" not in k], ids=repr
)
def test_every_shape_but_the_quadratic_ones_gets_its_tables(vessel: Vessel) -> None:
    """Where no table agreed with the exact figures, the slow way would be taken in silence."""
    fast = compiled(vessel.body)
    assert isinstance(fast, Compiled)
    assert isinstance(fast.volumes, Table)
    assert isinstance(fast.areas, Table)


def test_an_empty_vessel_holds_nothing_also_among_many() -> None:
    z = np.full(MANY, TILTED.z_min)
    assert not TILTED.volume(z).any()
    z[1::2] = TILTED.z_max
    assert np.all(TILTED.volume(z)[1::2] == pytest.approx(TILTED.capacity, rel=1e-14))


def test_figures_that_no_table_can_follow_are_left_as_they_are() -> None:
    def ragged(z: np.ndarray) -> tuple[np.ndarray, ...]:
        return (np.sin(1e9 * z),)

    assert tabulated(ragged, np.array([0.0, 1.0]), [1e-12]) is ragged


def test_a_box_needs_no_table() -> None:
    body = box(1.0, 2.0, 3.0).body
    assert compiled(body) is body

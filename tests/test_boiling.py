"""Liquefied gases in tanks: their own vapour, and pressures that do not suit them."""

from __future__ import annotations

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from tanks import single, transmitters, upright

from tankcalc.fluids.liquefied_gas import LiquefiedGas
from tankcalc.fluids.saturated import Saturated
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.readings import Readings
from tankcalc.result import Result

PROPANE = Saturated((("propane", 1.0),))
MIXED = Saturated((("propane", 0.6), ("n-butane", 0.4)))
LNG = LiquefiedGas((("methane", 0.92), ("ethane", 0.08)))
WARM_K = 288.15


def codes(result: Result) -> set[str]:
    return {notice.code for notice in result.warnings}


@pytest.mark.parametrize("t_k", [200.0, 231.0, 288.15, 320.0])
def test_the_vapour_pressure_is_the_library_s(t_k: float) -> None:
    wanted = PropsSI("P", "T", t_k, "Q", 0, "n-Propane")
    assert PROPANE.saturation_pa(t_k) == pytest.approx(wanted, rel=1e-6)
    assert PROPANE.saturation_pa(500.0) is None


def test_the_vapour_is_that_above_the_liquid_at_15_degc() -> None:
    vapour = PROPANE.vapour
    assert vapour is not None
    density = PropsSI("D", "T", WARM_K, "Q", 1, "n-Propane")
    pa = PropsSI("P", "T", WARM_K, "Q", 1, "n-Propane")
    assert vapour.molar_mass_kg_mol is not None
    gas = pa * vapour.molar_mass_kg_mol / (vapour.compressibility * 8.314462618 * WARM_K)
    assert gas == pytest.approx(density, rel=1e-5)


def test_the_vapour_of_a_mixture_is_richer_in_what_boils_first() -> None:
    vapour = MIXED.vapour
    assert vapour is not None
    liquid = 0.6 * 44.0956e-3 + 0.4 * 58.1222e-3
    assert vapour.molar_mass_kg_mol is not None
    assert 44.0956e-3 < vapour.molar_mass_kg_mol < liquid


def test_a_cold_gas_takes_the_nearest_temperature_it_has() -> None:
    methane = Saturated((("methane", 1.0),))
    vapour = methane.vapour
    assert vapour is not None
    assert 0.2 < vapour.compressibility < 1.0


def test_an_unknown_vapour_is_told_in_a_closed_tank_only() -> None:
    readings = Readings(
        temperatures=((None, 112.0),), p1_pa=np.float64(30e3), p3_pa=np.float64(5e3)
    )
    closed = upright(transmitters=transmitters(p1=0.5, p3=14.5))
    assert "vapour_unstated" in codes(evaluate(closed, single(LNG), readings))
    alone = Readings(temperatures=((None, 112.0),), p1_pa=np.float64(30e3))
    assert "vapour_unstated" not in codes(evaluate(upright(), single(LNG), alone))
    stated = single(LNG, vapour=Vapour(molar_mass_kg_mol=16.3e-3))
    assert "vapour_unstated" not in codes(evaluate(closed, stated, readings))
    oil = Readings(p1_pa=np.float64(30e3), p3_pa=np.float64(5e3))
    assert "vapour_unstated" not in codes(evaluate(closed, single(850.0), oil))


def test_a_liquid_that_would_boil_in_an_open_tank_is_told() -> None:
    fluid = single(PROPANE, vapour=PROPANE.vapour)
    warm = Readings(temperatures=((None, WARM_K),), p1_pa=np.float64(30e3))
    (notice,) = (n for n in evaluate(upright(), fluid, warm).warnings if n.code == "would_boil")
    assert f"{PropsSI('P', 'T', WARM_K, 'Q', 0, 'n-Propane') / 1e3:.3f} kPa" in notice.message
    cold = Readings(temperatures=((None, 230.0),), p1_pa=np.float64(30e3))
    assert "would_boil" not in codes(evaluate(upright(), fluid, cold))
    closed = upright(transmitters=transmitters(p1=0.5, p3=14.5))
    pressed = Readings(
        temperatures=((None, WARM_K),), p1_pa=np.float64(660e3), p3_pa=np.float64(630e3)
    )
    result = evaluate(closed, fluid, pressed)
    assert result.level_m is not None
    assert "would_boil" not in codes(result)


@pytest.mark.parametrize(("share", "told"), [(0.80, True), (0.90, False), (1.2, False)])
def test_a_pressure_far_below_saturation_is_told(share: float, told: bool) -> None:
    tank = upright(transmitters=transmitters(p1=0.5, p3=14.5))
    p3 = share * PropsSI("P", "T", WARM_K, "Q", 0, "n-Propane") - 101_325.0
    readings = Readings(
        temperatures=((None, WARM_K),), p1_pa=np.float64(p3 + 30e3), p3_pa=np.float64(p3)
    )
    result = evaluate(tank, single(PROPANE, vapour=PROPANE.vapour), readings)
    assert ("below_saturation" in codes(result)) == told

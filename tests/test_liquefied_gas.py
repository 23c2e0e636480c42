"""Refrigerated and saturated liquefied gases."""

from __future__ import annotations

import builtins
import math
from typing import Any

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from published import Published, published

from tankcalc.errors import InputError, RangeError
from tankcalc.fluids.components import COMPONENTS, component, composition
from tankcalc.fluids.liquefied_gas import LiquefiedGas, molar_volume, reduction
from tankcalc.fluids.saturated import Saturated

ICE = 273.15
ROWS = published("lng_lpg.csv")

NAMES = {
    "N2": "nitrogen",
    "CH4": "methane",
    "C2H6": "ethane",
    "C3H8": "propane",
    "nC4": "n-butane",
    "iC4": "isobutane",
    "nC5": "n-pentane",
    "iC5": "isopentane",
    "Propane": "propane",
    "n-Butane": "n-butane",
    "IsoButane": "isobutane",
    "ammonia": "ammonia",
}


def rows(quantity: str) -> list[Published]:
    found = [row for row in ROWS if row.quantity.startswith(quantity)]
    assert found, quantity
    return found


def mixed(row: Published) -> tuple[tuple[str, float], ...]:
    return composition({NAMES[name]: share for name, share in row.inputs["x"].items()})


def lng(**fractions: float) -> LiquefiedGas:
    return LiquefiedGas(composition({name.replace("_", "-"): x for name, x in fractions.items()}))


def rho(model: LiquefiedGas | Saturated, t_k: float) -> float:
    return float(model.checked_density(np.array(t_k)))


def test_every_published_row_has_its_test() -> None:
    starts = ("molar volume", "volume reduction", "k1", "LNG density", "density")
    assert all(row.quantity.startswith(starts) for row in ROWS)


@pytest.mark.parametrize("row", rows("molar volume"), ids=str)
def test_published_molar_volumes(row: Published) -> None:
    name, t = NAMES[row.inputs["component"]], np.array(row.inputs["T_K"])
    row.agrees(1e6 * float(molar_volume(name, t)))


@pytest.mark.parametrize("row", rows("volume reduction"), ids=str)
def test_published_volume_reductions(row: Published) -> None:
    nth = int(row.quantity[-1])
    t, molar_mass = np.array(row.inputs["T_K"]), row.inputs["M_g_mol"] * 1e-3
    row.agrees(1e6 * float(reduction(nth, t, molar_mass)))


@pytest.mark.parametrize("row", rows("k1"), ids=str)
def test_published_volume_reduction_of_a_mixture(row: Published) -> None:
    mixture = LiquefiedGas(mixed(row))
    t = np.array(row.inputs["t_C"] + ICE)
    row.agrees(1e6 * float(reduction(1, t, mixture.molar_mass_kg_mol)))


@pytest.mark.parametrize("row", rows("LNG density"), ids=str)
def test_published_lng(row: Published) -> None:
    kind = LiquefiedGas if "Klosek" in row.quantity else Saturated
    row.agrees(rho(kind(mixed(row)), row.inputs["t_C"] + ICE))


@pytest.mark.parametrize(
    "row",
    rows("density")
    + [row for row in published("chemicals.csv") if row.inputs.get("state") == "saturated liquid"],
    ids=str,
)
def test_published_saturated_liquids(row: Published) -> None:
    pure = Saturated(((NAMES[row.inputs["fluid"]], 1.0),))
    row.agrees(rho(pure, row.inputs["t_C"] + ICE))


def test_published_methanol_lies_near_the_library_curve() -> None:
    (row,) = [
        row
        for row in published("chemicals.csv")
        if row.inputs.get("solute") == "methanol" and row.inputs["mass_pct"] == 100
    ]
    row.agrees(PropsSI("D", "T", row.inputs["t_C"] + ICE, "Q", 0, "Methanol"))


# Revised Klosek-McKinley


@pytest.mark.parametrize(
    "fractions",
    [
        {"methane": 1.0},
        {"methane": 0.9, "ethane": 0.08, "propane": 0.02},
        {"methane": 0.8, "ethane": 0.12, "propane": 0.05, "n_butane": 0.02, "nitrogen": 0.01},
        {"methane": 0.93, "ethane": 0.03, "nitrogen": 0.04},
    ],
)
@pytest.mark.parametrize("t_k", [105.0, 110.0, 115.0])
def test_lng_is_near_the_reference_equations(fractions: dict[str, float], t_k: float) -> None:
    # The method's own 0.1 % and the 0.1 % by which its molar volumes are below today's.
    found = lng(**fractions)
    assert rho(found, t_k) == pytest.approx(rho(Saturated(found.composition), t_k), rel=2e-3)


def test_lng_expands_and_takes_arrays() -> None:
    cold = lng(methane=0.9, ethane=0.1)
    t = np.linspace(105.0, 115.0, 101)
    found = cold.checked_density(t)
    assert np.all(np.diff(found) < 0.0)
    assert found.reshape(1, -1).shape == cold.checked_density(t.reshape(1, -1)).shape
    assert found[40] == rho(cold, float(t[40]))


@pytest.mark.parametrize("t_k", [104.99, 115.01, math.nan])
def test_lng_refuses_temperatures_outside_the_method(t_k: float) -> None:
    with pytest.raises(RangeError, match=r"Klosek-McKinley method holds from 105 to 115 K"):
        rho(lng(methane=1.0), t_k)


@pytest.mark.parametrize(
    ("fractions", "said"),
    [
        ({"methane": 0.59, "ethane": 0.41}, "at least 60 % methane, found 59 %"),
        ({"propane": 1.0}, "at least 60 % methane, found 0 %"),
        ({"methane": 0.95, "nitrogen": 0.05}, "at most 4 % nitrogen, found 5 %"),
        ({"methane": 0.95, "n-butane": 0.03, "isobutane": 0.02}, "at most 4 % butanes, found 5 %"),
        ({"methane": 0.97, "n-pentane": 0.03}, "at most 2 % pentanes, found 3 %"),
        ({"methane": 0.62, "propane": 0.38}, "up to 25 g/mol, found 26.70"),
        ({"methane": 0.95, "oxygen": 0.05}, "knows no oxygen"),
    ],
)
def test_a_composition_outside_the_method_is_refused(
    fractions: dict[str, float], said: str
) -> None:
    with pytest.raises(InputError, match=said):
        LiquefiedGas(composition(fractions))


# Saturated liquids


@pytest.mark.parametrize("name", sorted(COMPONENTS))
def test_the_curve_of_each_pure_liquid_is_that_of_the_library(name: str) -> None:
    pure = Saturated(((name, 1.0),))
    low, high = pure.limits_k
    for t in np.linspace(low + 0.01, high - 0.01, 7):
        wanted = PropsSI("D", "T", t, "Q", 0, COMPONENTS[name].library)
        assert rho(pure, float(t)) == pytest.approx(wanted, rel=1e-6)


def test_a_mixture_of_lpg_lies_between_its_parts() -> None:
    mixture = Saturated(composition({"propane": 0.6, "butane": 0.4}))
    parts = [rho(Saturated(((name, 1.0),)), 288.15) for name in ("propane", "n-butane")]
    assert parts[0] < rho(mixture, 288.15) < parts[1]


@pytest.mark.parametrize(("name", "t_k"), [("propane", 85.0), ("propane", 363.0)])
def test_no_liquid_below_freezing_or_near_the_critical_point(name: str, t_k: float) -> None:
    with pytest.raises(RangeError, match=r"triple point.*critical"):
        rho(Saturated(((name, 1.0),)), t_k)


def test_what_the_library_cannot_mix_is_refused() -> None:
    with pytest.raises(InputError, match="no saturated liquid of ammonia and chlorine"):
        Saturated((("ammonia", 0.5), ("chlorine", 0.5)))


def test_without_the_library_the_message_names_the_extra(monkeypatch: pytest.MonkeyPatch) -> None:
    real = builtins.__import__

    def without(name: str, *rest: Any, **named: Any) -> Any:
        if name == "CoolProp":
            raise ImportError(name)
        return real(name, *rest, **named)

    monkeypatch.setattr(builtins, "__import__", without)
    with pytest.raises(InputError, match=r"pip install 'tankcalc\[gases\]'"):
        Saturated((("ammonia", 1.0),))


# Compositions


@pytest.mark.parametrize(
    ("typed", "kept"),
    [
        ("Methane", "methane"),
        ("iso-butane", "isobutane"),
        ("Butane", "n-butane"),
        ("R134a", "R134a"),
    ],
)
def test_a_component_goes_by_its_usual_names(typed: str, kept: str) -> None:
    assert component(typed) == kept


@pytest.mark.parametrize(
    ("fractions", "said"),
    [
        ({"methane": 0.92, "ethane": 0.07}, r"mole fractions sum to 0\.99, not to 1"),
        ({"methane": 0.92, "ethane": 0.080002}, r"sum to 1\.000002, not to 1"),
        ({"methan": 1.0}, r'"methan" is no component known here. Did you mean "methane"\?'),
        ({"butane": 0.5, "n-butane": 0.5}, "n-butane is there twice"),
        ({"propane": 1.5, "ethane": -0.5}, "propane must be between 0 and 1"),
    ],
)
def test_a_composition_that_makes_no_whole_is_refused(
    fractions: dict[str, float], said: str
) -> None:
    with pytest.raises(InputError, match=said):
        composition(fractions)


def test_fractions_may_miss_one_by_a_millionth() -> None:
    assert composition({"methane": 0.92, "ethane": 0.0800005}) == (
        ("methane", 0.92),
        ("ethane", 0.0800005),
    )

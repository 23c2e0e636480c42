"""What each number is worth: budget, Monte Carlo, and the law of propagation itself."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from published import Published, published
from tanks import around, single, stacked, upright

from tankcalc.fluids.constant import Constant
from tankcalc.fluids.expansion import Expansion
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.geometry import (
    ConeEnd,
    EllipsoidalEnd,
    FlatEnd,
    HemisphericalEnd,
    horizontal_cylinder,
    sphere,
    vertical_cylinder,
)
from tankcalc.instruments import Accuracy, Transmitter
from tankcalc.readings import Readings
from tankcalc.tank import TableCertificate, Tank
from tankcalc.uncertainty import assess, propagate, simulate


def fitted(spacing_m: float = 0.0, **pascal: float) -> dict[str, Transmitter]:
    """Gauge transmitters at 0.5, 2.5 and 15 m with these standard uncertainties."""
    elevations = {"p1": 0.5, "p2": 2.5, "p3": 15.0}
    off = {"p1": 0.003, "p2": spacing_m, "p3": 0.0}
    return {
        tag: Transmitter(
            tag,
            elevations[tag],
            "gauge",
            accuracy=Accuracy(fixed=u),
            elevation_uncertainty_m=off[tag],
        )
        for tag, u in pascal.items()
    }


def example_tank(**transmitters: Transmitter) -> Tank:
    """The example tank with the uncertainties of its budget."""
    return upright(
        transmitters=transmitters,
        table=TableCertificate(uncertainty=0.001),
        surroundings=around(gravity_uncertainty_m_s2=9.81e-5, air_uncertainty_kg_m3=0.05),
    )


EXAMPLE_FLUID = Fluid(
    "liquid",
    (Layer("liquid", Constant(850.0), None, uncertainty_kg_m3=1.0),),
    Vapour(density_kg_m3=2.5, uncertainty_kg_m3=0.5),
)
EXAMPLE = Readings(p1_pa=97_295.631, p3_pa=1500.0)


@pytest.mark.parametrize(
    ("name", "millimetres", "cubic_metres", "kilograms"),
    [
        ("p1", 3.6, 1.13, 964.0),
        ("p3", 1.8, 0.57, 482.0),
        ("gravity", 0.1, 0.04, 31.0),
        ("geometry", 0.0, 3.77, 3204.0),
        ("density", 13.6, 4.26, 146.0),
        ("p1 elevation", 3.0, 0.94, 802.0),
        ("vapour density", 1.8, 0.56, 473.0),
        ("outside air", 0.9, 0.27, 228.0),
    ],
)
def test_the_example_budget_line_by_line(
    name: str, millimetres: float, cubic_metres: float, kilograms: float
) -> None:
    # Lines by the analytic derivatives of the hydrostatic equation, rounded as printed.
    budget = assess(example_tank(**fitted(p1=30.0, p3=15.0)), EXAMPLE_FLUID, EXAMPLE)
    assert budget is not None
    share = next(s for s in budget.shares if s.name == name).contributions
    assert abs(share["level_m"]) * 1e3 == pytest.approx(millimetres, abs=0.06)
    assert abs(share["volume_m3"]) == pytest.approx(cubic_metres, abs=0.006)
    assert abs(share["mass_kg"]) == pytest.approx(kilograms, abs=0.7)


def test_the_example_budget_as_a_whole() -> None:
    budget = assess(example_tank(**fitted(p1=30.0, p3=15.0)), EXAMPLE_FLUID, EXAMPLE)
    assert budget is not None
    assert budget.standard["level_m"] * 1e3 == pytest.approx(14.6, abs=0.06)
    assert budget.standard["volume_m3"] == pytest.approx(5.94, abs=0.006)
    assert budget.standard["mass_kg"] == pytest.approx(3517.0, abs=1.0)
    assert budget.expanded["level_m"] == 2.0 * budget.standard["level_m"]
    assert budget.shares[0].name == "geometry"


def test_three_transmitters_give_the_mass_as_well_and_the_level_half_as_well() -> None:
    three = example_tank(**fitted(spacing_m=0.001, p1=30.0, p2=30.0, p3=30.0))
    three = replace(three, transmitters={
        **three.transmitters,
        "p1": replace(three.transmitters["p1"], elevation_uncertainty_m=0.0),
    })  # fmt: skip
    budget = assess(three, EXAMPLE_FLUID, replace(EXAMPLE, p2_pa=80_642.175))
    assert budget is not None
    assert budget.standard["density_kg_m3"] == pytest.approx(2.20, abs=0.03)
    assert budget.standard["level_m"] * 1e3 == pytest.approx(27.8, abs=0.6)
    assert budget.standard["mass_kg"] == pytest.approx(3590.0, rel=0.03)


@pytest.mark.parametrize(
    ("vessel", "fill", "expected"),
    [
        (vertical_cylinder([(12.0, 10.0)], FlatEnd(), FlatEnd()), 0.5, 0.0),
        (sphere(12.0), 0.5, -0.5),
        (sphere(12.0), 0.25, -0.8),
        (sphere(12.0), 0.9, 0.5),
        (horizontal_cylinder(3.0, 9.0, FlatEnd(), FlatEnd()), 0.1, -0.468),
        (horizontal_cylinder(3.0, 9.0, FlatEnd(), FlatEnd()), 0.9, 0.275),
    ],
)
def test_mass_from_pressure_hardly_depends_on_density_in_a_straight_tank(
    vessel: Any, fill: float, expected: float
) -> None:
    # Relative change of mass per relative change of density, tap at the bottom:
    # 1 - A (h - z1) / V from the derivatives of the equation.
    taps = {"p1": Transmitter("p1", 0.0, "gauge"), "p3": Transmitter("p3", vessel.z_max, "gauge")}
    air = around(air_density_kg_m3=1e-9)
    tank = upright(vessel=vessel, transmitters=taps, surroundings=air)
    level = fill * vessel.z_max
    p1 = 850.0 * 9.81 * level
    masses = [
        float(evaluate(tank, single(850.0 * f), Readings(p1_pa=p1, p3_pa=0.0)).mass_kg or 0.0)
        for f in (0.999, 1.001)
    ]
    found = (masses[1] - masses[0]) / (0.002 * sum(masses) / 2.0)
    assert found == pytest.approx(expected, abs=1.5e-3)


def test_halving_an_uncertainty_buys_what_it_says() -> None:
    tank = example_tank(**fitted(p1=30.0, p3=15.0))
    budget = assess(tank, EXAMPLE_FLUID, EXAMPLE)
    better = assess(
        replace(tank, table=TableCertificate(uncertainty=0.0005)), EXAMPLE_FLUID, EXAMPLE
    )
    assert budget is not None
    assert better is not None
    bought = budget.expanded["mass_kg"] - better.expanded["mass_kg"]
    assert budget.gain_of_halving("geometry") == pytest.approx(bought, rel=1e-6)


def random_question(rng: np.random.Generator) -> tuple[Tank, Fluid, Readings]:
    """A tank, a fluid and an instrument set, with readings that agree."""
    vessel = [
        vertical_cylinder([(12.0, 16.0)], FlatEnd(), ConeEnd(1.0)),
        vertical_cylinder([(8.0, 6.0)], EllipsoidalEnd(), EllipsoidalEnd()),
        horizontal_cylinder(3.0, 9.0, HemisphericalEnd(), HemisphericalEnd(), slope=0.02),
        sphere(14.0),
    ][rng.integers(4)]
    low, high = vessel.z_min, vessel.z_max
    size = high - low
    taps = {
        "p1": Transmitter("p1", low + 0.05 * size, "gauge",
                          accuracy=Accuracy(fixed=rng.uniform(10.0, 60.0))),
        "p2": Transmitter("p2", low + 0.2 * size, "gauge",
                          accuracy=Accuracy(fixed=rng.uniform(10.0, 60.0))),
        "p3": Transmitter("p3", high, ["gauge", "absolute"][rng.integers(2)],
                          accuracy=Accuracy(fixed=rng.uniform(5.0, 30.0))),
    }  # fmt: skip
    tank = upright(vessel=vessel, transmitters=taps)
    rho = rng.uniform(650.0, 1100.0)
    fluid = [
        single(rho),
        single(Expansion(rho, 288.15, 9e-4)),
        stacked((1150.0, low + 0.1 * size), (rho, None)),
    ][rng.integers(3)]
    level = low + rng.uniform(0.45, 0.85) * size
    p3 = 1500.0 if taps["p3"].reads == "gauge" else 102_000.0
    warm = ((None, 298.15),)
    true = evaluate(tank, fluid, Readings(level_m=level, p3_pa=p3, temperatures=warm))
    sets: list[dict[str, Any]] = [
        {"p1_pa": true.p1_pa},
        {"p1_pa": true.p1_pa, "p2_pa": true.p2_pa},
        {"p1_pa": true.p1_pa, "level_m": level},
        {"p1_pa": true.p1_pa, "p2_pa": true.p2_pa, "level_m": level},
        {"level_m": level},
    ]
    chosen = sets[rng.integers(len(sets))]
    return tank, fluid, Readings(p3_pa=p3, temperatures=warm, **chosen)


@pytest.mark.parametrize("block", range(10))
def test_monte_carlo_and_propagation_agree(block: int) -> None:
    """Within 3 % over 200 random tanks and instrument sets."""
    rng = np.random.default_rng(100 + block)
    for _ in range(20):
        question = random_question(rng)
        budget = assess(*question)
        assert budget is not None
        draws = simulate(*question, draws=10_000, seed=int(rng.integers(1 << 30)))
        for key in budget.standard:
            # Ten thousand draws know a standard deviation to 0.7 %.
            spread = float(np.std(draws[key], ddof=1))
            assert spread == pytest.approx(budget.standard[key], rel=0.03, abs=1e-9), key


def test_a_refused_answer_has_no_uncertainty() -> None:
    tank = example_tank(**fitted(p1=30.0, p3=15.0))
    assert assess(tank, EXAMPLE_FLUID, Readings(p1_pa=9e6, p3_pa=0.0)) is None


def test_what_is_not_stated_is_marked() -> None:
    budget = assess(upright(), single(850.0), Readings(p1_pa=80_000.0))
    assert budget is not None
    assert not any(share.stated for share in budget.shares)
    stated = assess(example_tank(**fitted(p1=30.0, p3=15.0)), EXAMPLE_FLUID, EXAMPLE)
    assert stated is not None
    assert {s.name for s in stated.shares if not s.stated} == set()


GUM_ROWS = [row for row in published("uncertainty.csv") if "example" in row.inputs]


@pytest.mark.parametrize("row", GUM_ROWS, ids=str)
def test_published_example_with_correlated_inputs(row: Published) -> None:
    data = np.array([row.inputs["V"], np.array(row.inputs["I_mA"]) / 1e3, row.inputs["phi_rad"]])
    mean, covariance = data.mean(axis=1), np.cov(data) / data.shape[1]

    def impedance(x: Any) -> list[float]:
        volt, ampere, phase = x
        size = volt / ampere
        return [size * math.cos(phase), size * math.sin(phase), size]

    found, spread = propagate(impedance, mean.tolist(), covariance)
    names = ["R", "X", "Z"]
    if row.quantity in names:
        row.agrees(found[names.index(row.quantity)])
    elif row.quantity.startswith("u("):
        k = names.index(row.quantity[2])
        row.agrees(math.sqrt(spread[k, k]))
    else:
        i, j = names.index(row.quantity[2]), names.index(row.quantity[4])
        row.agrees(spread[i, j] / math.sqrt(spread[i, i] * spread[j, j]))


@pytest.mark.parametrize(
    "row", [r for r in published("uncertainty.csv") if "example" not in r.inputs], ids=str
)
def test_published_pressure_examples(row: Published) -> None:
    data = row.inputs
    if "rho" in data:
        values = [data["p_Pa"], data["rho"], data["g"]]
        sigmas = [data["u_p"], data["u_rho"], data["u_g"]]
        _, spread = propagate(lambda x: [x[0] / (x[1] * x[2])], values, np.diag(sigmas) ** 2)
    else:
        values = [data["p_Pa"], data["A_m2"], data["g"]]
        sigmas = [data["u_p"], data["u_A"], data["u_g"]]
        _, spread = propagate(lambda x: [x[0] * x[1] / x[2]], values, np.diag(sigmas) ** 2)
    row.agrees(math.sqrt(spread[0, 0]))

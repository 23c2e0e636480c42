"""The working behind the answer to one set of readings."""

from __future__ import annotations

import numpy as np

from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging import evaluate
from tankcalc.gauging.amounts import free_water_m3
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.solve import solve
from tankcalc.gauging.standard import Standard, standard
from tankcalc.gauging.state import Found
from tankcalc.readings import Readings
from tankcalc.sums.book import Book, Rounding
from tankcalc.sums.working import FactorGiven, Given, Line, RoofGiven, ShellGiven, working
from tankcalc.tank import Tank
from tankcalc.units import System


def sums(
    tank: Tank,
    fluid: Fluid,
    readings: Readings,
    rounding: Rounding = "as printed",
    system: System = "metric",
) -> tuple[Line, ...]:
    """Return the working of the answer, empty where the readings are refused.

    Parameters
    ----------
    tank, fluid, readings
        As for ``evaluate``; single readings, not arrays.
    rounding : {"as printed", "unrounded"}
        See the package.
    system : {"metric", "us", "imperial"}
        Barrels and degF for "us", degF for "imperial".
    """
    if evaluate(tank, fluid, readings).status == "refused":
        return ()
    model, found = solve(tank, fluid, readings)
    return working(_given(tank, model, found), Book.of(rounding, system))


def _given(tank: Tank, model: Model, found: Found) -> Given:
    """Return where the working begins."""
    case, state = model.case, found.state
    level = float(state.surface_m)
    water = float(free_water_m3(case, state.surface_m))
    volume, mass, _ = model.contents(state)
    product = float(volume) - water
    at_base = standard(model, state, np.asarray(product), mass)
    upright = case.tank.vessel.z_max / tank.vessel.z_max if tank.vessel.z_max else 1.0
    total = float(tank.vessel.volume(level / upright))
    water_bare = _bare_water(tank, model, upright)
    grown = (total - water_bare) * (case.shell.factor or 1.0)
    roof = _roof(model, state)
    without_roof = model.without_roof().volume(state) - water
    return Given(
        level_m=level,
        total_m3=total,
        water_m3=water_bare,
        stretch_m3=float(without_roof) - grown if _stretches(tank) else 0.0,
        shell=_shell(tank, model),
        roof=roof,
        factor=_factor(model, state, at_base),
        density_kg_m3=float(mass) / product if product else float("nan"),
        reference_kg_m3=None if at_base.density_kg_m3 is None else float(at_base.density_kg_m3),
        sediment_water=case.readings.sediment_water,
        from_pressure=found.by in case.fitted(),
    )


def _stretches(tank: Tank) -> bool:
    return tank.shell is not None and bool(tank.shell.thickness_m and tank.shell.courses_m)


def _bare_water(tank: Tank, model: Model, upright: float) -> float:
    """Return the free water as the bare table gives it, m3."""
    top = model.case.liquid.water_top_m
    if top is None:
        return 0.0
    low, high = tank.vessel.z_min, tank.vessel.z_max
    return float(tank.vessel.volume(min(max(top / upright, low), high)))


def _shell(tank: Tank, model: Model) -> ShellGiven | None:
    shell, state, around = tank.shell, model.case.shell, tank.surroundings
    if shell is None or state.factor is None:
        return None
    assert shell.expansion_per_k is not None
    assert shell.calibrated_at_k is not None
    assert model.case.liquid.mean_temperature_k is not None
    read = model.case.readings.air_temperature_k
    return ShellGiven(
        model.case.liquid.mean_temperature_k,
        around.air_temperature_k if read is None else read,
        shell.insulated,
        shell.expansion_per_k,
        shell.calibrated_at_k,
        solid=state.grows_upright,
    )


def _roof(model: Model, state: State) -> RoofGiven | None:
    roof = model.case.tank.floating_roof
    if roof is None or state.surface_m < roof.floats_at_m:
        return None
    rho = float(model.density(state.surface_m, state))
    return RoofGiven(roof.mass_kg, rho, roof.included_at_kg_m3)


def _factor(model: Model, state: State, at_base: Standard) -> FactorGiven | None:
    if at_base.ctl is None or at_base.base_k is None:
        return None
    case, ctl = model.case, float(at_base.ctl)
    if case.readings.ctl is not None:
        return FactorGiven(ctl, "the user's own factor")
    product, temperatures = case.liquid.product, case.readings.temperatures
    layers = len(case.liquid.layers) - (0 if case.liquid.water_top_m is None else 1)
    pressure = case.liquid.pressure_factor
    if layers > 1:
        return FactorGiven(ctl, "standard over observed volume of all layers", pressure=pressure)
    if len(temperatures) > 1:
        source = f"{product.source}; integral of A CTL(T) dz over the volume"
        return FactorGiven(ctl, source, pressure=pressure)
    kelvin = case.liquid.mean_temperature_k
    return FactorGiven(ctl, product.source, product, kelvin, at_base.base_k, pressure)

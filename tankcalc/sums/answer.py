"""The working behind the answer to one set of readings."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging import evaluate
from tankcalc.gauging.amounts import free_water_m3
from tankcalc.gauging.estimate import FACTOR
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.solve import solve
from tankcalc.gauging.standard import Standard, standard
from tankcalc.gauging.state import Found
from tankcalc.geometry import LoadedVessel
from tankcalc.readings import Readings
from tankcalc.sums.book import Book, Rounding
from tankcalc.sums.given import FactorGiven, Given, HeadGiven, Line, RoofGiven, ShellGiven
from tankcalc.sums.working import working
from tankcalc.tank import Tank
from tankcalc.units import System

REFUSED = "The readings are refused: there is no working."
NO_BASE = (
    "No standard volume: the density profile gives none at a base temperature. Give a factor of "
    "your own, or the liquid's temperature where its model takes one."
)


@dataclass(frozen=True, slots=True)
class Sums:
    """The working.

    Attributes
    ----------
    rounding : str
        "as printed" or "unrounded".
    lines : tuple of Line
        Empty where the readings are refused.
    remark : str
        Why it ends where it does; empty where it ends at the weight of the standard volume.
    """

    rounding: Rounding
    lines: tuple[Line, ...]
    remark: str = ""


def sums(
    tank: Tank,
    fluid: Fluid,
    readings: Readings,
    rounding: Rounding = "as printed",
    system: System = "metric",
) -> Sums:
    """Return the working of the answer.

    Parameters
    ----------
    tank, fluid, readings
        As for ``evaluate``; single readings, not arrays.
    rounding : {"as printed", "unrounded"}
        See `tankcalc.sums.working`.
    system : {"metric", "us", "imperial"}
        Barrels and degF for "us", degF for "imperial"; masses are tonnes in all of them.
    """
    if evaluate(tank, fluid, readings).status == "refused":
        return Sums(rounding, (), REFUSED)
    model, found = solve(tank, fluid, readings)
    given = _given(tank, model, found)
    return Sums(rounding, working(given, Book.of(rounding, system)), given.remark)


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
    water_bare = _bare_water(tank, model, level, upright)
    grown = (total - water_bare) * (case.shell.factor or 1.0)
    stretch = _stretch_of(case.tank, level)
    factor = _factor(model, found, at_base)
    return Given(
        level_m=level,
        total_m3=total,
        total_of=_table_at(level, upright),
        water_m3=water_bare,
        water_level_m=case.liquid.water_top_m,
        stretch_m3=float(model.without_roof().volume(state)) - water - grown if stretch else 0.0,
        stretch_of=stretch,
        head=_head(model, found),
        shell=_shell(tank, model),
        roof=_roof(model, state),
        factor=factor,
        density_kg_m3=float(mass) / product if product > 0.0 else float(_at_surface(model, state)),
        density_of=_density_of(model, found),
        reference_kg_m3=None if at_base.density_kg_m3 is None else float(at_base.density_kg_m3),
        sediment_water=case.readings.sediment_water,
        remark="" if factor is not None else _why_not(at_base),
    )


def _table_at(level_m: float, upright: float) -> str:
    """Return where the table was read: a share of the height is at its place before the growth."""
    if upright == 1.0:
        return f"table at {level_m:.3f} m"
    return f"table at {level_m / upright:.4f} m: {level_m:.3f} m / {upright:.6f}, shell's growth"


def _why_not(at_base: Standard) -> str:
    if at_base.volume_m3 is not None and float(at_base.volume_m3) == 0.0:
        return "There is no product in the tank."
    return at_base.notices[0].message if at_base.notices else NO_BASE


def _at_surface(model: Model, state: State) -> float:
    return float(model.density(state.surface_m, state))


def _head(model: Model, found: Found) -> HeadGiven | None:
    """Return the pressure that the level rests on, None where it rests on another reading."""
    case, state, tag = model.case, found.state, found.by
    if tag not in case.fitted():
        return None
    dp = case.tank.dp
    if tag == "dp":
        assert dp is not None
        tap = dp.high.elevation_m
    else:
        tap = case.tank.transmitters[tag].elevation_m
    surface = model.vapour_pressure(state.surface_m, state)
    head = float(model.pressure(tap, state) - surface)
    reading = float(case.given[f"{tag}_pa"])
    return HeadGiven(tag, reading, head, case.conditions.gravity_m_s2, tap)


def _density_of(model: Model, found: Found) -> str:
    """Return where the density in the tank is from."""
    if any(g.fit is not None and FACTOR in g.fit.unknowns for g in found.groups):
        return "measured by the readings"
    if model.case.readings.density_kg_m3 is not None:
        return "as observed"
    return f"taken from the density profile: {model.case.liquid.product.source}"


def _stretch_of(tank: Tank, level_m: float) -> str:
    """Return what the stretch of the shell is made of; empty where it does not stretch."""
    vessel = tank.vessel
    stretch = vessel.stretch if isinstance(vessel, LoadedVessel) else None
    if stretch is None:
        return ""
    parts = []
    for course in stretch.courses:
        over, past = (max(level_m - z, 0.0) for z in (course.bottom_m, course.top_m))
        if over > 0.0:
            depths = f"{over:.3f}^2" + (f" - {past:.3f}^2" if past else "")
            size = f"{course.radius_m:.3f}^3 / {1000.0 * course.thickness_m:.1f} mm"
            parts.append(f"{size} x ({depths})")
    share = f"pi x {stretch.head_pa_m:.1f} Pa/m / {stretch.modulus_pa:.3g} Pa"
    return f"{share} x [{' + '.join(parts)}], less the water's part"


def _bare_water(tank: Tank, model: Model, surface_m: float, upright: float) -> float:
    """Return the free water as the bare table gives it, m3."""
    top = model.case.liquid.water_top_m
    if top is None:
        return 0.0
    low, high = tank.vessel.z_min, tank.vessel.z_max
    level = min(top, surface_m) / upright
    return float(tank.vessel.volume(min(max(level, low), high)))


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
    return RoofGiven(roof.mass_kg, _at_surface(model, state), roof.included_at_kg_m3)


def _factor(model: Model, found: Found, at_base: Standard) -> FactorGiven | None:
    if at_base.ctl is None or at_base.base_k is None:
        return None
    case, ctl = model.case, float(at_base.ctl)
    if case.readings.ctl is not None:
        return FactorGiven(ctl, "the user's own factor", own=True)
    liquid, base = case.liquid, at_base.base_k
    pressed, gauge = liquid.pressure_factor, liquid.gauge_pa
    layers = len(liquid.layers) - (0 if liquid.water_top_m is None else 1)
    if layers > 1:
        source = "standard over observed volume of all layers"
        return FactorGiven(ctl, source, base_k=base, pressure=pressed, gauge_pa=gauge)
    source = liquid.product.source
    if len(case.readings.temperatures) > 1 or case.column.bulk_modulus_pa is not None:
        squeezed = case.column.bulk_modulus_pa is not None
        over = "with the compression by its own weight" if squeezed else "over A(z) CTL(T(z)) dz"
        source = f"{source}, {over}"
        return FactorGiven(ctl, source, base_k=base, pressure=pressed, gauge_pa=gauge)
    # A density that was measured or observed is not rounded away: the factor is what it makes.
    plain = bool(np.all(found.state.factor == 1.0)) and case.readings.density_kg_m3 is None
    at = liquid.mean_temperature_k
    model_of = liquid.product if plain else None
    return FactorGiven(ctl, source, model_of, at, base, pressed, gauge)

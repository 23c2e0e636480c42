"""What is right but worth a look, and the contradictions between readings."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tankcalc.constants import ICE_POINT_K, STANDARD_GRAVITY_M_S2
from tankcalc.gauging.case import BoolArray, Case, FloatArray
from tankcalc.gauging.estimate import FACTOR
from tankcalc.gauging.groups import Group
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import UNSTATED_DIP_M, observations_of
from tankcalc.gauging.state import Found
from tankcalc.gauging.words import length, listed, pressure
from tankcalc.result import Notice
from tankcalc.tank import LIMIT_ORDER

CHI_SQUARE = (5.024, 7.378, 9.348, 11.143, 12.833, 14.449)
"""Values that chi-square with 1 to 6 degrees of freedom exceeds once in forty times: NIST/SEMATECH
e-Handbook of Statistical Methods, 1.3.6.7.4 (from memory). One false alarm in forty rather than
in twenty: a console asks the question at every reading."""

UNSTATED_SHARE = 0.003
"""What a volume or a mass that was given may be off by besides its level: the table's and the
density's share (common practice, no source)."""

DENSITY_WORTH_SAYING = 0.003
"""A measured density nearer to the profile's than this share is not mentioned."""

FRESH_WATER_KG_M3 = 999.0
"""What free water is taken to weigh where a message estimates how much of it there could be."""

APART = 3.0
"""A reading that was not needed is called apart beyond this many standard uncertainties."""

SHELL_WORTH_SAYING = 2e-4
"""A shell correction smaller than this share of the volume is not mentioned."""


def doubts(
    model: Model, found: Found, state: State, refused: BoolArray
) -> tuple[list[Notice], BoolArray]:
    """Return the notices on an answer, and the rows whose water lies above the surface.

    Parameters
    ----------
    state : State
        With surfaces inside the vessel also in refused rows.
    refused : array of bool
        Rows that have no answer; nothing is said of them.
    """
    case, level_m = model.case, state.surface_m
    notices = [*_surroundings(case), *_legs(case), *_vapour(found), *_uncomputed(case)]
    water, water_above = _water(case, level_m, ~refused)
    kept = ~refused & ~water_above
    notices += [*water, *_density(case, level_m, kept), *_limits(case, level_m, kept)]
    notices += [*_density_measured(model, found, kept), *_covered_p3(case, level_m, kept)]
    notices += [*_ranges(case, kept), *_misfit(found, kept), *_unneeded(model, found, state, kept)]
    return notices, water_above


def _where(mask: BoolArray) -> BoolArray | None:
    """Return the rows a notice applies to; None for a single reading."""
    return mask if mask.ndim else None


def _surroundings(case: Case) -> Iterator[Notice]:
    around = case.tank.surroundings
    if around.gravity_from == "standard":
        yield Notice(
            "gravity_standard",
            f"The site states no gravity: {STANDARD_GRAVITY_M_S2} m/s2 is used, which may be off "
            "by 0.27 %. Give a latitude and a height in site.toml.",
        )
    if around.air_from == "assumed":
        yield Notice(
            "air_assumed",
            f"The site does not state its air fully: {around.air_density_kg_m3:.3f} kg/m3 is used.",
        )
    needs_barometer = any(t.reads == "absolute" for t in case.tank.transmitters.values())
    unread = case.readings.barometer_pa is None
    if needs_barometer and unread and around.outside_pressure_from == "assumed":
        yield Notice(
            "barometer_assumed",
            f"An absolute transmitter needs the barometer: {pressure(around.outside_pressure_pa)} "
            "is assumed. Give the barometer.",
            "barometer",
        )


def _vapour(found: Found) -> Iterator[Notice]:
    """Say so where the pressures foretold rest on an unread vapour pressure."""
    if found.vapour_assumed:
        yield Notice(
            "vapour_pressure_assumed",
            "p3 was not read: what the transmitters should read is given for outside pressure "
            "above the liquid.",
            "p3",
        )


def _legs(case: Case) -> Iterator[Notice]:
    if case.legs_known_by == "assumed":
        yield Notice(
            "leg_temperature_assumed",
            "Nothing states the temperature of the legs: their fill is taken as stated. Give the "
            "leg's or the air's temperature.",
            "leg_temperature",
        )


def _covered_p3(case: Case, level_m: FloatArray, kept: BoolArray) -> Iterator[Notice]:
    """Say so where the surface is above p3's tap: an overfill, or foam."""
    p3 = case.tank.transmitters.get("p3")
    if p3 is None:
        return
    covered = (level_m > p3.elevation_m) & kept
    if np.any(covered):
        yield Notice(
            "p3_covered",
            f"The surface is above p3's tap at {length(p3.elevation_m)}: p3 is under liquid. An "
            "overfill, foam, or a wrong reading.",
            "p3",
            where=_where(covered),
        )


def _uncomputed(case: Case) -> Iterator[Notice]:
    if case.readings.sediment_water is not None:
        yield Notice(
            "sediment_water_unused",
            "Sediment and water are not taken off by this version: no figure is net of them.",
            "sediment_water",
        )
    shell, liquid_k = case.tank.shell, case.liquid.temperature_k
    if shell is None or liquid_k is None:
        return
    if shell.expansion_per_k is None or shell.calibrated_at_k is None:
        return
    share = 2.0 * shell.expansion_per_k * (liquid_k - shell.calibrated_at_k)
    if abs(share) > SHELL_WORTH_SAYING:
        yield Notice(
            "shell_not_corrected",
            f"The shell was calibrated at {shell.calibrated_at_k - ICE_POINT_K:.1f} degC; at the "
            f"liquid's {liquid_k - ICE_POINT_K:.1f} degC it holds about {100.0 * share:+.3f} %. "
            "This version does not correct for it.",
        )


def _water(case: Case, level_m: FloatArray, kept: BoolArray) -> tuple[list[Notice], BoolArray]:
    """Return the notices on free water, and the rows where it was read above the surface."""
    none = np.zeros(level_m.shape, dtype=bool)
    read, top = case.readings.water_level_m, case.liquid.water_top_m
    if top is None:
        return [], none
    above = (level_m < top) & kept
    if not np.any(above):
        return [], none
    if read is None:
        message = (
            f"The surface is below {length(top)}, where {case.liquid.layers[0].name} ends in the "
            "profile: all of the liquid is taken as that."
        )
        return [Notice("layer_not_reached", message, "", where=_where(above))], none
    message = (
        f"The water level, {length(read)}, is above the surface that the other readings give "
        f"({length(float(np.min(level_m[above])))}). One of them is wrong."
    )
    refusal = Notice("water_above_surface", message, "water_level", True, _where(above))
    return [refusal], above


def _density(case: Case, level_m: FloatArray, kept: BoolArray) -> Iterator[Notice]:
    if not np.any(kept):
        return
    top, bottom = float(np.max(level_m[kept])), case.tank.vessel.z_min
    rises_at = case.column.rising_density_below(top, bottom)
    if rises_at is not None:
        yield Notice(
            "density_inverted",
            f"The density profile grows heavier upwards from {length(rises_at)}: such a column "
            "does not stand still. Check the samples or the order of the layers.",
            "fluid",
        )


def _density_measured(model: Model, found: Found, kept: BoolArray) -> Iterator[Notice]:
    """Compare a density that the readings gave with that of the profile."""
    for group in found.groups:
        if group.fit is None or FACTOR not in group.fit.unknowns:
            continue
        if "density" in {o.name for o in group.used}:
            continue
        uncertainty = group.fit.uncertainty(FACTOR)
        away = group.fit.state.factor - 1.0
        apart = np.zeros(kept.size, dtype=bool)
        apart[group.rows] = np.abs(away) > np.maximum(APART * uncertainty, DENSITY_WORTH_SAYING)
        apart = apart.reshape(kept.shape) & kept
        if not np.any(apart):
            continue
        first = int(np.argmax(np.abs(away)))
        factor = float(group.fit.state.factor[first])
        surface = float(group.fit.state.surface_m[first])
        rho = float(model.product.density(surface))
        message = (
            f"The readings give {factor * rho:.1f} kg/m3 where the profile says {rho:.1f} "
            f"({100.0 * (factor - 1.0):+.2f} %): another batch, another temperature, or"
        )
        yield Notice(
            "density_differs",
            f"{message} {_lookalike(model, group, factor, rho)}.",
            "density",
            where=_where(apart),
        )


def _lookalike(model: Model, group: Group, factor: float, rho: float) -> str:
    """Return in words what else would look like such a density."""
    names = {o.name for o in group.used}
    if factor < 1.0 or not {"p1", "p2"} <= names or model.water is not None or rho > 990.0:
        return "an instrument that is off"
    taps = model.case.tank.transmitters
    apart_m = taps["p2"].elevation_m - taps["p1"].elevation_m
    water_m = apart_m * (factor - 1.0) * rho / (FRESH_WATER_KG_M3 - rho)
    if water_m > apart_m:
        return "an instrument that is off"
    return (
        f"{water_m:.2f} m of free water above p1, which looks the same: a mixture, not a density. "
        "A water dip would settle it"
    )


def _limits(case: Case, level_m: FloatArray, kept: BoolArray) -> Iterator[Notice]:
    limits = case.tank.limits_m
    for name in reversed(LIMIT_ORDER[2:]):
        if name in limits and np.any(over := (level_m > limits[name]) & kept):
            words = name.replace("_", "-" if name == "high_high" else " ")
            yield Notice(
                f"above_{name}",
                f"The level is above the {words} level, {length(limits[name])}.",
                "level",
                where=_where(over),
            )
            break
    for name in LIMIT_ORDER[:2]:
        if name in limits and np.any(under := (level_m < limits[name]) & kept):
            words = name.replace("_", "-" if name == "low_low" else " ")
            yield Notice(
                f"below_{name}",
                f"The level is below the {words} level, {length(limits[name])}.",
                "level",
                where=_where(under),
            )
            break


def _ranges(case: Case, kept: BoolArray) -> Iterator[Notice]:
    """Say so where a reading lies outside what its transmitter is ranged for."""
    for tag in case.fitted():
        fitted = case.tank.dp if tag == "dp" else case.tank.transmitters[tag]
        if fitted is None or fitted.range_pa is None or f"{tag}_pa" not in case.given:
            continue
        low, high = fitted.range_pa
        reading = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
        outside = ((reading < low) | (reading > high)) & kept
        if np.any(outside):
            yield Notice(
                "outside_range",
                f"{tag} = {pressure(float(reading[outside].flat[0]))} is outside its range, "
                f"{pressure(low)} to {pressure(high)}: the transmitter may be saturated.",
                tag,
                where=_where(outside),
            )


def _misfit(found: Found, kept: BoolArray) -> Iterator[Notice]:
    """Say so where more readings than unknowns do not agree within their uncertainties."""
    for group in found.groups:
        if group.fit is None or not group.fit.freedom:
            continue
        allowed = CHI_SQUARE[min(group.fit.freedom, len(CHI_SQUARE)) - 1]
        apart = np.zeros(kept.size, dtype=bool)
        apart[group.rows] = group.fit.chi_square > allowed
        apart = apart.reshape(kept.shape) & kept
        if np.any(apart):
            worst = float(np.max(group.fit.chi_square))
            names = listed([o.name for o in group.used])
            yield Notice(
                "disagreement",
                f"{names} do not agree within their uncertainties (chi-square {worst:.1f}, "
                f"at most {allowed:.1f} is ordinary): at least one of them is wrong.",
                group.used[0].name,
                where=_where(apart),
            )


def _unneeded(model: Model, found: Found, state: State, kept: BoolArray) -> Iterator[Notice]:
    """Compare every reading that had no part in the estimate with what the answer foretells."""
    fitted = {o.name for g in found.groups if g.fit is not None for o in g.used}
    g = model.gravity
    for observation in observations_of(model):
        if observation.name in fitted:
            continue
        foretold = observation.expected(state)
        away = observation.value - foretold
        if observation.name in ("level", "ullage"):
            per_metre: FloatArray | float = 1.0
        elif observation.name == "density":
            continue
        else:
            per_metre = g * model.density(state.surface_m, state)
        allowed = APART * np.hypot(observation.uncertainty, UNSTATED_DIP_M * per_metre)
        apart = (np.abs(away) > allowed) & kept
        if np.any(apart):
            first = np.flatnonzero(np.ravel(apart))[0]
            read = float(np.ravel(observation.value)[first])
            wanted = float(np.ravel(foretold)[first])
            shown = pressure if observation.name[0] in "pd" else length
            millimetres = 1000.0 * float(np.ravel(away / per_metre)[first])
            yield Notice(
                "disagreement",
                f"{observation.name} is {shown(read)}; for this answer it should be "
                f"{shown(wanted)} ({millimetres:+.0f} mm of liquid).",
                observation.name,
                where=_where(apart),
            )
    yield from _amount_apart(model, found, state, kept)


def _amount_apart(model: Model, found: Found, state: State, kept: BoolArray) -> Iterator[Notice]:
    """Compare a volume or a mass that had no part in the estimate with that of the answer."""
    case, vessel = model.case, model.case.tank.vessel
    area = np.asarray(vessel.area(state.surface_m))
    volume, product, water = model.contents(state)
    surface_density = model.density(state.surface_m, state)
    for name, foretold, per_metre in (
        ("volume_m3", volume, area),
        ("mass_kg", product + water, area * surface_density),
    ):
        if name not in case.given or found.by == name:
            continue
        reading = np.broadcast_to(case.given[name], case.shape)
        allowed = APART * UNSTATED_DIP_M * per_metre + UNSTATED_SHARE * foretold
        apart = (np.abs(reading - foretold) > allowed) & kept
        if np.any(apart):
            first = np.flatnonzero(np.ravel(apart))[0]
            what, unit = name.split("_")
            yield Notice(
                "disagreement",
                f"{what} was given as {float(np.ravel(reading)[first]):.6g} {unit}; for this "
                f"answer it is {float(np.ravel(foretold)[first]):.6g} {unit}.",
                what,
                where=_where(apart),
            )

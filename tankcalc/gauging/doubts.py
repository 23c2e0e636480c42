"""What is right but worth a look."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tankcalc.constants import STANDARD_GRAVITY_M_S2
from tankcalc.gauging.boiling import boiling
from tankcalc.gauging.case import BoolArray, Case, FloatArray
from tankcalc.gauging.comparisons import density_measured, misfit, unneeded, where_of
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.state import Found
from tankcalc.gauging.words import length, pressure
from tankcalc.result import Notice
from tankcalc.tank import LIMIT_ORDER

FAR_FROM_TABLE = 0.3
"""Share by which the liquid may differ from the density a capacity table allows for (common
practice: national rules for stationary tanks state 30 %, seen in one of them)."""


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
    notices = [*_surroundings(case), *_legs(case), *_vapour(found), *_shell(model)]
    notices += boiling(model, state, ~refused)
    water, water_above = _water(case, level_m, ~refused)
    kept = ~refused & ~water_above
    notices += [*water, *_density(case, level_m, kept), *_limits(case, level_m, kept)]
    notices += [*density_measured(model, found, kept), *_covered_p3(case, level_m, kept)]
    notices += [*_ranges(case, kept), *misfit(found, kept), *unneeded(model, found, state, kept)]
    return notices, water_above


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
            where=where_of(covered),
        )


def _shell(model: Model) -> Iterator[Notice]:
    """Say so where the shell's temperature is not known, or the liquid is none of its table's."""
    case = model.case
    if case.shell.expands and case.shell.temperature_k is None:
        yield Notice(
            "shell_temperature_unknown",
            "The liquid's temperature was not given: the shell is taken at that of its "
            "calibration.",
            "temperature",
        )
    table = case.shell.table_density_kg_m3
    if table is None:
        return
    mean = float(np.mean(model.density(case.tank.vessel.z_min, _plain_state())))
    if abs(mean / table - 1.0) > FAR_FROM_TABLE:
        yield Notice(
            "table_density",
            f"The liquid's {mean:.0f} kg/m3 is more than 30 % from the {table:.0f} kg/m3 that the "
            "capacity table was made for.",
            "fluid",
        )


def _plain_state() -> State:
    """Return a state for the profile's own density."""
    one = np.ones(())
    return State(one, one, one)


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
        return [Notice("layer_not_reached", message, "", where=where_of(above))], none
    message = (
        f"The water level, {length(read)}, is above the surface that the other readings give "
        f"({length(float(np.min(level_m[above])))}). One of them is wrong."
    )
    refusal = Notice("water_above_surface", message, "water_level", True, where_of(above))
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


def _limits(case: Case, level_m: FloatArray, kept: BoolArray) -> Iterator[Notice]:
    limits = case.tank.limits_m
    for name in reversed(LIMIT_ORDER[2:]):
        if name in limits and np.any(over := (level_m > limits[name]) & kept):
            words = name.replace("_", "-" if name == "high_high" else " ")
            yield Notice(
                f"above_{name}",
                f"The level is above the {words} level, {length(limits[name])}.",
                "level",
                where=where_of(over),
            )
            break
    for name in LIMIT_ORDER[:2]:
        if name in limits and np.any(under := (level_m < limits[name]) & kept):
            words = name.replace("_", "-" if name == "low_low" else " ")
            yield Notice(
                f"below_{name}",
                f"The level is below the {words} level, {length(limits[name])}.",
                "level",
                where=where_of(under),
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
                where=where_of(outside),
            )

"""What is right but worth a look, and the contradictions between readings."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from tankcalc.constants import ICE_POINT_K, STANDARD_GRAVITY_M_S2
from tankcalc.gauging.case import BoolArray, Case, FloatArray
from tankcalc.gauging.surface import Surface
from tankcalc.gauging.words import length, pressure
from tankcalc.instruments import Accuracy
from tankcalc.result import Notice
from tankcalc.tank import LIMIT_ORDER

UNSTATED_ACCURACY_PA = 100.0
"""Standard uncertainty taken for a transmitter whose accuracy is not stated: 0.1 % of 100 kPa
(common practice, no source)."""

UNSTATED_ACCURACY_M = 0.005
"""Standard uncertainty taken for a level by dip or gauge (common practice, no source), m."""

SHELL_WORTH_SAYING = 2e-4
"""A shell correction smaller than this share of the volume is not mentioned."""


def doubts(
    case: Case, surface: Surface, level_m: FloatArray, refused: BoolArray
) -> tuple[list[Notice], BoolArray]:
    """Return the notices on an answer, and the rows whose water lies above the surface.

    Parameters
    ----------
    level_m : array
        Surfaces, m, inside the vessel also in refused rows.
    refused : array of bool
        Rows that have no answer; nothing is said of them.
    """
    notices = [*_surroundings(case), *_vapour(case, surface), *_uncomputed(case)]
    water, water_above = _water(case, level_m, ~refused)
    kept = ~refused & ~water_above
    notices += [*water, *_density(case, level_m, kept), *_limits(case, level_m, kept)]
    notices += [*_ranges(case, kept), *_disagreements(case, surface, level_m, kept)]
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


def _vapour(case: Case, surface: Surface) -> Iterator[Notice]:
    """Say so where the pressures foretold rest on an unread vapour pressure."""
    if case.vapour_space.known_by == "assumed":
        yield Notice(
            "vapour_pressure_assumed",
            "p3 was not read: what the transmitters should read is given for outside pressure "
            "above the liquid.",
            "p3",
        )


def _uncomputed(case: Case) -> Iterator[Notice]:
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


def _disagreements(
    case: Case, surface: Surface, level_m: FloatArray, kept: BoolArray
) -> Iterator[Notice]:
    """Compare every reading that was not needed with what the answer foretells."""
    per_metre = float(np.max(case.column.density(level_m))) * case.conditions.gravity_m_s2
    for tag in case.fitted():
        name = f"{tag}_pa"
        if name not in case.given or name == surface.by:
            continue
        if tag == "p3" and case.vapour_space.known_by == "p3":
            continue
        foretold = case.expected(tag, level_m)
        reading = np.broadcast_to(case.given[name], case.shape)
        fitted = case.tank.dp if tag == "dp" else case.tank.transmitters[tag]
        own = _standard_uncertainty_pa(fitted.accuracy if fitted else None, reading)
        allowed = 2.0 * np.hypot(own, UNSTATED_ACCURACY_M * per_metre)
        apart = (np.abs(reading - foretold) > allowed) & kept
        if np.any(apart):
            read, wanted = float(reading[apart].flat[0]), float(foretold[apart].flat[0])
            yield Notice(
                "disagreement",
                f"{tag} reads {pressure(read)}; for this answer it should read {pressure(wanted)}"
                f" ({1000.0 * (read - wanted) / per_metre:+.0f} mm of liquid).",
                tag,
                where=_where(apart),
            )
    yield from _level_disagreements(case, surface, level_m, kept)


def _standard_uncertainty_pa(accuracy: Accuracy | None, reading: FloatArray) -> FloatArray:
    """Return the standard uncertainty (Pa) of readings, from what is stated of the instrument."""
    if accuracy is None or accuracy.fixed <= 0.0:
        return np.full(reading.shape, UNSTATED_ACCURACY_PA)
    return np.full(reading.shape, accuracy.fixed / accuracy.coverage)


def _level_disagreements(
    case: Case, surface: Surface, level_m: FloatArray, kept: BoolArray
) -> Iterator[Notice]:
    vessel = case.tank.vessel
    foretold = {
        "level_m": level_m,
        "ullage_m": case.tank.ullage_reference_m - level_m,
        "volume_m3": np.asarray(vessel.volume(level_m)),
    }
    for name, wanted in foretold.items():
        if name not in case.given or name == surface.by:
            continue
        reading = np.broadcast_to(case.given[name], case.shape)
        size = np.asarray(vessel.area(level_m)) if name == "volume_m3" else 1.0
        apart = (
            np.abs(reading - wanted) > 2.0 * math.sqrt(2.0) * UNSTATED_ACCURACY_M * size
        ) & kept
        if np.any(apart):
            what, unit = name.rsplit("_", 1)
            yield Notice(
                "disagreement",
                f"{what} was given as {float(reading[apart].flat[0]):.6g} {unit}; for this answer "
                f"it is {float(wanted[apart].flat[0]):.6g} {unit}.",
                what,
                where=_where(apart),
            )

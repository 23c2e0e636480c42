"""Everything an answer depends on, with what it is worth."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from tankcalc.gauging.case import Case
from tankcalc.gauging.estimate import FACTOR
from tankcalc.gauging.model import Model
from tankcalc.gauging.observations import UNSTATED_DENSITY_KG_M3
from tankcalc.gauging.state import Found

GRAVITY_SHARE = {"value": 1e-5, "latitude": 5e-5, "standard": 1.5e-3}
"""Relative standard uncertainty of gravity: measured; normal gravity against the true local value
(50 mGal, from memory); the standard value anywhere on land."""

AIR_KG_M3 = {"density": 0.02, "state": 0.02, "assumed": 0.06}
"""Standard uncertainty of the outside air's density by how it is known (common practice)."""

BAROMETER_PA = {"read": 50.0, "value": 1000.0, "height": 1000.0, "assumed": 2000.0}
"""Standard uncertainty of the outside pressure: read; or the weather's spread about a stated
one (common practice, no source)."""

ELEVATION_M = 0.003
"""Standard uncertainty of a surveyed elevation (common practice, no source), m."""

VAPOUR_SHARE = 0.1
"""Relative standard uncertainty of a stated vapour (common practice, no source)."""

GEOMETRY_SHARE = 0.001
"""Relative standard uncertainty of a vessel's capacity without a certificate: half the 0.2 % limit
of vertical tanks in OIML R 71 (the limit from memory)."""

TEMPERATURE_K = 0.5
"""Standard uncertainty of the liquid's mean temperature, K (common practice, no source)."""

ASSUMED_TEMPERATURE_K = 5.0
"""The same where the temperature was not read but taken from the air, K."""

LEG_TEMPERATURE_K = {"read": 3.0, "air": 5.0, "assumed": 15.0}
"""Standard uncertainty of a leg's mean temperature, K: read; taken from the air; nothing known
of it (common practice, no source)."""

ROOF_SHARE = 0.02
"""Relative standard uncertainty of a roof's mass with the water, snow and fittings on it (common
practice, no source)."""

WATER_LEVEL_M = {True: 0.003, False: 0.05}
"""Standard uncertainty of the free water's top: read; taken from the profile, m."""


@dataclass(frozen=True, slots=True)
class Input:
    """One input of an answer.

    Attributes
    ----------
    name : str
        In words.
    kind : str
        What `spread` moves: "reading", "gravity", "air", "barometer", "vapour", "elevation",
        "factor", "geometry", "leg", "roof", "water", or "base", which moves the standard volume
        alone.
    uncertainty : float
        Standard uncertainty, SI; relative for "factor", "vapour" and "geometry".
    dimension : str
        Dimension of the uncertainty.
    stated : bool
        False where common practice was taken.
    """

    name: str
    kind: str
    uncertainty: float
    dimension: str
    stated: bool = True


def inputs_of(model: Model, found: Found) -> list[Input]:
    """Return the inputs of the answer to one set of readings."""
    return [one for one in _inputs(model, found) if one.uncertainty > 0.0]


def _inputs(model: Model, found: Found) -> Iterator[Input]:
    case = model.case
    group = found.groups[0] if found.groups else None
    used = group.used if group is not None and group.fit is not None else ()
    by_pressure = any(o.name in case.fitted() for o in used)
    for o in used:
        dimension = "pressure" if o.name in case.fitted() else "length"
        if o.name == "density":
            dimension = "fraction"
        yield Input(
            o.name, "reading", float(np.ravel(o.uncertainty)[0]), dimension, _stated(case, o.name)
        )
    if by_pressure:
        yield from _around(case)
        yield from _elevations(case, {o.name for o in used})
        yield from _legs(case)
        yield from _vapour(model, found)
    free = group.fit.unknowns if group is not None and group.fit is not None else ()
    if FACTOR not in free:
        yield from _density(model, found)
    else:
        yield from _temperature(model, "base")
    if case.liquid.water_top_m is not None:
        read = case.readings.water_level_m is not None
        yield Input("water level", "water", WATER_LEVEL_M[read], "length", stated=False)
    roof = case.tank.floating_roof
    if roof is not None and found.state.surface_m > roof.lands_at_m:
        yield Input("roof", "roof", ROOF_SHARE * roof.mass_kg, "mass", stated=False)
    certificate = case.tank.table
    share = certificate.uncertainty if certificate is not None else None
    yield Input(
        "geometry",
        "geometry",
        GEOMETRY_SHARE if share is None else share,
        "fraction",
        share is not None,
    )


def _stated(case: Case, name: str) -> bool:
    if name in ("level", "ullage"):
        return case.tank.level_gauge is not None
    if name == "density":
        return False
    fitted = case.tank.dp if name == "dp" else case.tank.transmitters[name]
    return fitted is not None and fitted.accuracy is not None


def _known(name: str, kind: str, own: float | None, usual: float, dimension: str) -> Input:
    """Return an input with its stated uncertainty, or the usual one."""
    return Input(name, kind, usual if own is None else own, dimension, own is not None)


def _vapour(model: Model, found: Found) -> Iterator[Input]:
    vapour = model.case.tank.vapour or model.case.fluid.vapour
    if vapour is None:
        return
    own = vapour.uncertainty_kg_m3
    rho = float(model.vapour_density(found.state.vapour_pa))
    share = None if own is None or rho == 0.0 else own / rho
    yield _known("vapour density", "vapour", share, VAPOUR_SHARE, "fraction")


def _around(case: Case) -> Iterator[Input]:
    around = case.tank.surroundings
    usual = GRAVITY_SHARE[around.gravity_from] * around.gravity_m_s2
    yield _known("gravity", "gravity", around.gravity_uncertainty_m_s2, usual, "acceleration")
    usual = AIR_KG_M3[around.air_from]
    yield _known("outside air", "air", around.air_uncertainty_kg_m3, usual, "density")
    kinds = {t.reads for t in case.tank.transmitters.values()}
    vented_absolute = "p3" not in case.tank.transmitters and "absolute" in kinds
    if kinds == {"gauge", "absolute"} or vented_absolute:
        known = "read" if case.readings.barometer_pa is not None else around.outside_pressure_from
        yield Input("barometer", "barometer", BAROMETER_PA[known], "pressure", stated=False)


def _elevations(case: Case, used: set[str]) -> Iterator[Input]:
    for tag in case.fitted():
        if tag in used and tag != "dp":
            own = case.tank.transmitters[tag].elevation_uncertainty_m
            yield _known(f"{tag} elevation", "elevation", own, ELEVATION_M, "length")


def _legs(case: Case) -> Iterator[Input]:
    known = case.legs_known_by
    if known:
        kelvin = LEG_TEMPERATURE_K[known]
        yield Input("leg temperature", "leg", kelvin, "temperature_difference", stated=False)


def _density(model: Model, found: Found) -> Iterator[Input]:
    """Yield what a density that the readings do not give depends on: profile and temperature."""
    case = model.case
    rho = float(model.product.density(found.state.surface_m))
    if rho == 0.0:
        return  # the surface is within the free water: there is no product to be uncertain of
    own = case.liquid.layers[-1].uncertainty_kg_m3
    yield _known(
        "density",
        "factor",
        None if own is None else own / rho,
        UNSTATED_DENSITY_KG_M3 / rho,
        "fraction",
    )
    if case.liquid.layers[-1].model.needs_temperature:
        yield from _temperature(model, "factor")


def _temperature(model: Model, kind: str) -> Iterator[Input]:
    """Yield the liquid's temperature as the share of density that its uncertainty is worth."""
    case = model.case
    product, temperature = case.liquid.product, case.liquid.temperature_k
    if temperature is None or not product.needs_temperature:
        return
    low, high = product.limits_k
    around = np.clip([temperature - 0.5, temperature + 0.5], low, high)
    cold, warm = product.density(np.asarray(around))
    per_kelvin = abs(warm / cold - 1.0) / max(float(around[1] - around[0]), 1e-9)
    read = bool(case.readings.temperatures)
    accuracy = case.tank.thermometer
    kelvin = TEMPERATURE_K if read else ASSUMED_TEMPERATURE_K
    if read and accuracy is not None and accuracy.fixed > 0.0:
        kelvin = accuracy.fixed
    yield Input("temperature", kind, per_kelvin * kelvin, "fraction", accuracy is not None)

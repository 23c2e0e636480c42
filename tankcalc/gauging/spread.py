"""The same question many times over, with its inputs moved: rows of one array."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from tankcalc.gauging.amounts import free_water_m3
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.estimate import fit
from tankcalc.gauging.inputs import Input
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import observations_of
from tankcalc.gauging.standard import standard
from tankcalc.gauging.state import Found
from tankcalc.gauging.under_roof import surface_under_roof


def outputs_of_spread(
    model: Model, found: Found, inputs: Sequence[Input], deltas: FloatArray
) -> dict[str, FloatArray]:
    """Return the outputs, by JSON key, with every input moved.

    Parameters
    ----------
    model, found : Model, Found
        The answer to one set of readings.
    inputs : sequence of Input (n,)
        What is moved.
    deltas : array (rows, n)
        By how many standard uncertainties.

    Returns
    -------
    dict of str to array (rows,)
    """
    moved = {one.name: deltas[:, k] * one.uncertainty for k, one in enumerate(inputs)}
    kinds = {one.name: one.kind for one in inputs}
    rows = deltas.shape[0]
    other = _moved_model(model, moved, kinds, rows)
    factor = np.ones(rows)
    for name, kind in kinds.items():
        if kind == "factor":
            factor = factor * (1.0 + moved[name])
    state = _solved(other, found, factor, moved, rows)
    standard_of = _standard_volume(model, found, moved, kinds)
    outputs = _outputs(other, state, standard_of)
    if "water level" in moved:
        _add_water(model, found, outputs, moved["water level"], standard_of)
    scale = 1.0 + moved.get("geometry", np.zeros(rows))
    return {
        key: value * scale
        if key.endswith(("_m3", "_kg")) and not key.startswith("density")
        else value
        for key, value in outputs.items()
    }


def _moved_model(
    model: Model, moved: dict[str, FloatArray], kinds: dict[str, str], rows: int
) -> Model:
    """Return the model with readings, elevations and surroundings as arrays of rows."""
    case, none = model.case, np.zeros(rows)
    around: dict[str, Any] = {}
    for name, field in (
        ("gravity", "gravity_m_s2"),
        ("outside air", "air_density_kg_m3"),
        ("barometer", "barometer_pa"),
        ("leg temperature", "leg_temperature_k"),
    ):
        if name in moved:
            around[field] = getattr(case.conditions, field) + moved[name]
    transmitters = {
        tag: _raised(fitted, moved.get(f"{tag} elevation", none))
        for tag, fitted in case.tank.transmitters.items()
    }
    given = {
        name: np.broadcast_to(value, (rows,)) + moved.get(name.rsplit("_", 1)[0], none)
        for name, value in case.given.items()
    }
    roof = case.tank.floating_roof
    if roof is not None and "roof" in moved:
        heavier: Any = roof.mass_kg + moved["roof"]
        roof = replace(roof, mass_kg=heavier)
    tank = replace(case.tank, transmitters=transmitters, floating_roof=roof)
    conditions = replace(case.conditions, **around)
    other = replace(case, tank=tank, conditions=conditions, given=given, shape=(rows,))
    return Model(other, 1.0 + moved.get("vapour density", none))


def _raised(fitted: Any, by: FloatArray) -> Any:
    """Return a transmitter whose tap stands higher; without a leg its vent goes with it."""
    if not np.any(by):
        return fitted
    return replace(fitted, elevation_m=fitted.elevation_m + by)


def _solved(
    model: Model,
    found: Found,
    factor: FloatArray,
    moved: dict[str, FloatArray],
    rows: int,
) -> State:
    """Return the states of all rows, by the readings and unknowns of the answer itself."""
    base = found.state
    start = State(
        np.full(rows, float(base.surface_m)),
        float(base.factor) * factor,
        np.full(rows, float(base.vapour_pa)),
    )
    if model.vent_pa is not None:
        start = replace(start, vapour_pa=np.broadcast_to(model.vent_pa, (rows,)))
    group = found.groups[0] if found.groups else None
    if group is None or group.fit is None:
        return replace(start, surface_m=_direct_surface(model, found, factor, moved, rows))
    names = {o.name for o in group.used}
    observations = [o for o in observations_of(model) if o.name in names]
    if "density" in moved and "density" in names:
        observations = [
            replace(o, value=o.value + moved["density"]) if o.name == "density" else o
            for o in observations
        ]
    return fit(observations, start, group.fit.unknowns).state


def _direct_surface(
    model: Model,
    found: Found,
    factor: FloatArray,
    moved: dict[str, FloatArray],
    rows: int,
) -> FloatArray:
    """Return the surfaces of a given level, volume or mass, with what else it rests on moved."""
    vessel, given = model.case.tank.vessel, model.case.given
    size = 1.0 + moved.get("geometry", np.zeros(rows))
    if model.case.tank.floating_roof is not None and found.by in ("volume_m3", "mass_kg"):
        start = State(np.ones(rows), factor, np.ones(rows))
        amount = np.asarray(given[found.by] / size)
        return surface_under_roof(model, start, amount, by_mass=found.by == "mass_kg")
    if found.by == "volume_m3":
        volume = given["volume_m3"] / size
        least = float(vessel.volume(vessel.z_min))
        return np.asarray(vessel.level(np.clip(volume, least, vessel.capacity)))
    if found.by == "mass_kg":
        mass = given["mass_kg"] / (size * factor)
        least, most = model.case.filling.mass(np.array([vessel.z_min, vessel.z_max]))
        return model.case.filling.level_from_mass(np.clip(mass, least, most))
    level = found.state.surface_m + moved.get("level", 0.0) - moved.get("ullage", 0.0)
    return np.broadcast_to(level, (rows,))


StandardVolume = Callable[[State, FloatArray, FloatArray], FloatArray]
"""Standard volume of states, from the product's volume (m3) and mass (kg); NaN where unknown."""


def _standard_volume(
    model: Model, found: Found, moved: dict[str, FloatArray], kinds: dict[str, str]
) -> StandardVolume:
    """Return how the standard volume follows from a moved answer.

    Notes
    -----
    Mass over reference density. The reference density moves with the density, but not with the
    temperature where it is stated and the density in the tank follows from it; where the readings
    show the density in the tank, the temperature moves the reference. Both to first order.
    """
    base = replace(found.state, surface_m=np.clip(found.state.surface_m, *_ends(model)))
    volume, product, _ = model.contents(base)
    at_base = standard(model, base, volume - free_water_m3(model.case, base.surface_m), product)
    own, reference = model.case.readings.ctl, at_base.density_kg_m3
    warmed: FloatArray | float = 1.0
    for name, kind in kinds.items():
        if name == "temperature":
            warmed = warmed * (1.0 + moved[name] * (1.0 if kind == "factor" else -1.0))

    def volume_of(state: State, volume_m3: FloatArray, mass_kg: FloatArray) -> FloatArray:
        if own is not None:
            return volume_m3 * own
        if reference is None:
            return np.full(volume_m3.shape, np.nan)
        scale = state.factor / float(base.factor)
        if state.factor.shape == np.shape(warmed):
            scale = scale / warmed
        return np.asarray(mass_kg / (float(reference) * scale))

    return volume_of


def _ends(model: Model) -> tuple[float, float]:
    return model.case.tank.vessel.z_min, model.case.tank.vessel.z_max


def _outputs(model: Model, state: State, standard_of: StandardVolume) -> dict[str, FloatArray]:
    """Return level, volumes, masses and density of states; a surface past an end is at the end."""
    inside = replace(state, surface_m=np.clip(state.surface_m, *_ends(model)))
    volume, product, water = model.contents(inside)
    water_volume = free_water_m3(model.case, inside.surface_m)
    mass = product + water
    with np.errstate(divide="ignore", invalid="ignore"):
        density = np.where(volume > 0.0, mass / volume, 0.0)
    return {
        "level_m": state.surface_m,
        "volume_m3": volume,
        "product_volume_m3": volume - water_volume,
        "mass_kg": mass,
        "product_mass_kg": product,
        "density_kg_m3": density,
        "standard_volume_m3": standard_of(state, volume - water_volume, product),
    }


def _add_water(
    model: Model,
    found: Found,
    outputs: dict[str, FloatArray],
    moved_m: FloatArray,
    standard_of: StandardVolume,
) -> None:
    """Add the effect of the water's top: its layer ends elsewhere, so two columns are solved."""
    top = model.case.liquid.water_top_m
    assert top is not None
    step, ends = 0.001, []
    for side in (-step, step):
        case = model.case
        read = replace(case.readings, water_level_m=top + side)
        moved_case = replace(Case.of(case.tank, case.fluid, read), shape=(1,))
        other = Model(moved_case, model.vapour_scale)
        ends.append(_outputs(other, _solved(other, found, np.ones(1), {}, 1), standard_of))
    for key, value in outputs.items():
        slope = float((ends[1][key] - ends[0][key])[0]) / (2.0 * step)
        outputs[key] = value + slope * moved_m

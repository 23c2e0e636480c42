"""The same question many times over, with its inputs moved: rows of one array."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.estimate import fit
from tankcalc.gauging.inputs import Input
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.observations import observations_of
from tankcalc.gauging.state import Found


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
    outputs = _outputs(other, state)
    if "water level" in moved:
        _add_water(model, found, outputs, moved["water level"])
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
    tank = replace(case.tank, transmitters=transmitters)
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


def _outputs(model: Model, state: State) -> dict[str, FloatArray]:
    """Return level, volumes, masses and density of states; a surface past an end is at the end."""
    vessel = model.case.tank.vessel
    inside = replace(state, surface_m=np.clip(state.surface_m, vessel.z_min, vessel.z_max))
    volume, product, water = model.contents(inside)
    top = model.case.liquid.water_top_m
    water_volume: FloatArray | float = 0.0
    if top is not None:
        held = min(max(top, vessel.z_min), vessel.z_max)
        water_volume = vessel.volume(np.minimum(inside.surface_m, held))
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
    }


def _add_water(
    model: Model, found: Found, outputs: dict[str, FloatArray], moved_m: FloatArray
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
        ends.append(_outputs(other, _solved(other, found, np.ones(1), {}, 1)))
    for key, value in outputs.items():
        slope = float((ends[1][key] - ends[0][key])[0]) / (2.0 * step)
        outputs[key] = value + slope * moved_m

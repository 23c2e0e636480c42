"""The product at its base temperature: standard volume, reference density, the factor between."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import RangeError
from tankcalc.fluids.column import Column
from tankcalc.fluids.models import DensityModel
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.model import Model, State
from tankcalc.hydrostatics import Filling
from tankcalc.result import Notice


@dataclass(frozen=True, slots=True)
class Standard:
    """The product at its base temperature; arrays of the readings' shape, None where not known.

    Attributes
    ----------
    base_k : float or None
        Base temperature, K.
    volume_m3 : array or None
        Gross standard volume: what the product would fill at the base temperature.
    density_kg_m3 : array or None
        Its density there: mass / volume.
    ctl : array or None
        Standard volume against the volume in the tank, its pressure correction taken out.
    notices : tuple of Notice
        Why it is not known, where that is not plain from the profile.
    """

    base_k: float | None = None
    volume_m3: FloatArray | None = None
    density_kg_m3: FloatArray | None = None
    ctl: FloatArray | None = None
    notices: tuple[Notice, ...] = ()


UNKNOWN = Standard()

HALVINGS = 50
"""Rounds in which a temperature between the coldest and the warmest element is found."""


def standard(model: Model, state: State, volume_m3: FloatArray, mass_kg: FloatArray) -> Standard:
    """Return the product at its base temperature.

    Parameters
    ----------
    volume_m3, mass_kg : array
        The product in the tank, without free water and without what a roof displaces.

    Notes
    -----
    One composition at many temperatures: the integral of A(z) CTL(T(z)) dz is the mass over the
    reference density, because rho(z) = rho_ref CTL(T(z)). So no mean temperature enters, but
    where the readings show another density than the profile's: the liquid observed is then
    brought to the base temperature by its model, from the temperature at which the model has the
    mean density of the liquid, the integral of A rho(T(z)) dz over the volume. Layers are added.
    A correction factor that the user gives replaces all of this.
    """
    case = model.case
    models = _models(case)
    bases = {_base_k(one, case) for one in models}
    if case.readings.ctl is not None:
        base = bases.pop() if len(bases) == 1 else case.tank.surroundings.standard_temperature_k
        return _with(base, volume_m3 * case.readings.ctl, volume_m3, mass_kg, 1.0)
    if len(bases) > 1:
        message = "The layers' densities are stated at several base temperatures: their standard "
        message += "volumes do not add."
        return Standard(notices=(Notice("standard_bases_differ", message, "fluid"),))
    base = bases.pop()
    if not all(_known(one, base, case) for one in models):
        return UNKNOWN
    try:
        total = _standard_volume(model, state, models, base, mass_kg)
    except RangeError as error:
        message = f"The volume at {base - ICE_POINT_K:.2f} degC is not known: {error}"
        return Standard(notices=(Notice("standard_unknown", message, "fluid"),))
    return _with(base, total, volume_m3, mass_kg, case.liquid.pressure_factor)


def _with(
    base_k: float,
    standard_m3: FloatArray,
    volume_m3: FloatArray,
    mass_kg: FloatArray,
    pressure_factor: float,
) -> Standard:
    with np.errstate(divide="ignore", invalid="ignore"):
        # An empty tank has neither a density nor a factor.
        density = np.where(standard_m3 > 0.0, mass_kg / standard_m3, np.nan)
        ctl = np.where(volume_m3 > 0.0, standard_m3 / (volume_m3 * pressure_factor), np.nan)
    known = bool(np.any(np.isfinite(density)))
    return Standard(base_k, standard_m3, density if known else None, ctl if known else None)


def _models(case: Case) -> list[DensityModel]:
    """Return the models of the product's layers, as their profiles have them."""
    above_water = 0 if case.liquid.water_top_m is None else 1
    layers = case.liquid.layers[above_water:]
    return [*(layer.model for layer in layers[:-1]), case.liquid.product]


def _base_k(model: DensityModel, case: Case) -> float:
    stated = model.base_k
    return case.tank.surroundings.standard_temperature_k if stated is None else stated


def _known(model: DensityModel, base_k: float, case: Case) -> bool:
    """Return whether a model tells the density at the base temperature and at the tank's."""
    low, high = model.limits_k
    read = case.liquid.mean_temperature_k
    return model.needs_temperature and read is not None and low <= base_k <= high


def _standard_volume(
    model: Model, state: State, models: list[DensityModel], base_k: float, mass_kg: FloatArray
) -> FloatArray:
    """Return the sum over the product's layers of mass over reference density, m3."""
    first = len(model.case.liquid.layers) - len(models)
    total, rest = np.zeros(mass_kg.shape), mass_kg
    for index, one in enumerate(models[:-1], start=first):
        layer = _layer_mass(model, state, index)
        total = total + layer / _reference(model, state, one, base_k, index)
        rest = rest - layer
    last = first + len(models) - 1
    return np.asarray(total + rest / _reference(model, state, models[-1], base_k, last))


def _layer_mass(model: Model, state: State, index: int) -> FloatArray:
    case = model.case
    alone = [0.0] * len(case.liquid.layers)
    alone[index] = 1.0
    filling = Filling(case.tank.vessel, case.column.scaled(alone), model.gravity)
    return np.asarray(state.factor * filling.mass(state.surface_m))


def _reference(
    model: Model, state: State, of: DensityModel, base_k: float, index: int
) -> FloatArray:
    """Return the density of a layer's liquid at the base temperature, kg/m3."""
    liquid = model.case.liquid
    top = index == len(liquid.layers) - 1
    observed = model.case.readings.density_kg_m3 if top else None
    if observed is None and np.all(state.factor == 1.0):
        return of.checked_density(np.asarray(base_k))
    kelvin = _temperature_k(model, state, of, index)
    own = of.checked_density(kelvin) if observed is None else np.asarray(observed)
    pairs = np.stack(np.broadcast_arrays(state.factor * own, kelvin), axis=-1).reshape(-1, 2)
    different, where = np.unique(pairs, axis=0, return_inverse=True)
    found = of.standard_density(different[:, 0], different[:, 1], base_k)
    return np.asarray(found)[np.ravel(where)].reshape(state.factor.shape)


def _temperature_k(model: Model, state: State, of: DensityModel, index: int) -> FloatArray:
    """Return the one temperature (K) at which a layer would be as dense as it is on the whole.

    Of several temperatures: where the model's density is its mean over the layer, weighted by
    the area at every elevation.
    """
    temperatures = model.case.liquid.temperatures
    assert temperatures is not None
    coldest, warmest = min(temperatures.values_k), max(temperatures.values_k)
    if coldest == warmest:
        return np.asarray(coldest)
    wanted = _mean_density(model, state, of, index)
    left = np.full(wanted.shape, coldest)
    right = np.full(wanted.shape, warmest)
    falls = bool(of.density(np.asarray(warmest)) < of.density(np.asarray(coldest)))
    for _ in range(HALVINGS):
        middle = 0.5 * (left + right)
        warmer = (of.density(middle) > wanted) == falls
        left, right = np.where(warmer, middle, left), np.where(warmer, right, middle)
    return np.asarray(0.5 * (left + right))


def _mean_density(model: Model, state: State, of: DensityModel, index: int) -> FloatArray:
    """Return the mean density (kg/m3) of a model's liquid in a layer, at the temperatures there."""
    case = model.case
    layers, vessel = case.liquid.layers, case.tank.vessel.unstretched
    column = Column.of([(of.pieces(case.liquid.temperatures), np.inf)])
    filling = Filling(vessel, column, model.gravity)
    below = vessel.z_min if index == 0 else layers[index - 1].top_m
    above = layers[index].top_m
    assert below is not None
    low = np.minimum(np.clip(below, vessel.z_min, vessel.z_max), state.surface_m)
    high = state.surface_m if above is None else np.minimum(state.surface_m, above)
    high = np.maximum(high, low)
    volume = np.asarray(vessel.volume(high)) - np.asarray(vessel.volume(low))
    mass = filling.mass(high) - filling.mass(low)
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = mass / volume
    return np.where(volume > 0.0, mean, column.density(high))

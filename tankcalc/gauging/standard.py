"""The product at its base temperature: standard volume, reference density, the factor between."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import RangeError
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
    brought to the base temperature by its model, from the mean temperature. Layers are added.
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
    if len(models) == 1:
        return np.asarray(mass_kg / _reference(model, state, models[0], base_k, top=True))
    total, rest = np.zeros(mass_kg.shape), mass_kg
    first = len(model.case.liquid.layers) - len(models)
    for index, one in enumerate(models[:-1]):
        layer = _layer_mass(model, state, first + index)
        total = total + layer / _reference(model, state, one, base_k, top=False)
        rest = rest - layer
    return np.asarray(total + rest / _reference(model, state, models[-1], base_k, top=True))


def _layer_mass(model: Model, state: State, index: int) -> FloatArray:
    case = model.case
    alone = [0.0] * len(case.liquid.layers)
    alone[index] = 1.0
    filling = Filling(case.tank.vessel, case.column.scaled(alone), model.gravity)
    return np.asarray(state.factor * filling.mass(state.surface_m))


def _reference(
    model: Model, state: State, of: DensityModel, base_k: float, *, top: bool
) -> FloatArray:
    """Return the density of a layer's liquid at the base temperature, kg/m3."""
    observed = model.case.readings.density_kg_m3 if top else None
    if observed is None and np.all(state.factor == 1.0):
        return of.checked_density(np.asarray(base_k))
    temperature = np.asarray(model.case.liquid.mean_temperature_k)
    own = of.checked_density(temperature) if observed is None else observed
    factors, where = np.unique(state.factor, return_inverse=True)
    found = of.standard_density(factors * own, temperature, base_k)
    return np.asarray(found)[where].reshape(state.factor.shape)

"""Readings as observations of the state: value, standard uncertainty, what the model foretells."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.model import Model, Slopes, State
from tankcalc.instruments import Accuracy, DifferentialTransmitter, Transmitter

UNSTATED_PRESSURE_PA = 100.0
"""Standard uncertainty of a transmitter of which neither accuracy nor range is stated (common
practice, no source)."""

UNSTATED_OF_SPAN = 0.001
"""Standard uncertainty of a transmitter with a range but no accuracy, as a share of its span
(common practice, no source)."""

UNCERTAIN_SIGNAL = 0.05
"""Standard uncertainty of a signal between the measuring range and failure, as a share of span:
about the width of those bands (common practice, no source)."""

UNSTATED_DIP_M = 0.003
"""Standard uncertainty of a dip or a level gauge of unstated accuracy (common practice, no
source), m."""

UNSTATED_DENSITY_KG_M3 = 1.0
"""Standard uncertainty of an observed density (common practice, no source), kg/m3."""

CALIBRATION_K = 293.15
"""Ambient temperature at which accuracies are stated (common practice, no source), K."""


@dataclass(frozen=True, slots=True)
class Observation:
    """One reading as the estimate sees it.

    Attributes
    ----------
    name : str
        Name of the reading: "p1", "level", "density".
    value, uncertainty : array
        In the reading's own SI unit; standard uncertainty.
    expected : callable
        What the model foretells for a state.
    slopes : callable
        Its derivatives by surface, factor and vapour pressure.
    """

    name: str
    value: FloatArray
    uncertainty: FloatArray
    expected: Callable[[State], FloatArray]
    slopes: Callable[[State], Slopes]


def accuracy_of(
    accuracy: Accuracy | None,
    reading: FloatArray,
    span: tuple[float, float] | None,
    ambient_k: float | None,
    unstated: float,
) -> FloatArray:
    """Return the standard uncertainty of readings from what the maker states.

    Parameters
    ----------
    accuracy : Accuracy or None
        None: the ``unstated`` uncertainty.
    reading : array
        In the instrument's SI unit.
    span : (float, float) or None
        Range of the instrument, same unit.
    ambient_k : float or None
        Temperature around the instrument, K; the effect per kelvin counts from 20 degC.
    unstated : float
        Standard uncertainty where nothing is stated.

    Notes
    -----
    The fixed part is a standard uncertainty. Parts of span, limit and reading are divided by the
    coverage factor; temperature effect and drift are limits of rectangular distributions and are
    divided by the square root of three (JCGM 100:2008, 4.3.7). All are added in squares.
    """
    if accuracy is None:
        return np.full(reading.shape, unstated)
    low, high = span or (0.0, 0.0)
    limit = max(abs(low), abs(high))
    away = 0.0 if ambient_k is None else ambient_k - CALIBRATION_K
    squares = accuracy.fixed**2
    squares += (accuracy.of_span * (high - low) / accuracy.coverage) ** 2
    squares += (accuracy.of_limit * limit / accuracy.coverage) ** 2
    squares += (accuracy.per_kelvin * away) ** 2 / 3.0 + accuracy.drift**2 / 3.0
    with np.errstate(invalid="ignore"):
        # An infinite reading is refused later, as what it is.
        of_reading = accuracy.of_reading * reading / accuracy.coverage
        return np.asarray(np.sqrt(squares + of_reading**2))


def pressure_uncertainty(
    case: Case, fitted: Transmitter | DifferentialTransmitter, reading: FloatArray
) -> FloatArray:
    """Return the standard uncertainty of a transmitter's readings, Pa."""
    unstated = UNSTATED_PRESSURE_PA
    if fitted.range_pa is not None:
        unstated = UNSTATED_OF_SPAN * (fitted.range_pa[1] - fitted.range_pa[0])
    ambient = case.conditions.leg_temperature_k
    own = accuracy_of(fitted.accuracy, reading, fitted.range_pa, ambient, unstated)
    if fitted.range_pa is not None and (fitted.tag, "uncertain") in case.readings.signals:
        low, high = fitted.range_pa
        own = np.hypot(own, UNCERTAIN_SIGNAL * (high - low))
    return np.asarray(own)


def observations_of(model: Model) -> list[Observation]:
    """Return the observations that the readings make of the state."""
    case = model.case
    found = [_pressure(model, tag) for tag in case.fitted() if f"{tag}_pa" in case.given]
    found += [_level(case, name) for name in ("level_m", "ullage_m") if name in case.given]
    if case.readings.density_kg_m3 is not None:
        found.append(_density(case, case.readings.density_kg_m3))
    return found


def _pressure(model: Model, tag: str) -> Observation:
    case = model.case
    fitted = case.tank.dp if tag == "dp" else case.tank.transmitters[tag]
    assert fitted is not None
    value = np.broadcast_to(case.given[f"{tag}_pa"], case.shape)
    return Observation(
        tag,
        value,
        pressure_uncertainty(case, fitted, value),
        lambda state: model.expected(tag, state),
        lambda state: model.slopes(tag, state),
    )


def _level(case: Case, name: str) -> Observation:
    """Return a level or ullage as an observation of the surface, in m of level."""
    reading = np.broadcast_to(case.given[name], case.shape)
    ullage = name == "ullage_m"
    value = case.tank.ullage_reference_m - reading if ullage else reading
    uncertainty = accuracy_of(case.tank.level_gauge, value, None, None, UNSTATED_DIP_M)

    def slopes(state: State) -> Slopes:
        zero = np.zeros(state.surface_m.shape)
        return np.ones(state.surface_m.shape), zero, zero

    return Observation(
        name.rsplit("_", 1)[0], value, uncertainty, lambda state: state.surface_m, slopes
    )


def _density(case: Case, observed_kg_m3: float) -> Observation:
    """Return an observed density as an observation of the factor: it is the profile's density."""
    share = UNSTATED_DENSITY_KG_M3 / observed_kg_m3

    def slopes(state: State) -> Slopes:
        zero = np.zeros(state.surface_m.shape)
        return zero, np.ones(state.surface_m.shape), zero

    return Observation(
        "density",
        np.ones(case.shape),
        np.full(case.shape, share),
        lambda state: state.factor,
        slopes,
    )

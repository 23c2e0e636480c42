"""From observations to the state: which unknowns they determine, and their best values."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from tankcalc.gauging.case import BoolArray, FloatArray
from tankcalc.gauging.model import State
from tankcalc.gauging.observations import Observation

SURFACE, FACTOR, VAPOUR = 0, 1, 2
"""Places of the unknowns in a state."""

LARGEST_FACTOR_UNCERTAINTY = 0.05
"""Readings that leave the density less certain than this share do not determine it."""

EXACT = 1e-10
"""Residuals this small, in standard uncertainties, are rounding."""

ROUNDS = 40


@dataclass(frozen=True, slots=True)
class Fit:
    """The state that fits the observations best.

    Attributes
    ----------
    state : State
        Arrays of the readings' shape.
    unknowns : tuple of int
        Which of surface, factor and vapour pressure were free.
    chi_square : array
        Sum of the squared residuals, each in its standard uncertainty.
    freedom : int
        Observations less unknowns.
    observations : tuple of Observation
        What was fitted.
    """

    state: State
    unknowns: tuple[int, ...]
    chi_square: FloatArray
    freedom: int
    observations: tuple[Observation, ...]

    def uncertainty(self, unknown: int) -> FloatArray:
        """Return the standard uncertainty of an unknown, from those of the observations alone."""
        slopes = weighted_slopes(self.observations, self.state, self.unknowns)
        place = self.unknowns.index(unknown)
        return np.asarray(np.linalg.norm(_pseudo_inverse(slopes)[..., place, :], axis=-1))


def weighted_slopes(
    observations: Sequence[Observation], state: State, unknowns: Sequence[int]
) -> FloatArray:
    """Return the derivatives of the observations over their uncertainty, (..., n, unknowns)."""
    slopes = [(o.slopes(state), o.uncertainty) for o in observations]
    columns = [np.stack([s[k] / u for s, u in slopes], axis=-1) for k in unknowns]
    return np.stack(columns, axis=-1)


def weighted_residuals(observations: Sequence[Observation], state: State) -> FloatArray:
    """Return observation less model, over the uncertainty, (..., n)."""
    return np.stack([(o.value - o.expected(state)) / o.uncertainty for o in observations], axis=-1)


def determined(
    observations: Sequence[Observation], state: State, unknowns: Sequence[int]
) -> BoolArray:
    """Return in which rows the observations determine the unknowns, near a state of rows.

    The weighted derivatives must have full rank, and the density must come out better than
    `LARGEST_FACTOR_UNCERTAINTY`.
    """
    rows = state.surface_m.shape
    if len(observations) < len(unknowns):
        return np.zeros(rows, dtype=bool)
    slopes = weighted_slopes(observations, state, unknowns)
    size = np.linalg.norm(slopes, axis=-2, keepdims=True)
    felt = np.all(size[..., 0, :] > 0.0, axis=-1)
    scaled = slopes / np.where(size > 0.0, size, 1.0)
    full = felt & (np.linalg.svd(scaled, compute_uv=False)[..., -1] > 1e-9)
    if FACTOR not in unknowns:
        return np.asarray(full)
    place = list(unknowns).index(FACTOR)
    inverse = np.linalg.pinv(scaled) / np.swapaxes(np.where(size > 0.0, size, 1.0), -1, -2)
    uncertainty = np.linalg.norm(inverse[..., place, :], axis=-1)
    return np.asarray(full & (uncertainty < LARGEST_FACTOR_UNCERTAINTY))


def fit(observations: Sequence[Observation], start: State, unknowns: Sequence[int]) -> Fit:
    """Return the state that fits best, by weighted least squares.

    Parameters
    ----------
    observations : sequence of Observation
        At least as many as unknowns; they determine them.
    start : State
        Where to begin; what is not unknown keeps its value.
    unknowns : sequence of int
        Which of `SURFACE`, `FACTOR`, `VAPOUR` are free.

    Notes
    -----
    Gauss-Newton on the sum of squared residuals over standard uncertainties. The model is
    linear in factor and pressure and piecewise quadratic in the surface, so that a few steps
    suffice; with as many observations as unknowns the residuals vanish.
    """
    state = start
    for _ in range(ROUNDS):
        residuals = weighted_residuals(observations, state)
        if not np.any(np.abs(residuals) > EXACT):
            break
        slopes = weighted_slopes(observations, state, unknowns)
        step = _least_squares(slopes, residuals)
        values = [state.surface_m, state.factor, state.vapour_pa]
        for place, k in enumerate(unknowns):
            values[k] = values[k] + step[..., place]
        state = State(*values)
        if _still(step, unknowns):
            break
    freedom = len(observations) - len(unknowns)
    chi_square = np.zeros(start.surface_m.shape)
    if freedom:
        chi_square = np.sum(weighted_residuals(observations, state) ** 2, axis=-1)
    return Fit(state, tuple(unknowns), chi_square, freedom, tuple(observations))


def _pseudo_inverse(slopes: FloatArray) -> FloatArray:
    """Return the left inverse of the weighted derivatives, columns scaled to one first."""
    size = np.linalg.norm(slopes, axis=-2, keepdims=True)
    size = np.where(size > 0.0, size, 1.0)
    return np.asarray(np.linalg.pinv(slopes / size) / np.swapaxes(size, -1, -2))


def _least_squares(slopes: FloatArray, residuals: FloatArray) -> FloatArray:
    return np.asarray((_pseudo_inverse(slopes) @ residuals[..., None])[..., 0])


def _still(step: FloatArray, unknowns: Sequence[int]) -> bool:
    """Return whether a step moves nothing that could be measured."""
    small = {SURFACE: 1e-11, FACTOR: 1e-13, VAPOUR: 1e-8}
    moved = [np.abs(step[..., place]) > small[k] for place, k in enumerate(unknowns)]
    return not np.any(moved)

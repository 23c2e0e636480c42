"""What a caller gives: a float or an array of any shape, to be answered in kind."""

from __future__ import annotations

from typing import TypeAlias

import numpy as np
import numpy.typing as npt

from tankcalc.errors import RangeError
from tankcalc.geometry.body import Array

Given: TypeAlias = float | npt.NDArray[np.floating]

CHUNK = 8192
"""Figures worked on at a time, so that what lies between stays in the cache."""


def flat(given: Given) -> Array:
    """Return what was given as a flat array of floats."""
    return np.asarray(given, dtype=np.float64).ravel()


def as_given(given: Given, answer: Array) -> float | Array:
    """Return a flat answer in the shape of what was given; a float for a float.

    Examples
    --------
    >>> as_given(2.0, np.array([4.0]))
    4.0
    >>> as_given(np.array([[1.0], [2.0]]), np.array([1.0, 4.0])).tolist()
    [[1.0], [4.0]]
    """
    shape = np.shape(given)
    return answer.reshape(shape) if shape else float(answer[0])


def chunks(values: Array) -> list[slice]:
    """Return slices that cover a flat array, each of `CHUNK` figures at most."""
    return [slice(at, at + CHUNK) for at in range(0, values.size, CHUNK)]


def held(values: Array, low: float, high: float) -> Array:
    """Return the values with those outside by no more than rounding put on the limit."""
    return np.minimum(np.maximum(values, low), high)


def refuse_outside(
    values: Array, limits: tuple[float, float], rounding: float, words: tuple[str, str, str]
) -> None:
    """Refuse values outside limits, beyond rounding, and what is no number.

    Parameters
    ----------
    values : ndarray
        Flat.
    limits : tuple of float
        Lowest and highest.
    rounding : float
        How far outside is still taken as the limit.
    words : tuple of str
        The quantity, its unit, and what has the limits.

    Raises
    ------
    RangeError
        With the worst of the values.

    Examples
    --------
    >>> refuse_outside(np.array([13.0]), (0.0, 12.0), 1e-9, ("An elevation", "m", "the vessel"))
    Traceback (most recent call last):
    tankcalc.errors.RangeError: An elevation of 13 m is above the vessel (0 m to 12 m).
    """
    if not values.size:
        return
    (low, high), (what, unit, holder) = limits, words
    least, most = float(values.min()), float(values.max())
    if least >= low - rounding and most <= high + rounding:
        return
    if np.isnan(least):
        raise RangeError(f"{what} is not a number.")
    worst, side = (least, "below") if least < low - rounding else (most, "above")
    raise RangeError(
        f"{what} of {worst:.6g} {unit} is {side} {holder} ({low:.6g} {unit} to {high:.6g} {unit})."
    )

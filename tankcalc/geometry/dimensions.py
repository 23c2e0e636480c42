"""Checks on the dimensions of a vessel; every refusal names the key of the tank file."""

from __future__ import annotations

import math

from tankcalc.errors import GeometryError

SMALLEST_M = 1e-6
"""A dimension below a micrometre is a slip, and its square is lost beside the others."""

LARGEST_M = 1e4
"""No vessel is ten kilometres across."""


def length(key: str, value_m: float) -> float:
    """Return a dimension that a vessel can have.

    Parameters
    ----------
    key : str
        The dimension's name in the tank file.
    value_m : float
        What was given, m.

    Returns
    -------
    float
        The same, m; from `SMALLEST_M` to `LARGEST_M`.

    Raises
    ------
    GeometryError
        The dimension is not a number, not above zero, or absurd.

    Examples
    --------
    >>> length("diameter", 20)
    20.0
    >>> length("diameter", -1)
    Traceback (most recent call last):
    tankcalc.errors.GeometryError: diameter: must be above zero; it is -1 m.
    """
    if not math.isfinite(value_m):
        raise GeometryError(key, "must be a finite length.")
    if value_m <= 0.0:
        raise GeometryError(key, f"must be above zero; it is {value_m:g} m.")
    if not SMALLEST_M <= value_m <= LARGEST_M:
        raise GeometryError(
            key, f"{value_m:g} m is no dimension of a vessel ({SMALLEST_M:g} m to {LARGEST_M:g} m)."
        )
    return float(value_m)


def length_or_zero(key: str, value_m: float) -> float:
    """Return a dimension that may also be zero, m; see `length`."""
    return 0.0 if value_m == 0.0 else length(key, value_m)


def elevation(key: str, value_m: float) -> float:
    """Return an elevation above the datum, m, of either sign; see `length` for the refusals."""
    if not math.isfinite(value_m):
        raise GeometryError(key, "must be a finite elevation.")
    if abs(value_m) > LARGEST_M:
        raise GeometryError(key, f"{value_m:g} m is more than {LARGEST_M:g} m away from the datum.")
    return float(value_m)


def at_most(key: str, value_m: float, limit_m: float, of_what: str) -> None:
    """Refuse a dimension above its limit.

    Examples
    --------
    >>> at_most("bottom.depth", 3.0, 2.0, "the radius")
    Traceback (most recent call last):
    tankcalc.errors.GeometryError: bottom.depth: 3 m is more than the radius, 2 m.
    """
    if value_m > limit_m:
        raise GeometryError(key, f"{value_m:g} m is more than {of_what}, {limit_m:g} m.")


def at_least(key: str, value_m: float, limit_m: float, of_what: str) -> None:
    """Refuse a dimension below its limit."""
    if value_m < limit_m:
        raise GeometryError(key, f"{value_m:g} m is less than {of_what}, {limit_m:g} m.")

"""Spheres and spheroids with an upright axis."""

from __future__ import annotations

import math

import numpy as np

from tankcalc.geometry.dimensions import length
from tankcalc.geometry.outlines import turned
from tankcalc.geometry.polynomial import PiecewisePolynomial, Slab
from tankcalc.geometry.vessel import Vessel


def sphere(diameter_m: float) -> Vessel:
    """Return a spherical vessel.

    Parameters
    ----------
    diameter_m : float
        Inside diameter, m. Elevation 0 is the lowest inside point.

    Returns
    -------
    Vessel
        In closed form: V = pi h^2 (3 R - h) / 3.

    Raises
    ------
    GeometryError
        An impossible diameter (key "diameter").

    Examples
    --------
    >>> round(sphere(10.0).capacity, 6)
    523.598776
    """
    diameter = length("diameter", diameter_m)
    return _round("sphere", diameter, diameter)


def spheroid(diameter_m: float, height_m: float) -> Vessel:
    """Return a spheroid, round in plan, its axis upright.

    Parameters
    ----------
    diameter_m : float
        Largest inside diameter, m.
    height_m : float
        Inside height, m; more or less than the diameter. Elevation 0 is the lowest point.

    Returns
    -------
    Vessel
        In closed form: V = pi a^2 h^2 (3 c - h) / (3 c^2), a and c the semi-axes.

    Raises
    ------
    GeometryError
        An impossible dimension (keys "diameter", "height").

    Examples
    --------
    >>> round(spheroid(12.0, 10.0).volume(6.0), 6)
    488.580489
    """
    return _round("spheroid", length("diameter", diameter_m), length("height", height_m))


def _round(kind: str, diameter: float, height: float) -> Vessel:
    k = math.pi * (diameter / height) ** 2
    body = PiecewisePolynomial.of([Slab(0.0, height, 0.0, k * height, -k)])
    psi = np.linspace(0.0, np.pi, 49)
    profile = np.column_stack([height * np.sin(0.5 * psi) ** 2, 0.5 * diameter * np.sin(psi)])
    return Vessel(kind, body, turned(profile))

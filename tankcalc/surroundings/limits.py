"""Refusal of what cannot be on this earth."""

from __future__ import annotations

from tankcalc.errors import InputError


def check(what: str, value: float, limits: tuple[float, float], unit: str) -> float:
    """Return a value that is within limits; refuse another (and NaN) by name."""
    low, high = limits
    if not low <= value <= high:
        raise InputError(f"{what}: {value:.6g} is not between {low:g} and {high:g} {unit}.")
    return value

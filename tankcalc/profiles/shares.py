"""A table of fractions that make a whole: a gas by its components, a food by its constituents."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from pydantic_core import CoreSchema

from tankcalc import units
from tankcalc.errors import QuantityError
from tankcalc.profiles.findings import show
from tankcalc.profiles.leaves import UnfitError, leaf

Pairs = tuple[tuple[str, float], ...]


def shares(check: Callable[[Mapping[str, float]], Pairs], example: str) -> CoreSchema:
    """Return the schema of names with fractions, which a function checks and puts in order."""

    def read(value: object) -> Pairs:
        if not isinstance(value, dict) or not value:
            raise UnfitError(
                f"a table of names and fractions is wanted, such as {example}, found {show(value)}."
            )
        return check({name: _share(name, held) for name, held in value.items()})

    return leaf(read)


def gases(fractions: Mapping[str, float]) -> Pairs:
    """Return the components of a gas, checked against those known."""
    from tankcalc.fluids.components import composition

    return composition(fractions)


def foods(fractions: Mapping[str, float]) -> Pairs:
    """Return the constituents of a food, checked against those known."""
    from tankcalc.fluids.constituents import Constituents

    return Constituents(tuple(fractions.items())).mass_fractions


def _share(name: str, held: object) -> float:
    if isinstance(held, bool) or not isinstance(held, (int, float, str)):
        raise UnfitError(f"{show(name)} wants a fraction, such as 0.92, found {show(held)}.")
    try:
        share = units.si(held, "fraction") if isinstance(held, str) else held
    except QuantityError as error:
        raise UnfitError(f"{show(name)}: {error}") from None
    if not 0.0 <= share <= 1.0:
        raise UnfitError(f"{show(name)}: {show(held)} is not between 0 and 1.")
    return float(share)

"""Units outside the table, by their full name only: the one place that imports pint.

pint evaluates what it is given (powers, products, thousands of digits) and reads symbols where a
letter's case is a factor of a thousand million (mPa, MPa). So it is asked only for the size of a
name that is already known to be a plain unit: a metric name with its prefix written out, or one
of a short list.
"""

from __future__ import annotations

import re
from functools import cache
from typing import TYPE_CHECKING, Any, Final

from tankcalc.units.table import Unit

if TYPE_CHECKING:
    from collections.abc import Sequence

_METRIC: Final = re.compile(
    r"(?:nano|micro|milli|centi|deci|deca|hecto|kilo|mega|giga)?"
    r"(?:pascal|bar|metre|meter|litre|liter|gram|ampere)s?"
)
# What is the same in every country; no pints, no hundredweights, no miles of a survey.
_OTHERS: Final = re.compile(
    r"yards?|international miles?|nautical miles?|hectares?"
    r"|square (?:foot|feet|inch|inches|yards?)"
    r"|cubic (?:centimeters?|foot|feet|inch|yards?)"
    r"|imperial (?:pints?|quarts?)"
    r"|standard atmospheres?|technical atmospheres?|long hundredweights?"
    r"|mile per hour|kilometer per hour|meter per second"
)

_SI_UNIT: Final = {
    "length": "m",
    "area": "m**2",
    "volume": "m**3",
    "mass": "kg",
    "pressure": "Pa",
    "current": "A",
    "speed": "m/s",
}
"""Dimensions with units of a name of their own; the others have compounds, all in the table."""


def beyond_table(word: str, dimensions: Sequence[str]) -> Unit | None:
    """Return the unit of a full name ("decibar", "cubic yards"), or None if it is none of them."""
    name = word.lower()
    if _METRIC.fullmatch(name) is None and _OTHERS.fullmatch(name) is None:
        return None
    for dimension in dimensions:
        factor = _factor(name.replace(" ", "_"), dimension)
        if factor is not None:
            return Unit(name, dimension, factor)
    return None


@cache
def _factor(name: str, dimension: str) -> float | None:
    """Return the SI value of one; None if the unit is of another dimension."""
    registry = _registry()
    if dimension not in _SI_UNIT or name not in registry:
        return None
    one = registry.Quantity(1.0, name)
    si_unit = _SI_UNIT[dimension]
    return float(one.to(si_unit).magnitude) if one.is_compatible_with(si_unit) else None


@cache
def _registry() -> Any:
    import pint

    return pint.UnitRegistry()

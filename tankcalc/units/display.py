"""SI to text: the unit and the decimals that suit what is measured, in the site's own system."""

from __future__ import annotations

import math
from typing import Final, Literal, NamedTuple

from tankcalc.units.table import WORDS, Unit

System = Literal["metric", "us", "imperial"]
"""A system of units to show; what is stored is SI."""


class _Shown(NamedTuple):
    """How a quantity is shown while its size is below ``below`` (SI); decimals -1: 4 figures."""

    unit: str
    decimals: int
    below: float = math.inf


# The last decimal is about what an instrument resolves: 1 mm, 1 Pa, 0.01 kg/m3, 1 L, 1 kg.
_METRIC: Final[dict[str, tuple[_Shown, ...]]] = {
    "length": (_Shown("m", 3),),
    "area": (_Shown("m2", 3),),
    "volume": (_Shown("m3", 3, below=1000.0), _Shown("m3", 2)),
    "mass": (_Shown("kg", 2, below=1000.0), _Shown("t", 3)),
    "pressure": (_Shown("kPa", 3, below=1e8), _Shown("MPa", 1)),
    "density": (_Shown("kg/m3", 2),),
    "temperature": (_Shown("degC", 1),),
    "temperature_difference": (_Shown("K", 2),),
    "time": (_Shown("s", 0, below=120.0), _Shown("min", 0, below=7200.0), _Shown("h", 1)),
    "angle": (_Shown("deg", 4),),
    "fraction": (_Shown("%", 2),),
    "dimensionless": (_Shown("1", -1),),
    "current": (_Shown("mA", 3),),
    "acceleration": (_Shown("m/s2", 5),),
    "expansion": (_Shown("1/K", -1),),
    "molar_mass": (_Shown("g/mol", 3),),
    "volume_flow": (_Shown("m3/h", 2),),
    "mass_flow": (_Shown("t/h", 3),),
    "speed": (_Shown("m/h", 3),),
    "pressure_per_temperature": (_Shown("Pa/K", -1),),
}
_FEET_AND_POUNDS: Final[dict[str, tuple[_Shown, ...]]] = _METRIC | {
    "length": (_Shown("ft", 3),),
    "area": (_Shown("ft2", 2),),
    "mass": (_Shown("lb", 2, below=500.0), _Shown("lb", 0)),
    "pressure": (_Shown("psi", 4, below=1e8), _Shown("ksi", 2)),
    "density": (_Shown("lb/ft3", 3),),
    "temperature": (_Shown("degF", 1),),
    "temperature_difference": (_Shown("degF", 2),),
    "expansion": (_Shown("1/degF", -1),),
    "mass_flow": (_Shown("lb/h", 0),),
    "speed": (_Shown("ft/h", 2),),
    "pressure_per_temperature": (_Shown("psi/degF", -1),),
}
_SHOWN: Final[dict[str, dict[str, tuple[_Shown, ...]]]] = {
    "metric": _METRIC,
    "us": _FEET_AND_POUNDS
    | {
        "volume": (_Shown("US gal", 2, below=1.0), _Shown("US gal", 1)),
        "volume_flow": (_Shown("US gal/min", 1),),
    },
    "imperial": _FEET_AND_POUNDS
    | {
        "volume": (_Shown("imp gal", 2, below=1.0), _Shown("imp gal", 1)),
        "volume_flow": (_Shown("imp gal/min", 1),),
    },
}

BASES: Final = ((288.15, "15 degC"), (293.15, "20 degC"), (273.15 + 28.0 / 1.8, "60 degF"))
"""Base temperatures (K) that have a name."""

UNIT_FOR: Final[dict[str, dict[str, str]]] = {
    system: {dimension: shown[-1].unit for dimension, shown in table.items()}
    for system, table in _SHOWN.items()
}
"""By system and dimension: the unit in which larger quantities are shown."""


def show(si: float, dimension: str, system: System = "metric", *, digits: int | None = None) -> str:
    """Return an SI value as text with its unit, rounded half away from zero.

    Without ``digits`` the decimals suit what is measured and, outside the metric system, a length
    is in feet, inches and sixteenths. With it, that many decimals of the unit.

    Raises
    ------
    ValueError
        If the value is not finite: there is no honest text for it.

    Examples
    --------
    >>> show(12.3456, "length"), show(12.3456, "length", "us")
    ('12.346 m', '40 ft 6 1/16 in')
    >>> show(98_234.5, "pressure"), show(98_234.5, "pressure", digits=1)
    ('98.235 kPa', '98.2 kPa')
    """
    if not math.isfinite(si):
        raise ValueError(f"{dimension} to be shown is not finite")
    if dimension == "length" and system != "metric" and digits is None:
        return _feet_and_sixteenths(si)
    size = abs(si)
    shown = next(step for step in _SHOWN[system][dimension] if size < step.below)
    number = _named(shown.unit, dimension).from_si(si)
    decimals = shown.decimals if digits is None else digits
    text = f"{number:.4g}" if decimals < 0 else _rounded(number, decimals)
    return text if shown.unit == "1" else f"{text} {shown.unit}"


def base_words(kelvin: float, fahrenheit: bool) -> str:
    """Return a base temperature (K) as people name it; another one to a decimal of its degree.

    Examples
    --------
    >>> base_words(288.15, True), base_words(273.15 + 28 / 1.8, False), base_words(298.15, False)
    ('15 degC', '60 degF', '25.0 degC')
    """
    for named, words in BASES:
        if math.isclose(kelvin, named, rel_tol=0.0, abs_tol=1e-6):
            return words
    return show(kelvin, "temperature", "us" if fahrenheit else "metric")


def to_unit(si: float, unit: str, dimension: str | None = None) -> float:
    """Return an SI value as a number of a unit.

    ``dimension`` is needed only to make a temperature *difference* of "degC" or "degF".

    Examples
    --------
    >>> to_unit(98_200.0, "kPa"), to_unit(5.0, "degF", "temperature_difference")
    (98.2, 9.0)
    """
    return _named(unit, dimension).from_si(si)


def from_unit(number: float, unit: str, dimension: str | None = None) -> float:
    """Return a number of a unit as an SI value; ``dimension`` as for `to_unit`.

    Examples
    --------
    >>> from_unit(18.0, "degC"), from_unit(1.0, "oil bbl")
    (291.15, 0.158987294928)
    """
    return _named(unit, dimension).to_si(number)


def _named(unit: str, dimension: str | None) -> Unit:
    for candidate in WORDS if dimension is None else (dimension,):
        found = WORDS[candidate].get(unit)
        if found is not None:
            return found
    raise KeyError(f"no unit {unit!r} of {dimension or 'any dimension'}")


def _rounded(number: float, decimals: int) -> str:
    """Plain digits, halves of what the shortest decimal text shows rounded away from zero.

    Formatting the float itself would show 2.0005 as 2.000: its binary value lies below.
    """
    from decimal import ROUND_HALF_UP, Context, Decimal

    exact = Decimal(repr(float(number)))
    step = Decimal(1).scaleb(-decimals)
    context = Context(prec=400, rounding=ROUND_HALF_UP)
    text = f"{exact.quantize(step, context=context):f}"
    return text.lstrip("-") if not text.strip("-0.") else text


def _feet_and_sixteenths(metres: float) -> str:
    sixteenths = math.floor(abs(metres) / 0.0254 * 16 + 0.5)
    feet, rest = divmod(sixteenths, 192)
    inches, parts = divmod(rest, 16)
    common = math.gcd(parts, 16)
    fraction = f" {parts // common}/{16 // common}" if parts else ""
    sign = "-" if metres < 0 and sixteenths else ""
    return f"{sign}{feet} ft {inches}{fraction} in"

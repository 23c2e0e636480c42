"""Text to SI: one number and one unit, or feet, inches and a fraction. Nothing is evaluated."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Final, NoReturn

from tankcalc.errors import QuantityError
from tankcalc.text import clean
from tankcalc.units.dimensions import DIMENSIONS
from tankcalc.units.feet import feet_and_inches
from tankcalc.units.lookup import Found, Reference, find, wanted

if TYPE_CHECKING:
    from collections.abc import Sequence

LONGEST: Final = 40
"""Longest text of a quantity, characters."""

LARGEST: Final = 1e15
SMALLEST: Final = 1e-15
"""Bounds of the size of a value other than zero, SI: beyond them a slip of the exponent, and
squares and cubes that would overflow."""


@dataclass(frozen=True, slots=True)
class Quantity:
    """A quantity as it was typed, and what it is in SI.

    Attributes
    ----------
    si : float
        Value in the SI unit of its dimension.
    dimension : str
        One of `DIMENSIONS`.
    unit : str
        Main spelling of the unit ("psi" for "PSIG"; "1" for a bare number).
    text : str
        As typed, made safe to show.
    reference : {"gauge", "absolute"} or None
        Pressure reference written with the unit; it does not change ``si``.
    """

    si: float
    dimension: str
    unit: str
    text: str
    reference: Reference | None = None


# Signs that text copied from documents holds in place of the plain ones.
_COPIED: Final = str.maketrans({"−": "-", "′": "'", "’": "'", "″": '"', "”": '"'})
_ALLOWED: Final = re.compile(r"[ -~°µμ²³]*")

_NUMBER: Final = r"[+-]?(?:[0-9]+(?:[.,][0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]{1,3})?(?![0-9.,])"
_NUMBER_UNIT: Final = re.compile(rf"({_NUMBER})(?: ?([A-Za-z%°µμ'\"/].*)| (1 ?/.*))?")


def parse(text: str, dimension: str) -> Quantity:
    """Return the quantity that a text states.

    The text is one number and one unit ("98.2 kPa", "1.12e-5 / K"), or for a length feet, inches
    and a fraction ("12 ft 3 5/8 in", ``12'-3 5/8"``), in at most 40 characters: plain ASCII and
    ° µ ² ³. A minus, primes and closing quotes from a document count as the plain signs.
    A number alone is read only as a fraction or a plain number. One decimal comma is read as a
    point ("12,5 kPa") unless exactly three digits follow it, when it could part thousands.

    Parameters
    ----------
    text : str
        What was typed.
    dimension : str
        What it has to be; one of `DIMENSIONS`.

    Returns
    -------
    Quantity
        In SI, with the unit and the pressure reference as typed.

    Raises
    ------
    QuantityError
        If the text is not such a quantity; it says why and what to type.

    Examples
    --------
    >>> parse("98,2 kPa(g)", "pressure")
    Quantity(si=98200.0, dimension='pressure', unit='kPa', text='98,2 kPa(g)', reference='gauge')
    >>> round(parse("12 ft 3 5/8 in", "length").si, 6)
    3.749675
    """
    return parse_any(text, (dimension,))


def si(text: str, dimension: str) -> float:
    """Return the SI value that a text states; see `parse`.

    Examples
    --------
    >>> si("18 degC", "temperature")
    291.15
    """
    return parse_any(text, (dimension,)).si


def parse_any(text: str, dimensions: Sequence[str]) -> Quantity:
    """Return the quantity that a text states, in the first of several dimensions that fits.

    Where one of the dimensions needs a unit, a number alone is refused: "0.5" as a pressure, a
    current or a fraction of the range would be a guess.

    Raises
    ------
    QuantityError
        If the text is not a quantity of any of them; it says why and what to type.

    Examples
    --------
    >>> parse_any("37.5 %", ("pressure", "current", "fraction")).dimension
    'fraction'
    """
    unknown = [dimension for dimension in dimensions if dimension not in DIMENSIONS]
    if unknown or not dimensions:
        raise KeyError(f"no such dimension: {unknown}; there are {', '.join(DIMENSIONS)}")
    typed = _safe(text)
    plain = typed.translate(_COPIED)
    if "length" in dimensions:
        metres = feet_and_inches(plain, typed)
        if metres is not None:
            return Quantity(_checked(metres, typed), "length", "ft", typed)
    match = _NUMBER_UNIT.fullmatch(plain)
    if match is None:
        _refuse_shape(plain, typed, dimensions)
    number = _number(match[1], typed)
    word = match[2] or match[3] or _no_unit(match[1], typed, dimensions)
    return _quantity(number, find(word, dimensions, typed), typed)


def _safe(text: str) -> str:
    """Put the blanks in order and refuse what has no place in a quantity."""
    typed = " ".join(text.split()) if len(text) <= 5 * LONGEST else ""
    if len(typed) > LONGEST or len(text) > 5 * LONGEST:
        raise QuantityError(
            clean(text, LONGEST),
            f"Too long for one quantity (at most {LONGEST} characters).",
            'Type one number and one unit, such as "98.2 kPa".',
        )
    if _ALLOWED.fullmatch(typed.translate(_COPIED)) is None:
        _refuse_character(typed)
    return typed


def _refuse_character(typed: str) -> NoReturn:
    import unicodedata

    odd = next(ch for ch in typed.translate(_COPIED) if _ALLOWED.fullmatch(ch) is None)
    code = f"U+{ord(odd):04X}"
    name = unicodedata.name(odd, "a control character").lower()
    raise QuantityError(
        clean(typed),
        f"It holds a character that has no place in a quantity: {code}, {name}.",
        "Type plain digits, letters and signs.",
    )


def _number(word: str, typed: str) -> float:
    """Read a word that matched `_NUMBER`; a decimal comma is read or refused."""
    digits = re.split("[eE]", word)[0]
    if "," in word:
        decimals = digits.split(",")[1]
        if len(decimals) == 3:
            raise QuantityError(
                typed,
                f'The comma in "{word}" could part thousands or decimals.',
                "Type a decimal point, and no sign between thousands.",
            )
        if not decimals:
            raise QuantityError(typed, "No digit follows the comma.", "Type a decimal point.")
    number = float(word.replace(",", "."))
    if number == 0.0 and digits.strip("+-0.,"):
        raise _too_small(typed)
    return number


def _no_unit(word: str, typed: str, dimensions: Sequence[str]) -> str:
    """Give a number alone the unit "1" where every dimension allows it."""
    if all(DIMENSIONS[dimension].takes_bare for dimension in dimensions):
        return "1"
    unit = DIMENSIONS[dimensions[0]].example.split(" ", 1)[1]
    raise QuantityError(
        typed, "The unit is missing.", f'Type it with its unit, such as "{word} {unit}".'
    )


def _quantity(number: float, found: Found, typed: str) -> Quantity:
    unit, reference = found
    value = _checked(unit.to_si(number), typed)
    if value < 0.0 and unit.dimension == "temperature":
        raise QuantityError(typed, "Below absolute zero (-273.15 degC).", "Check the sign.")
    if value < 0.0 and reference == "absolute":
        raise QuantityError(
            typed, "An absolute pressure is never below zero.", "Check the sign and the reference."
        )
    return Quantity(value, unit.dimension, unit.name, typed, reference)


def _checked(value: float, typed: str) -> float:
    if not abs(value) <= LARGEST:
        raise QuantityError(typed, "Far too large for anything in a tank.", "Check the exponent.")
    if 0.0 < abs(value) < SMALLEST:
        raise _too_small(typed)
    return value


def _too_small(typed: str) -> QuantityError:
    return QuantityError(
        typed, "Too small to mean anything.", "Check the exponent, or type a zero."
    )


def _refuse_shape(plain: str, typed: str, dimensions: Sequence[str]) -> NoReturn:
    """Say what is wrong with a text that is not a number and a unit."""
    want = wanted(dimensions)
    if not plain:
        raise QuantityError(typed, f"Nothing is typed; {want}.")
    if plain.lstrip("+-").lower().startswith(("nan", "inf")):
        raise QuantityError(typed, f"Not a finite number; {want}.")
    if not any(ch.isdigit() for ch in plain):
        raise QuantityError(typed, f"The number is missing; {want}.")
    raise QuantityError(
        typed,
        f"Not one number and one unit; {want}.",
        "Type the digits with at most one decimal point, and no blanks or signs between them.",
    )

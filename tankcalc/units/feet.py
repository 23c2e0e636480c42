"""Lengths in feet, inches and fractions of an inch, as tank dimensions and dips are written."""

from __future__ import annotations

import re
from typing import Final

from tankcalc.errors import QuantityError

_FEET_INCHES: Final = re.compile(
    r"(?P<sign>[+-]?)"
    r"(?:(?P<feet>[0-9]+) ?(?:ft\.?|foot|feet|') ?-? ?)?"
    r"(?:(?P<inches>[0-9]+(?:\.[0-9]*)?)(?:[ -](?=[0-9]+/)|(?! ?[0-9/])))?"
    r"(?:(?P<top>[0-9]+)/(?P<bottom>[0-9]+))? ?"
    r"(?:in\.?|inch|inches|\"|'')",
    re.IGNORECASE,
)
_LOOKS_LIKE_IT: Final = re.compile(
    r".*(?:[0-9] ?(?:(?:ft\.?|foot|feet)[ -]+|' ?-? ?)[0-9]|[0-9]/[0-9]).*", re.IGNORECASE
)
_PARTS_OF_AN_INCH: Final = frozenset({2, 4, 8, 16, 32, 64})


def feet_and_inches(plain: str, typed: str) -> float | None:
    """Return the metres of a text such as "12 ft 3 5/8 in", or None if it has one number only.

    Whole feet, then inches: whole, decimal, or with a fraction of halves to 64ths; below twelve
    where feet are given. A sign counts for the whole length.

    Raises
    ------
    QuantityError
        If it is of this form but not a length that anyone would write so.
    """
    match = _FEET_INCHES.fullmatch(plain)
    if match is None:
        if _LOOKS_LIKE_IT.fullmatch(plain):
            raise QuantityError(
                typed,
                "Not feet and inches as they are read here.",
                'Type whole feet, then inches: "12 ft 3 5/8 in", "12 ft 3.6 in" or "12.3 ft".',
            )
        return None
    if match["top"] is None and (match["feet"] is None or match["inches"] is None):
        return None
    inches = float(match["inches"] or 0)
    if match["top"] is not None:
        inches += _part(int(match["top"]), int(match["bottom"]), match["inches"], typed)
    if match["feet"] is not None and inches >= 12.0:
        raise QuantityError(
            typed, "Twelve inches or more beside feet.", "Carry them over to the feet."
        )
    metres = (12 * int(match["feet"] or 0) + inches) * 254 / 10_000
    return -metres if match["sign"] == "-" else metres


def _part(top: int, bottom: int, inches: str | None, typed: str) -> float:
    """Return a fraction of an inch as a number."""
    if "." in (inches or ""):
        raise QuantityError(typed, "Decimals and a fraction in one number.", "Type one of them.")
    if bottom not in _PARTS_OF_AN_INCH:
        raise QuantityError(
            typed,
            f"An inch is not divided into {bottom} parts.",
            "Type halves, quarters, eighths, sixteenths, 32nds, 64ths, or decimals.",
        )
    if top >= bottom:
        raise QuantityError(
            typed, f'"{top}/{bottom}" is a whole inch or more.', "Carry it over to the inches."
        )
    return top / bottom

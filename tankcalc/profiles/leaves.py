"""What one key of a profile file may hold: quantities, text, choices, numbers, lists of them."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from typing import Literal

from pydantic_core import CoreSchema, core_schema

from tankcalc import units
from tankcalc.profiles.findings import nearest, show
from tankcalc.text import clean

Sign = Literal["any", "not negative", "positive"]

EXAMPLES = {
    "length": "12.5 m",
    "pressure": "1.35 bar",
    "temperature": "18 degC",
    "density": "845 kg/m3",
    "volume": "2.5 m3",
    "mass": "12 t",
    "volume_flow": "600 m3/h",
    "expansion": "8.3e-4 / K",
    "molar_mass": "28.01 g/mol",
    "time": "10 s",
    "acceleration": "9.81 m/s2",
    "angle": "52.0 deg",
}
"""A quantity of each dimension that a profile file holds, as one may be written."""


class UnfitError(ValueError):
    """What a key holds cannot be used: what was found, what to do."""

    def __init__(self, what: str, advice: str = "") -> None:
        super().__init__(what, advice)
        self.what = what
        self.advice = advice


def leaf(read: Callable[[object], object]) -> CoreSchema:
    """Return the schema of a value that a function reads, raising `UnfitError` or QuantityError."""
    return core_schema.no_info_plain_validator_function(read)


def quantity(dimension: str, sign: Sign = "any") -> CoreSchema:
    """Return the schema of a number with a unit, read into its SI value."""
    return leaf(_reader(dimension, sign))


def quantities(dimension: str, sign: Sign = "any") -> CoreSchema:
    """Return the schema of one quantity or a list of them, read into a tuple of SI values."""
    read = _reader(dimension, sign)

    def read_all(value: object) -> tuple[float, ...]:
        if value == []:
            raise UnfitError("the list is empty.")
        return tuple(read(item) for item in value) if isinstance(value, list) else (read(value),)

    return leaf(read_all)


def pressure() -> CoreSchema:
    """Return the schema of a pressure that keeps its reference, read into a `Quantity`."""
    return leaf(lambda value: _parsed(value, "pressure"))


def fraction(low: float = 0.0, high: float = 1.0) -> CoreSchema:
    """Return the schema of a fraction: a bare number, or text such as "0.1 %"."""

    def read(value: object) -> float:
        if isinstance(value, bool) or not isinstance(value, (int, float, str)):
            raise UnfitError(
                f'a fraction is wanted, such as 0.001 or "0.1 %", found {show(value)}.'
            )
        share = units.si(value, "fraction") if isinstance(value, str) else value
        if not low <= share <= high:
            raise UnfitError(f"{show(value)} is not between {low:g} and {high:g}.")
        return float(share)

    return leaf(read)


def text(longest: int = 80) -> CoreSchema:
    """Return the schema of text that can be put on a screen as it stands."""

    def read(value: object) -> str:
        if not isinstance(value, str):
            raise UnfitError(f"text in quotes is wanted, found {show(value)}.")
        if not value.strip():
            raise UnfitError("the text is empty.", "Write it, or leave the key out.")
        if len(value) > longest:
            raise UnfitError(f"the text is longer than {longest} characters.", "Shorten it.")
        if clean(value, longest) != " ".join(value.split()):
            raise UnfitError(
                f"{show(value)} holds characters that cannot be shown.",
                "Type it anew with plain letters and signs.",
            )
        return clean(value, longest)

    return leaf(read)


def choice(*words: str) -> CoreSchema:
    """Return the schema of one of a few words."""

    def read(value: object) -> str:
        if not isinstance(value, str) or value not in words:
            near = nearest(value, words) if isinstance(value, str) else None
            all_words = ", ".join(f'"{word}"' for word in words)
            advice = f'Did you mean "{near}"?' if near else f"Choose from {all_words}."
            raise UnfitError(f"{show(value)} is not among the choices.", advice)
        return value

    return leaf(read)


def date_text(value: object) -> str:
    """Read a date, in quotes or not, into ISO text."""
    if isinstance(value, datetime.date) and not isinstance(value, datetime.datetime):
        return value.isoformat()
    try:
        return datetime.date.fromisoformat(value if isinstance(value, str) else "").isoformat()
    except ValueError:
        raise UnfitError(
            f"{show(value)} is no date.", "Write year, month, day: 2026-11-30."
        ) from None


def flag() -> CoreSchema:
    """Return the schema of true or false."""
    return core_schema.bool_schema()


def number(low: float | None = None, high: float | None = None) -> CoreSchema:
    """Return the schema of a plain number."""
    return core_schema.float_schema(ge=low, le=high)


def whole(low: int, high: int) -> CoreSchema:
    """Return the schema of a whole number."""
    return core_schema.int_schema(ge=low, le=high)


def listed(item: CoreSchema, least: int = 1, most: int | None = None) -> CoreSchema:
    """Return the schema of a list."""
    return core_schema.list_schema(item, min_length=least, max_length=most)


def pair(first: CoreSchema, second: CoreSchema) -> CoreSchema:
    """Return the schema of a list of two, read into a tuple."""
    return core_schema.tuple_schema([first, second], strict=False)


def _reader(dimension: str, sign: Sign) -> Callable[[object], float]:
    def read(value: object) -> float:
        return _signed(_parsed(value, dimension).si, sign, value)

    return read


def _parsed(value: object, dimension: str) -> units.Quantity:
    if isinstance(value, str):
        return units.parse(value, dimension)
    example = EXAMPLES.get(dimension)
    like = f', such as "{example}"' if example else ""
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        raise UnfitError(f"{show(value)} is a bare number.", f"Give it a unit, in quotes{like}.")
    raise UnfitError(f"a number with a unit is wanted, in quotes{like}, found {show(value)}.")


def _signed(si: float, sign: Sign, value: object) -> float:
    if sign == "positive" and not si > 0.0:
        raise UnfitError(f"{show(value)} must be above zero.")
    if sign == "not negative" and not si >= 0.0:
        raise UnfitError(f"{show(value)} must not be below zero.")
    return si

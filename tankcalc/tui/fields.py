"""The fields a reading is typed in: what each is called, and in which order they stand."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Field:
    """One field of the entry.

    Attributes
    ----------
    name : str
        The reading's name in the calculation, or "note".
    label : str
        What stands before the field.
    fitted : bool
        True where it belongs to a transmitter that a tank has or has not.
    later : bool
        True where it is needed so rarely that it stands below the others.
    """

    name: str
    label: str
    fitted: bool = False
    later: bool = False


FIELDS = (
    Field("p1", "p1 bottom", fitted=True),
    Field("p2", "p2 middle", fitted=True),
    Field("p3", "p3 vapour", fitted=True),
    Field("dp", "dp", fitted=True),
    Field("temperature", "temperature"),
    Field("level", "level, dip"),
    Field("water_level", "water level"),
    Field("note", "note"),
    Field("ullage", "ullage", later=True),
    Field("density", "density", later=True),
    Field("volume", "volume", later=True),
    Field("mass", "mass", later=True),
    Field("sediment_water", "sediment", later=True),
    Field("ctl", "factor CTL", later=True),
    Field("barometer", "barometer", later=True),
    Field("air_temperature", "air temp.", later=True),
    Field("leg_temperature", "leg temp.", later=True),
)
"""Every reading that can be typed, and the note; a test holds it against `tankcalc.typed`."""

NOTE = "note"
READINGS = tuple(field.name for field in FIELDS if field.name != NOTE)

QUANTITY = r"""[0-9A-Za-z .,:;/()@'"°²³⁻¹^%+\-*·µμ½¼¾⅛⅜⅝⅞′″]*"""
"""Characters of quantities: a stray control sequence leaves its bracket outside."""


def by_name(name: str) -> Field:
    """Return the field of that name."""
    return next(field for field in FIELDS if field.name == name)


def label_of(name: str) -> str:
    """Return what a field is called on the screen; any other name as it is."""
    return next((field.label for field in FIELDS if field.name == name), name)


def fields_of(fitted: Collection[str]) -> list[Field]:
    """Return the fields of a tank with these transmitters, in the order they are shown."""
    return [field for field in FIELDS if not field.fitted or field.name in fitted]


def takes(name: str) -> str:
    """Return what a field takes, with examples."""
    if name == NOTE:
        return "words for the log, up to 200 characters"
    from tankcalc.typed import NAMES

    return NAMES[name].help

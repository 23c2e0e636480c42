"""Text to SI and back: the only place where units exist.

table      what each unit is worth and how it is spelled
ambiguous  words that are refused, and what to type instead
lookup     a word to a unit, or to a message
beyond     units outside the table by their full name (the one place that imports pint)
parser     text to a quantity
display    a value to text, per system of units
"""

from __future__ import annotations

from tankcalc.units.dimensions import DIMENSIONS
from tankcalc.units.display import UNIT_FOR, System, base_words, from_unit, show, to_unit
from tankcalc.units.parser import Quantity, parse, parse_any, si
from tankcalc.units.table import NAMES, Unit

__all__ = [
    "DIMENSIONS",
    "NAMES",
    "UNIT_FOR",
    "Quantity",
    "System",
    "Unit",
    "base_words",
    "from_unit",
    "parse",
    "parse_any",
    "show",
    "si",
    "to_unit",
]

"""Results as text: which figures, in which order, in which units. Computes nothing."""

from __future__ import annotations

from dataclasses import dataclass

from tankcalc import units
from tankcalc.result import Result

CAUTION = (
    "Not a safety function, not certified for custody transfer. Local codes and licensed "
    "practice decide."
)
"""The caution that every report and screen carries."""

STATUS_WORDS = {"good": "GOOD", "check": "CHECK", "refused": "REFUSED"}

_FIGURES = (
    ("level_m", "level", "length"),
    ("ullage_m", "ullage", "length"),
    ("fill", "fill", "fraction"),
    ("water_level_m", "water level", "length"),
    ("volume_m3", "volume", "volume"),
    ("water_volume_m3", "of it free water", "volume"),
    ("product_volume_m3", "of it product", "volume"),
    ("mass_kg", "mass", "mass"),
    ("product_mass_kg", "of it product", "mass"),
    ("vapour_mass_kg", "vapour mass", "mass"),
    ("weight_in_air_kg", "product in air", "mass"),
    ("density_kg_m3", "mean density", "density"),
    ("room_m3", "room", "volume"),
    ("pumpable_m3", "pumpable", "volume"),
    ("p1_pa", "p1 should read", "pressure"),
    ("p2_pa", "p2 should read", "pressure"),
    ("p3_pa", "p3 should read", "pressure"),
    ("dp_pa", "dp should read", "pressure"),
)
_ONLY_WITH_WATER = frozenset({"product_volume_m3", "product_mass_kg"})


@dataclass(frozen=True, slots=True)
class Row:
    """One line of a report: the JSON key, what it is called, the value with its unit."""

    key: str
    label: str
    value: str


def rows(result: Result, system: units.System) -> list[Row]:
    """Return the figures of the result of one reading, in the units of a system.

    Figures that cannot be known have no row; the split into water and product appears only
    where there is water.
    """
    found = []
    for key, label, dimension in _FIGURES:
        value = getattr(result, key)
        if value is None or (key in _ONLY_WITH_WATER and result.water_volume_m3 is None):
            continue
        found.append(Row(key, label, units.show(float(value), dimension, system)))
    return found


def text_report(result: Result, system: units.System) -> str:
    """Return the result of one reading as plain text for a terminal or a printer."""
    lines = [f"{result.tank}, {result.fluid}: {STATUS_WORDS[result.status]}"]
    lines += [f"  {row.label:<17}{row.value:>20}" for row in rows(result, system)]
    lines.append(f"Basis: {result.basis}.")
    lines += [f"{'REFUSED' if n.refuses else 'Check'}: {n.message}" for n in result.warnings]
    return "\n".join([*lines, CAUTION])

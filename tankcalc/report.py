"""Results as text: which figures, in which order, in which units. Computes nothing."""

from __future__ import annotations

import textwrap
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc import units
from tankcalc.result import Result

if TYPE_CHECKING:
    from tankcalc.sums import Sums
    from tankcalc.terms import Term
    from tankcalc.uncertainty import Budget

WIDTH = 80
"""Columns of the terminals that reports are read on."""

CAUTION = (
    "Not a safety function, not certified for custody transfer. Local codes and licensed "
    "practice decide."
)
"""The caution that every report and screen carries."""

ROUNDED = {
    "as printed": "rounded as printed in the standards (once, half up)",
    "unrounded": "unrounded",
}
"""The two ways of rounding, in words."""

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
    ("standard_volume_m3", "standard volume", "volume"),
    ("net_standard_volume_m3", "net standard", "volume"),
    ("net_mass_kg", "net mass", "mass"),
    ("net_weight_in_air_kg", "net in air", "mass"),
    ("reference_density_kg_m3", "base density", "density"),
    ("heel_volume_m3", "assumed: heel", "volume"),
    ("heel_mass_kg", "assumed: heel", "mass"),
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
    """One line of a report.

    Attributes
    ----------
    key : str
        Its JSON key.
    label : str
        What it is called.
    value : str
        The value with its unit.
    give : str
        The expanded uncertainty with its unit, after "+/- "; empty where it has none.
    """

    key: str
    label: str
    value: str
    give: str = ""


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
        half = result.expanded_uncertainty.get(key)
        give = "" if half is None else f"+/- {units.show(half, dimension, system)}"
        found.append(Row(key, label, units.show(float(value), dimension, system), give))
    return found


def headline(result: Result) -> str:
    """Return the status in words; readings that disagree are told from lesser doubts."""
    words = STATUS_WORDS[result.status]
    apart = result.status == "check" and any(n.code == "disagreement" for n in result.warnings)
    return f"{words}, THE READINGS DISAGREE" if apart else words


def text_report(result: Result, system: units.System) -> str:
    """Return the result of one reading as plain text for a terminal or a printer."""
    lines = [f"{result.tank}, {result.fluid}: {headline(result)}"]
    lines += [
        f"  {row.label:<17}{row.value:>20}  {row.give}".rstrip() for row in rows(result, system)
    ]
    for key, (low, high) in result.bounds.items():
        label, dimension = next((f[1], f[2]) for f in _FIGURES if f[0] == key)
        shown = f"{units.show(low, dimension, system)} to {units.show(high, dimension, system)}"
        lines.append(f"  {label:<17}{shown}")
    lines += wrapped(f"Basis: {result.basis}.")
    for notice in result.warnings:
        lines += wrapped(f"{'REFUSED' if notice.refuses else 'Check'}: {notice.message}")
    return "\n".join([*lines, *wrapped(CAUTION)])


def wrapped(text: str) -> list[str]:
    """Return a text as lines that fit the terminal, the later ones indented."""
    return textwrap.wrap(text, WIDTH - 1, subsequent_indent="  ")


def budget_table(budget: Budget, system: units.System) -> str:
    """Return an uncertainty budget as text: every input's share, the largest first."""
    keys = (("level_m", "length"), ("volume_m3", "volume"), ("mass_kg", "mass"))
    lines = [_cells("Input, k = 1", "of it", "level", "volume", "mass")]
    for share in budget.shares:
        own = units.show(share.uncertainty, share.dimension, system)
        name = share.name + ("" if share.stated else " *")
        shown = (units.show(abs(share.contributions[k]), d, system) for k, d in keys)
        lines.append(_cells(name, own, *shown))
    for name, held in (("combined", budget.standard), ("expanded, k = 2", budget.expanded)):
        lines.append(_cells(name, "", *(units.show(held[k], d, system) for k, d in keys)))
    if budget.shares:
        name = budget.shares[0].name
        gain = units.show(budget.gain_of_halving(name), "mass", system)
        lines.append(f"Halving the uncertainty of {name} buys {gain} of mass (k = 2).")
    lines.append("* not stated by the site: common practice was taken")
    return "\n".join(lines)


def _cells(name: str, own: str, level: str, volume: str, mass: str) -> str:
    """Return one row of a budget."""
    return f"{name:<18}{own:>13}{level:>17}{volume:>15}{mass:>15}"


def sums_table(found: Sums) -> str:
    """Return the working from the observed volume to the weight, a line for every factor."""
    if not found.lines:
        return found.remark
    shown = [f"Observed volume to weight, {ROUNDED[found.rounding]}"]
    for line in found.lines:
        value = f"{line.value:.{line.places}f} {line.unit}".rstrip()
        head = f"  {line.symbol:<5}{value:>20}  "
        made_of = textwrap.wrap(line.working, WIDTH - 1 - len(head)) or [""]
        shown.append(head + made_of[0])
        shown += [" " * len(head) + more for more in made_of[1:]]
    known = ", ".join(f"{line.symbol} {line.name}" for line in found.lines)
    remark = wrapped(found.remark) if found.remark else []
    return "\n".join([*shown, *wrapped(f"{known}."), *remark])


def terms_table(terms: tuple[Term, ...], system: units.System) -> str:
    """Return the corrections of an answer as text, the largest first."""
    lines = [f"{'Left out, the answer would be off by':<42}{'level':>16}{'mass':>18}"]
    for term in terms:
        level = units.show(-term.level_m, "length", system)
        mass = units.show(-term.mass_kg, "mass", system)
        lines.append(f"{term.name:<42}{level:>16}{mass:>18}")
    return "\n".join(lines)

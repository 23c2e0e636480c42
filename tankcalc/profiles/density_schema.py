"""The density models a fluid file can name: one table of keys for each.

To add a model, write its module in ``fluids``, how it is made in ``density_builders``, and its
table here.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable
from typing import TYPE_CHECKING, Any, NamedTuple

from tankcalc.errors import FigureError, InputError
from tankcalc.profiles import density_builders as builders
from tankcalc.profiles.findings import At, Findings, show
from tankcalc.profiles.leaves import (
    UnfitError,
    choice,
    date_text,
    fraction,
    leaf,
    listed,
    pair,
    quantity,
    text,
)
from tankcalc.profiles.shares import foods, gases, shares
from tankcalc.profiles.tables import ByKind, Table, Values, may, need

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel


class Stated(NamedTuple):
    """A density model, and the standard uncertainty stated of it (kg/m3)."""

    model: DensityModel
    uncertainty_kg_m3: float | None


_DENSITY = quantity("density", "positive")


def model(keys: dict[str, Any], make: Callable[[Values], DensityModel]) -> Table:
    """Return the table of one model: its keys, and how the model is made of them."""

    def build(values: Values, at: At, findings: Findings) -> Stated | None:
        if not _points_rise(values.get("points", ()), at, findings):
            return None
        try:
            return Stated(make(values), values["uncertainty"])
        except FigureError as error:
            findings.add((*at, error.key) if values.get(error.key) is not None else at, str(error))
            return None
        except InputError as error:
            findings.add(at, str(error))
            return None

    return Table({**keys, "uncertainty": may(_DENSITY)}, build)


def _points_rise(points: list[tuple[float, float]], at: At, findings: Findings) -> bool:
    """Return whether the first column rises, noting each entry that does not."""
    before = len(findings)
    for n, (low, high) in enumerate(itertools.pairwise(points), start=1):
        if not high[0] > low[0]:
            findings.add(
                (*at, "points", n),
                "does not rise from the point before it.",
                "List the points by rising temperature or elevation, each once.",
            )
    return len(findings) == before


def _cells(values: Values, at: At, findings: Findings) -> Values | None:
    """Return the cells of a grid, noting steps that do not rise and rows that do not fit."""
    before = len(findings)
    for key in ("concentrations", "temperatures"):
        for n, (low, high) in enumerate(itertools.pairwise(values[key]), start=1):
            if not high > low:
                findings.add((*at, key, n), "does not rise from the one before it.")
    rows, wanted = values["densities"], len(values["concentrations"])
    if len(rows) != wanted:
        findings.add(
            (*at, "densities"),
            f"{len(rows)} rows of densities for {wanted} concentrations.",
            "Write one row for each concentration.",
        )
    for n, row in enumerate(rows):
        if len(row) != len(values["temperatures"]):
            findings.add(
                (*at, "densities", n),
                f"{len(row)} densities for {len(values['temperatures'])} temperatures.",
                "Write one density for each temperature.",
            )
    return values if len(findings) == before else None


def _edition(value: object) -> int:
    if type(value) is not int or value not in (2004, 1980):
        raise UnfitError(f"{show(value)} is no edition known here.", "Choose 2004 or 1980.")
    return value


GRID = Table(
    {
        "concentrations": need(listed(fraction(), least=2)),
        "temperatures": need(listed(quantity("temperature"), least=2)),
        "densities": need(listed(listed(_DENSITY), least=2)),
    },
    _cells,
)
"""A solution's densities: a row for each concentration, a column for each temperature."""

DENSITY = ByKind(
    "model",
    {
        "constant": model({"value": need(_DENSITY)}, builders.constant),
        "expansion": model(
            {
                "reference": need(_DENSITY),
                "at": need(quantity("temperature")),
                "coefficient": need(quantity("expansion")),
                "bulk_modulus": may(quantity("pressure", "positive")),
            },
            builders.expansion,
        ),
        "table": model(
            {"points": need(listed(pair(quantity("temperature"), _DENSITY), least=2))},
            builders.table,
        ),
        "water": model({"salinity": may(fraction(), 0.0)}, builders.water),
        "petroleum": model(
            {
                "group": need(
                    choice(
                        "crude",
                        "fuel oil",
                        "jet fuel",
                        "gasoline",
                        "transition",
                        "lubricating oil",
                        "special",
                    )
                ),
                "reference": need(_DENSITY),
                "at": need(quantity("temperature")),
                "edition": may(leaf(_edition), 2004),
                "expansion": may(quantity("expansion", "positive")),
            },
            builders.petroleum,
        ),
        "ethanol": model({"mass_fraction": need(fraction())}, builders.ethanol),
        "solution": model(
            {
                "concentration": need(fraction()),
                "grid": need(GRID),
                "grid_source": need(text(160)),
                "grid_date": need(leaf(date_text)),
            },
            builders.solution,
        ),
        "liquefied gas": model(
            {
                "composition": need(shares(gases, "{ methane = 0.92, ethane = 0.08 }")),
                "method": may(choice("revised Klosek-McKinley", "saturated")),
            },
            builders.liquefied_gas,
        ),
        "constituents": model(
            {"mass_fractions": need(shares(foods, "{ water = 0.88, fat = 0.12 }"))},
            builders.constituents,
        ),
        "samples": model(
            {
                "points": need(listed(pair(quantity("length"), _DENSITY))),
                "beyond": may(choice("hold", "extend"), "hold"),
            },
            builders.samples,
        ),
    },
)

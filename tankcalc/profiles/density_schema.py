"""The density models a fluid file can name: one table of keys for each, and the model built.

To add a model, write its module in ``fluids`` and its table here.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable
from typing import TYPE_CHECKING, Any, NamedTuple

from tankcalc.errors import InputError
from tankcalc.profiles.findings import At, Findings
from tankcalc.profiles.leaves import choice, listed, pair, quantity
from tankcalc.profiles.tables import ByKind, Table, Values, may, need

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel

NOT_YET = ("petroleum", "ethanol", "solution", "liquefied gas")
"""Models a profile may name that this version does not compute."""


class Stated(NamedTuple):
    """A density model, and the standard uncertainty stated of it (kg/m3)."""

    model: DensityModel
    uncertainty_kg_m3: float | None


def _constant(values: Values) -> DensityModel:
    from tankcalc.fluids.constant import Constant

    return Constant(values["value"])


def _expansion(values: Values) -> DensityModel:
    from tankcalc.fluids.expansion import Expansion

    return Expansion(
        values["reference"], values["at"], values["coefficient"], values["bulk_modulus"]
    )


def _table(values: Values) -> DensityModel:
    from tankcalc.fluids.table import Table as DensityTable

    temperatures, densities = zip(*values["points"], strict=True)
    return DensityTable(temperatures, densities)


def _water(values: Values) -> DensityModel:
    from tankcalc.fluids.water import Water

    return Water()


def _samples(values: Values) -> DensityModel:
    from tankcalc.fluids.samples import Samples

    elevations, densities = zip(*values["points"], strict=True)
    return Samples(elevations, densities, values["beyond"])


_DENSITY = quantity("density", "positive")


def model(keys: dict[str, Any], make: Callable[[Values], DensityModel]) -> Table:
    """Return the table of one model: its keys, and how the model is made of them."""

    def build(values: Values, at: At, findings: Findings) -> Stated | None:
        if not _points_rise(values.get("points", ()), at, findings):
            return None
        try:
            return Stated(make(values), values["uncertainty"])
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


DENSITY = ByKind(
    "model",
    {
        "constant": model({"value": need(_DENSITY)}, _constant),
        "expansion": model(
            {
                "reference": need(_DENSITY),
                "at": need(quantity("temperature")),
                "coefficient": need(quantity("expansion")),
                "bulk_modulus": may(quantity("pressure", "positive")),
            },
            _expansion,
        ),
        "table": model(
            {"points": need(listed(pair(quantity("temperature"), _DENSITY), least=2))}, _table
        ),
        "water": model({}, _water),
        "samples": model(
            {
                "points": need(listed(pair(quantity("length"), _DENSITY))),
                "beyond": may(choice("hold", "extend"), "hold"),
            },
            _samples,
        ),
    },
)


class Density:
    """``[density]`` of a fluid file."""

    def read(self, value: object, at: At, findings: Findings) -> Any:
        """Return what is stated of the density, or None after noting what is wrong."""
        named = value.get("model") if isinstance(value, dict) else None
        if named in NOT_YET:
            available = ", ".join(DENSITY.tables)
            findings.add(
                (*at, "model"),
                f'model = "{named}" is not computed by this version.',
                f"Available: {available}.",
            )
            return None
        return DENSITY.read(value, at, findings)

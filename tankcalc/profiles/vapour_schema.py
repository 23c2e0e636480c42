"""What fills the space above the liquid, in a fluid or a tank file."""

from __future__ import annotations

from tankcalc.fluids.vapour import Vapour
from tankcalc.profiles.findings import At, Findings
from tankcalc.profiles.leaves import number, quantity
from tankcalc.profiles.tables import Table, Values, may, need


def _vapour(values: Values, at: At, findings: Findings) -> Vapour | None:
    density, molar_mass = values["density"], values["molar_mass"]
    if (density is None) == (molar_mass is None):
        findings.add(
            at,
            "a vapour takes a density or a molar mass.",
            "Give one of them; with a molar mass also its compressibility.",
        )
        return None
    if density is not None and values["compressibility"] is not None:
        findings.add(
            (*at, "compressibility"), "belongs to a molar mass.", "Leave it out beside a density."
        )
        return None
    return Vapour(density, molar_mass, values["compressibility"] or 1.0, values["uncertainty"])


VAPOUR = Table(
    {
        "density": may(quantity("density", "not negative")),
        "molar_mass": may(quantity("molar_mass", "positive")),
        "compressibility": may(number(0.05, 3.0)),
        "uncertainty": may(quantity("density", "positive")),
    },
    _vapour,
)


def _relief(values: Values, at: At, findings: Findings) -> tuple[float, float] | None:
    vacuum, relief = values["vacuum"], values["relief"]
    if vacuum > 0.0:
        findings.add((*at, "vacuum"), "is above zero.", 'Write it as gauge pressure: "-0.5 kPa".')
        return None
    if not vacuum < relief:
        findings.add((*at, "vacuum"), "is not below the relief pressure.", "Both are gauge.")
        return None
    return vacuum, relief


VAPOUR_SPACE = Table(
    {"vacuum": need(quantity("pressure")), "relief": need(quantity("pressure"))}, _relief
)
"""Gauge pressures at which a closed vapour space breathes in and out."""

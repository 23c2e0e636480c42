"""What a vessel is made of and carries: shell, deadwood, floating roof, its table's papers."""

from __future__ import annotations

from tankcalc.profiles.findings import At, Findings, did_you_mean, show
from tankcalc.profiles.leaves import (
    date_text,
    flag,
    fraction,
    leaf,
    quantities,
    quantity,
    text,
)
from tankcalc.profiles.tables import ListOf, Table, Values, may, need
from tankcalc.tank import FloatingRoof, Shell, TableCertificate

EXPANSION_PER_K = {
    "carbon steel": 1.12e-5,
    "mild steel": 1.12e-5,
    "stainless steel": 1.73e-5,
    "stainless steel 304": 1.73e-5,
    "stainless steel 316": 1.59e-5,
    "stainless steel 17-4PH": 1.08e-5,
    "aluminium": 2.3e-5,
}
"""Linear expansion of shell materials, 1/K.

Carbon steel is 6.2e-6 per degF, as tank calibration takes it (API MPMS 12.1.1; from memory, as
are the figures for 304, 316, 17-4PH and aluminium). "stainless steel" alone is taken as 304.
"""


def _shell(values: Values, at: At, findings: Findings) -> Shell | None:
    material, expansion = values["material"], values["expansion"]
    if expansion is None and material is not None:
        by_name = {name.lower(): value for name, value in EXPANSION_PER_K.items()}
        expansion = by_name.get(material.lower())
        if expansion is None:
            findings.add(
                (*at, "material"),
                f"{show(material)} is no material known here.",
                did_you_mean(material, EXPANSION_PER_K) + ' Or give expansion = "1.12e-5 / K".',
            )
            return None
    return Shell(
        expansion_per_k=expansion,
        calibrated_at_k=values["calibrated_at"],
        insulated=values["insulated"],
        thickness_m=values["thickness"],
        modulus_pa=values["modulus"],
        table_density_kg_m3=values["table_density"],
        material=material or "",
    )


SHELL = Table(
    {
        "material": may(text()),
        "expansion": may(quantity("expansion", "positive")),
        "calibrated_at": may(quantity("temperature")),
        "insulated": may(flag(), False),
        "thickness": may(quantities("length", "positive"), ()),
        "modulus": may(quantity("pressure", "positive")),
        "table_density": may(quantity("density", "positive")),
    },
    _shell,
)

DEADWOOD = ListOf(
    Table(
        {
            "bottom": need(quantity("length")),
            "top": need(quantity("length")),
            "volume": need(quantity("volume")),
        },
        lambda values, at, findings: (values["bottom"], values["top"], values["volume"]),
    ),
    least=0,
)


def _roof(values: Values, at: At, findings: Findings) -> FloatingRoof | None:
    if not values["floats_at"] > values["lands_at"]:
        findings.add(
            (*at, "floats_at"),
            "the roof floats at a level that is not above the one it lands at.",
            "Its legs take the load between the two.",
        )
        return None
    return FloatingRoof(
        values["mass"], values["lands_at"], values["floats_at"], values["included_at"]
    )


FLOATING_ROOF = Table(
    {
        "mass": need(quantity("mass", "positive")),
        "lands_at": need(quantity("length")),
        "floats_at": need(quantity("length")),
        "included_at": may(quantity("density", "positive")),
    },
    _roof,
)


def _certificate(values: Values, at: At, findings: Findings) -> TableCertificate | None:
    date, expires = values["date"], values["expires"]
    if date and expires and not expires > date:
        findings.add((*at, "expires"), f"{expires} is not after the table's date, {date}.")
        return None
    return TableCertificate(values["certificate"], date, expires, values["uncertainty"])


CERTIFICATE = Table(
    {
        "certificate": may(text(), ""),
        "date": may(leaf(date_text), ""),
        "expires": may(leaf(date_text), ""),
        "uncertainty": may(fraction()),
    },
    _certificate,
)

FLOW = Table(
    {
        "largest_in": may(quantity("volume_flow", "positive")),
        "largest_out": may(quantity("volume_flow", "positive")),
    }
)

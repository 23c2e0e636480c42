"""What lies between a tap and its sensor: filled and dry legs, purge lines, sides of a dp."""

from __future__ import annotations

from tankcalc.instruments import DryLeg, FilledLeg, Leg, Purge, Side
from tankcalc.profiles.findings import At, Findings
from tankcalc.profiles.leaves import quantity
from tankcalc.profiles.tables import Table, Values, may, need

_ELEVATION = quantity("length")
_MOLAR_MASS = quantity("molar_mass", "positive")


def _leg(values: Values, at: At, findings: Findings) -> Leg | None:
    """Return a filled leg, or a dry one, by the keys it is described with."""
    sensor = values["sensor_elevation"]
    density, gas, molar = (values[key] for key in ("fill_density", "gas_density", "molar_mass"))
    if sum(given is not None for given in (density, gas, molar)) != 1:
        findings.add(
            at,
            "a leg is filled with one thing.",
            "Give fill_density for a liquid, or gas_density or molar_mass for a gas.",
        )
        return None
    if density is not None:
        if not _fill_is_clear(values, at, findings):
            return None
        return FilledLeg(sensor, density, values["fill_density_at"], values["fill_expansion"])
    for key in ("fill_density_at", "fill_expansion"):
        if values[key]:
            findings.add((*at, key), "belongs to a leg filled with a liquid.")
            return None
    return DryLeg(sensor, gas, molar)


def _fill_is_clear(values: Values, at: At, findings: Findings) -> bool:
    if values["fill_expansion"] and values["fill_density_at"] is None:
        findings.add(
            (*at, "fill_density_at"),
            "missing.",
            "The expansion counts from the temperature of the density.",
        )
        return False
    if values["fill_density"] is None and (values["fill_density_at"] or values["fill_expansion"]):
        findings.add((*at, "fill_density"), "missing.", "Its temperature or expansion is given.")
        return False
    return True


_FILL = {
    "fill_density": may(quantity("density", "positive")),
    "fill_density_at": may(quantity("temperature")),
    "fill_expansion": may(quantity("expansion"), 0.0),
}
LEG = Table(
    {
        "sensor_elevation": need(_ELEVATION),
        **_FILL,
        "gas_density": may(quantity("density", "not negative")),
        "molar_mass": may(_MOLAR_MASS),
    },
    _leg,
)
PURGE = Table(
    {
        "sensor_elevation": need(_ELEVATION),
        "molar_mass": need(_MOLAR_MASS),
        "friction": may(quantity("pressure", "not negative"), 0.0),
    },
    lambda values, at, findings: Purge(
        values["sensor_elevation"], values["molar_mass"], values["friction"]
    ),
)


def _side(values: Values, at: At, findings: Findings) -> Side | None:
    if not _fill_is_clear(values, at, findings):
        return None
    return Side(
        values["elevation"],
        values["fill_density"],
        values["fill_density_at"],
        values["fill_expansion"],
    )


SIDE = Table({"elevation": need(_ELEVATION), **_FILL}, _side)

"""What was typed becomes readings: the one door between text and the calculation."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from tankcalc import units
from tankcalc.constants import STANDARD_ATMOSPHERE_PA
from tankcalc.errors import QuantityError
from tankcalc.instruments import DifferentialTransmitter, Transmitter
from tankcalc.readings import Readings
from tankcalc.signals import Signal, pressure_from_share, signal_from_current_a, signal_from_share
from tankcalc.tank import Tank
from tankcalc.text import clean

PRESSURES = ("p1", "p2", "p3", "dp")
"""Readings of a transmitter: a pressure, or its signal."""


@dataclass(frozen=True, slots=True)
class Field:
    """One reading that can be typed.

    Attributes
    ----------
    name : str
        Its name on the command line, with underscores.
    target : str
        The field of `Readings` it fills.
    dimension : str
        What is measured.
    help : str
        What it is, in a few words, with an example.
    """

    name: str
    target: str
    dimension: str
    help: str


FIELDS: tuple[Field, ...] = (
    Field("p1", "p1_pa", "pressure", 'bottom pressure, e.g. "98.2 kPa", "14.2 psi", "12.0 mA"'),
    Field("p2", "p2_pa", "pressure", 'middle pressure, e.g. "61.4 kPa"'),
    Field("p3", "p3_pa", "pressure", 'vapour-space pressure, e.g. "1.5 kPa"'),
    Field("dp", "dp_pa", "pressure", 'differential pressure, high minus low, e.g. "-42 kPa"'),
    Field("level", "level_m", "length", 'level above the datum, e.g. "8.42 m", "27 ft 7 1/2 in"'),
    Field("ullage", "ullage_m", "length", 'from the reference point down, e.g. "3.10 m"'),
    Field("water_level", "water_level_m", "length", 'top of the free water, e.g. "120 mm"'),
    Field(
        "temperature",
        "temperatures",
        "temperature",
        'of the liquid, e.g. "18 degC", or at elevations "1 m: 18 degC, 5 m: 21 degC"',
    ),
    Field("air_temperature", "air_temperature_k", "temperature", 'outside, e.g. "12 degC"'),
    Field("leg_temperature", "leg_temperature_k", "temperature", 'of the legs, e.g. "12 degC"'),
    Field("barometer", "barometer_pa", "pressure", 'outside pressure, e.g. "1013.2 hPa"'),
    Field("density", "density_kg_m3", "density", 'observed, at tank temperature: "845 kg/m3"'),
    Field("sediment_water", "sediment_water", "fraction", 'sediment and water, e.g. "0.1 %"'),
    Field("ctl", "ctl", "dimensionless", 'your own factor to the standard volume, e.g. "0.98528"'),
    Field("volume", "volume_m3", "volume", 'all the liquid, e.g. "2450 m3"'),
    Field("mass", "mass_kg", "mass", 'all the liquid, e.g. "2100 t"'),
)
NAMES = {field.name: field for field in FIELDS}


def readings_from_text(tank: Tank, typed: Mapping[str, str]) -> tuple[Readings, dict[str, str]]:
    """Return the readings behind what was typed, and why any of it cannot be read.

    Parameters
    ----------
    tank : Tank
        Its transmitters say which reference and which range a pressure is in.
    typed : mapping of str to str
        By the names of `FIELDS`; blank texts count as not given.

    Returns
    -------
    readings : Readings
        SI. What could not be read is left out, and so is the pressure of a failed signal, which
        is named in ``signals`` instead.
    problems : dict of str to str
        By field name: what is wrong and what to type instead.
    """
    values: dict[str, Any] = {}
    signals: list[tuple[str, str]] = []
    problems: dict[str, str] = {}
    for name, text in typed.items():
        if not text.strip():
            continue
        field = NAMES.get(name)
        if field is None:
            problems[clean(name)] = "is not the name of a reading."
            continue
        try:
            if name in PRESSURES:
                values[field.target], status = _transmitter_pressure(tank, name, text)
                signals += [(name, status)] if status != "good" else []
            else:
                values[field.target] = _value(tank, field, text)
        except QuantityError as error:
            problems[name] = str(error)
    return Readings(**values, signals=tuple(signals)), problems


def typed_units(typed: Mapping[str, str]) -> dict[str, str]:
    """Return the unit that each pressure, level or ullage was typed in; what has none is left out.

    A unit slip can then only be out of that unit.
    """
    found = {}
    for name, text in typed.items():
        if name in PRESSURES or name in ("level", "ullage"):
            dimensions = ("pressure", "current", "fraction") if name in PRESSURES else ("length",)
            try:
                quantity = units.parse_any(text, dimensions)
            except QuantityError:
                continue  # it was refused when it was read
            found[name] = quantity.unit
    return found


def _value(tank: Tank, field: Field, text: str) -> Any:
    if field.target == "temperatures":
        return _temperatures(tank, text)
    quantity = units.parse(text, field.dimension)
    if field.name == "barometer":
        return _barometer(quantity)
    _check_possible(quantity, field)
    return quantity.si


def _transmitter_pressure(tank: Tank, tag: str, text: str) -> tuple[float | None, str]:
    """Return a reading (Pa, the transmitter's own reference) and what its signal is worth.

    A pressure as such counts as a good signal; of a failed signal there is no pressure.
    """
    fitted = tank.dp if tag == "dp" else tank.transmitters.get(tag)
    quantity = units.parse_any(text, ("pressure", "current", "fraction"))
    if fitted is None:
        tags = [*sorted(tank.transmitters), *(["dp"] if tank.dp else [])]
        raise QuantityError(
            quantity.text, f"{tank.name} has no {tag} transmitter.", f"Fitted: {_listed(tags)}."
        )
    if quantity.dimension == "pressure":
        _check_reference(fitted, tag, quantity)
        return quantity.si, "good"
    if quantity.dimension == "fraction" and quantity.unit != "%":
        raise QuantityError(quantity.text, "the unit is missing.", 'Type "98.2 kPa" or "37.5 %".')
    signal = _signal(quantity)
    if signal.status == "failed":
        return None, signal.status
    if fitted.range_pa is None:
        why = f"{tag} has no range in the tank file, so a signal says nothing."
        raise QuantityError(quantity.text, why, "Type a pressure, or add the range.")
    return pressure_from_share(signal.share, fitted.range_pa), signal.status


def _signal(quantity: units.Quantity) -> Signal:
    """Return the signal that a current or a percentage of range is."""
    if quantity.dimension == "current":
        return signal_from_current_a(quantity.si)
    return signal_from_share(quantity.si)


def _check_reference(
    fitted: Transmitter | DifferentialTransmitter, tag: str, quantity: units.Quantity
) -> None:
    """Hold "barg", "kPa(a)" and bare "psi" against what the transmitter reads."""
    if isinstance(fitted, DifferentialTransmitter):
        if quantity.reference is not None:
            why = f"{tag} is a difference, neither gauge nor absolute."
            raise QuantityError(quantity.text, why, f'Type it as "{quantity.unit}".')
        return
    if quantity.reference not in (None, fitted.reads):
        why = f"{tag} reads {fitted.reads} pressure, this is {quantity.reference}."
        advice = "Type what the transmitter shows, or correct the tank file."
        raise QuantityError(quantity.text, why, advice)
    if quantity.reference is None and fitted.reads == "absolute" and quantity.unit == "psi":
        why = f"psi may be gauge or absolute, and {tag} reads absolute pressure."
        raise QuantityError(quantity.text, why, 'Type "psia" if that is what it shows.')


def _temperatures(tank: Tank, text: str) -> tuple[tuple[float | None, float], ...]:
    """Return (elevation in m or None, temperature in K) pairs of "18 degC" or "1 m: 18 degC, …"."""
    if ":" not in text:
        return ((None, _temperature(text)),)
    pairs = []
    for part in text.replace(";", ",").split(","):
        where, colon, what = part.partition(":")
        if not colon:
            why = "each temperature needs its elevation."
            raise QuantityError(clean(part), why, 'Type "1 m: 18 degC, 5 m: 21 degC".')
        elevation = units.parse(where, "length").si
        low, high = tank.vessel.z_min, tank.vessel.z_max
        if not low <= elevation <= high:
            why = f"{tank.name} reaches from {low:.3f} m to {high:.3f} m."
            raise QuantityError(clean(where), why, "Check the elevation.")
        pairs.append((elevation, _temperature(what)))
    elevations = [z for z, _ in pairs]
    if len(set(elevations)) != len(elevations):
        raise QuantityError(clean(text), "two temperatures are at one elevation.")
    return tuple(pairs)


def _temperature(text: str) -> float:
    quantity = units.parse(text, "temperature")
    _check_possible(quantity, NAMES["temperature"])
    return quantity.si


def _barometer(quantity: units.Quantity) -> float:
    """Return the outside pressure (Pa absolute), refusing what no weather and no place gives."""
    if quantity.reference == "gauge":
        raise QuantityError(quantity.text, "a barometer reads absolute pressure.")
    if not 0.5 <= quantity.si / STANDARD_ATMOSPHERE_PA <= 1.1:
        why = "is no outside pressure on land."
        raise QuantityError(quantity.text, why, 'Something like "1013 hPa" is expected.')
    return quantity.si


def _check_possible(quantity: units.Quantity, field: Field) -> None:
    """Refuse values that nothing can have."""
    low, high, why = {
        "temperature": (0.0, 2000.0, "no liquid has this temperature."),
        "density": (250.0, 3_500.0, "no liquid that is stored has this density."),
        "dimensionless": (0.5, 1.5, "no liquid that is stored shrinks or swells so much."),
        "fraction": (0.0, 1.0, "a share lies between 0 and 100 %."),
    }.get(field.dimension, (-math.inf, math.inf, ""))
    if not low <= quantity.si <= high:
        raise QuantityError(quantity.text, why, f"Expected {field.help}.")


def _listed(names: list[str]) -> str:
    return ", ".join(names) or "none"

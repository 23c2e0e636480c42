"""Instruments in a tank file: transmitters, the level gauge and the thermometer."""

from __future__ import annotations

from typing import Any

from tankcalc.instruments import Accuracy, DifferentialTransmitter, Transmitter
from tankcalc.profiles.findings import At, Findings, show
from tankcalc.profiles.leaves import (
    choice,
    fraction,
    listed,
    number,
    pressure,
    quantities,
    quantity,
)
from tankcalc.profiles.leg_schema import LEG, PURGE, SIDE
from tankcalc.profiles.source_schema import source
from tankcalc.profiles.tables import Part, Table, Values, may, need
from tankcalc.units import Quantity

_ELEVATION = quantity("length")
_ACCURACY_PARTS = Table(
    {
        "of_span": may(fraction(), 0.0),
        "of_limit": may(fraction(), 0.0),
        "of_reading": may(fraction(), 0.0),
        "per_kelvin": may(quantity("pressure_per_temperature", "not negative"), 0.0),
        "drift": may(quantity("pressure", "not negative"), 0.0),
        "coverage": may(number(1.0, 4.0), 1.0),
    },
    lambda values, at, findings: Accuracy(**values),
)
_FIXED = Table(
    {"accuracy": need(quantity("pressure", "positive"))},
    lambda values, at, findings: Accuracy(fixed=values["accuracy"]),
)


class PressureAccuracy:
    """An accuracy stated as a pressure, or as a table of its parts."""

    def read(self, value: object, at: At, findings: Findings) -> Any:
        """Return the Accuracy, or None after noting what is wrong."""
        if isinstance(value, dict):
            return _ACCURACY_PARTS.read(value, at, findings)
        return _FIXED.read({"accuracy": value}, at[:-1], findings)


def _range_pa(
    held: list[Quantity] | None, reads: str, at: At, findings: Findings
) -> tuple[float, float] | None:
    """Return what 4 and 20 mA stand for (Pa), noting a range that is empty or of another kind."""
    if held is None:
        return None
    for n, end in enumerate(held):
        if end.reference not in (None, reads):
            findings.add(
                (*at, "range", n),
                f"{show(end.text)} is {end.reference}, the transmitter reads {reads}.",
                "State the range as the transmitter reads it.",
            )
        if end.reference is None and reads == "absolute" and end.unit == "psi":
            findings.add(
                (*at, "range", n),
                f"{show(end.text)} may be gauge or absolute, the transmitter reads absolute.",
                'Write "psia" if that is meant.',
            )
    low, high = held
    if not low.si < high.si:
        findings.add(
            (*at, "range"),
            f"the range ends at {show(high.text)}, not above its beginning {show(low.text)}.",
            "Give what 4 mA stands for, then what 20 mA stands for.",
        )
    if reads == "absolute" and low.si < 0.0:
        findings.add((*at, "range", 0), "an absolute pressure is never below zero.")
    return low.si, high.si


def _accuracy_is_clear(accuracy: Accuracy | None, held: object, at: At, findings: Findings) -> None:
    if accuracy is not None and held is None and (accuracy.of_span or accuracy.of_limit):
        findings.add((*at, "range"), "missing.", "The accuracy is stated as a share of the range.")


def _transmitter(values: Values, at: At, findings: Findings) -> Transmitter | None:
    before = len(findings)
    if values["leg"] is not None and values["purge"] is not None:
        findings.add((*at, "purge"), "stands beside a leg.", "Give one of them.")
    if values["reads"] == "absolute" and values["vent_elevation"] is not None:
        findings.add(
            (*at, "vent_elevation"), "an absolute transmitter has no vent.", "Leave it out."
        )
    range_pa = _range_pa(values["range"], values["reads"], at, findings)
    _accuracy_is_clear(values["accuracy"], range_pa, at, findings)
    if len(findings) > before:
        return None
    return Transmitter(
        tag=str(at[-1]),
        elevation_m=values["elevation"],
        reads=values["reads"],
        vent_elevation_m=values["vent_elevation"],
        range_pa=range_pa,
        accuracy=values["accuracy"],
        leg=values["leg"] or values["purge"],
        elevation_uncertainty_m=values["elevation_uncertainty"],
    )


def _differential(values: Values, at: At, findings: Findings) -> DifferentialTransmitter | None:
    before = len(findings)
    range_pa = _range_pa(values["range"], "differential", at, findings)
    _accuracy_is_clear(values["accuracy"], range_pa, at, findings)
    if len(findings) > before:
        return None
    return DifferentialTransmitter(
        values["sensor_elevation"], values["high"], values["low"], range_pa, values["accuracy"]
    )


_ACCURACY: Part = PressureAccuracy()
_SOURCE = source("pressure")
_RANGE = listed(pressure(), least=2, most=2)

_PRESSURE = Table(
    {
        "elevation": need(_ELEVATION),
        "reads": need(choice("gauge", "absolute")),
        "elevation_uncertainty": may(quantity("length", "positive")),
        "vent_elevation": may(_ELEVATION),
        "range": may(_RANGE),
        "accuracy": may(_ACCURACY),
        "leg": may(LEG),
        "purge": may(PURGE),
        "source": may(_SOURCE),
    },
    _transmitter,
)

TRANSMITTERS = Table(
    {
        "p1": may(_PRESSURE),
        "p2": may(_PRESSURE),
        "p3": may(_PRESSURE),
        "dp": may(
            Table(
                {
                    "sensor_elevation": need(_ELEVATION),
                    "range": may(_RANGE),
                    "accuracy": may(_ACCURACY),
                    "high": need(SIDE),
                    "low": need(SIDE),
                    "source": may(_SOURCE),
                },
                _differential,
            )
        ),
    }
)
"""``[transmitters]`` of a tank file."""

LEVEL_GAUGE = Table(
    {"accuracy": may(quantity("length", "positive")), "source": may(source("length"))}
)
THERMOMETER = Table(
    {
        "accuracy": may(quantity("temperature_difference", "positive")),
        "elevations": may(quantities("length"), ()),
        "source": may(source("temperature")),
    }
)

"""What a quantity can be, and how messages speak of it."""

from __future__ import annotations

from typing import Final, NamedTuple


class Dimension(NamedTuple):
    """How a message calls a quantity of this dimension, and what it suggests to type."""

    noun: str
    example: str
    takes_bare: bool = False


DIMENSIONS: Final[dict[str, Dimension]] = {
    "length": Dimension("a length", "12.5 m"),
    "area": Dimension("an area", "78.5 m2"),
    "volume": Dimension("a volume", "314.2 m3"),
    "mass": Dimension("a mass", "265.4 t"),
    "pressure": Dimension("a pressure", "98.2 kPa"),
    "density": Dimension("a density", "845 kg/m3"),
    "temperature": Dimension("a temperature", "18 degC"),
    "temperature_difference": Dimension("a temperature difference", "3 K"),
    "time": Dimension("a time", "30 min"),
    "angle": Dimension("an angle", "52.0 deg"),
    "fraction": Dimension("a fraction", "0.1 %", takes_bare=True),
    "dimensionless": Dimension("a plain number", "0.02", takes_bare=True),
    "current": Dimension("a current", "12.0 mA"),
    "acceleration": Dimension("an acceleration", "9.81 m/s2"),
    "expansion": Dimension("an expansion coefficient", "1.12e-5 /K"),
    "molar_mass": Dimension("a molar mass", "44.1 g/mol"),
    "volume_flow": Dimension("a volume flow", "250 m3/h"),
    "mass_flow": Dimension("a mass flow", "40 t/h"),
    "speed": Dimension("a speed", "0.5 m/h"),
    "pressure_per_temperature": Dimension("a pressure per kelvin", "2.5 Pa/K"),
}
"""By name; ``takes_bare`` where a number needs no unit."""

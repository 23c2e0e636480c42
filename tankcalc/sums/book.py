"""Units, decimals and rounding of the working."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Decimal
from typing import TYPE_CHECKING, Literal

from tankcalc.constants import ICE_POINT_K
from tankcalc.units import to_unit

if TYPE_CHECKING:
    from tankcalc.units import System

Rounding = Literal["as printed", "unrounded"]

ROUNDINGS: tuple[Rounding, ...] = ("as printed", "unrounded")

BARREL_M3 = 0.158987294928
"""42 US gallons of 231 cubic inches, exact."""


def half_up(value: float, places: int) -> float:
    """Return a figure rounded once, in one step, a half going away from zero.

    Notes
    -----
    The shortest decimal that names the binary figure is what is rounded, so that 2.675 gives
    2.68 where Python's own rounding gives 2.67.

    Examples
    --------
    >>> half_up(2.675, 2), half_up(30.5, 0), round(2.675, 2)
    (2.68, 31.0, 2.67)
    """
    step = Decimal(1).scaleb(-places)
    return float(Decimal(repr(float(value))).quantize(step, rounding=ROUND_HALF_UP))


@dataclass(frozen=True, slots=True)
class Book:
    """Units and decimals of the working.

    Decimals as a table of the trade's standards gives them (API MPMS 12.1.1; from memory): cubic
    metres three, barrels two, tonnes three, temperatures one, the shell's none, factors five,
    density in kg/m3 one.
    """

    rounding: Rounding = "as printed"
    barrels: bool = False
    fahrenheit: bool = False

    @classmethod
    def of(cls, rounding: Rounding, system: System) -> Book:
        """Return the book of a system of units."""
        return cls(rounding, system == "us", system != "metric")

    def kept(self, value: float, places: int) -> float:
        """Return the figure that the working goes on with."""
        return half_up(value, places) if self.rounding == "as printed" else value

    def places(self, printed: int) -> int:
        """Return the decimals to show: some more where nothing is rounded."""
        return printed if self.rounding == "as printed" else printed + 3

    @property
    def volume_unit(self) -> str:
        """The unit of volumes."""
        return "bbl" if self.barrels else "m3"

    @property
    def volume_places(self) -> int:
        """Decimals of volumes."""
        return 2 if self.barrels else 3

    def volume(self, m3: float) -> float:
        """Return a volume in the book's unit, not rounded."""
        return m3 / BARREL_M3 if self.barrels else m3

    def cubic_metres(self, volume: float) -> float:
        """Return a volume of the book in m3."""
        return volume * BARREL_M3 if self.barrels else volume

    @property
    def times_unit(self) -> str:
        """What a volume of the book is multiplied by to be m3, inside a working."""
        return f" x {BARREL_M3} m3/bbl" if self.barrels else ""

    @property
    def per_unit(self) -> str:
        """What m3 are divided by to be a volume of the book, inside a working."""
        return f" / {BARREL_M3} m3/bbl" if self.barrels else ""

    @property
    def temperature_unit(self) -> str:
        """The unit of temperatures."""
        return "degF" if self.fahrenheit else "degC"

    def temperature(self, kelvin: float, places: int = 1) -> float:
        """Return a temperature in the book's unit, as the working goes on with it."""
        return self.kept(to_unit(kelvin, self.temperature_unit, "temperature"), places)

    def kelvin(self, number: float) -> float:
        """Return a temperature of the book in K."""
        return (number - 32.0) / 1.8 + ICE_POINT_K if self.fahrenheit else number + ICE_POINT_K

    def show(self, value: float, places: int) -> str:
        """Return a figure inside a working."""
        return f"{value:.{self.places(places)}f}"

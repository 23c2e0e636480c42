"""From the observed tank to net standard volume, mass and weight, line by line for an auditor.

Two ways of rounding. "As printed": what is read (the table's volumes, temperatures, density) and
every factor are rounded once, half up, to the decimals that the trade's standards print, and the
working goes on with them; volumes and masses go on unrounded and are rounded once, to be printed.
"Unrounded": nothing is rounded. What ``evaluate`` gives is unrounded.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from tankcalc.constants import (
    CONVENTIONAL_AIR_DENSITY_KG_M3,
    CONVENTIONAL_WEIGHT_DENSITY_KG_M3,
)
from tankcalc.gauging.roof import roof_adjustment_m3
from tankcalc.gauging.shell import linear_growth, shell_temperature_k
from tankcalc.sums.book import Book
from tankcalc.units import to_unit

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel


@dataclass(frozen=True, slots=True)
class Line:
    """One line of the working.

    Attributes
    ----------
    symbol, name : str
        As the trade writes it, and in words.
    value : float
        In ``unit``.
    places : int
        Decimals to show.
    unit : str
        Empty for a factor.
    working : str
        What it is made of, in the figures of the lines before it.
    """

    symbol: str
    name: str
    value: float
    places: int
    unit: str
    working: str


@dataclass(frozen=True, slots=True)
class ShellGiven:
    """What the shell's factor is made of; temperatures in K."""

    liquid_k: float
    air_k: float | None
    insulated: bool
    expansion_per_k: float
    calibrated_k: float
    solid: bool = False


@dataclass(frozen=True, slots=True)
class RoofGiven:
    """A roof afloat: its mass (kg), the liquid that it floats in, what the table allows for."""

    mass_kg: float
    density_kg_m3: float
    included_at_kg_m3: float | None


@dataclass(frozen=True, slots=True)
class FactorGiven:
    """What the factor to the standard volume is made of.

    Attributes
    ----------
    value : float
        Unrounded, without the pressure's part.
    source : str
        Whose it is.
    model : DensityModel or None
        Gives the factor from the rounded temperature and density; None where it is no function of
        one temperature: an integral over several, a mixture, the user's own.
    liquid_k, base_k : float or None
        Temperature of the liquid and of the standard volume, K.
    pressure : float
        Factor for the liquid's compression (CPL).
    """

    value: float
    source: str
    model: DensityModel | None = None
    liquid_k: float | None = None
    base_k: float | None = None
    pressure: float = 1.0


@dataclass(frozen=True, slots=True)
class Given:
    """Where the working begins: SI, and None where a line has nothing to say.

    Attributes
    ----------
    level_m, total_m3 : float
        The level, and what the table holds below it.
    water_m3 : float
        Of it free water.
    stretch_m3 : float
        What the head adds to the volume of the product.
    density_kg_m3 : float
        Mean density of the product in the tank.
    reference_kg_m3 : float or None
        At the base temperature.
    sediment_water : float or None
        As a fraction of the standard volume.
    from_pressure : bool
        Whether the mass is primary: the standard volume is then mass over reference density.
    """

    level_m: float
    total_m3: float
    water_m3: float
    stretch_m3: float
    shell: ShellGiven | None
    roof: RoofGiven | None
    factor: FactorGiven | None
    density_kg_m3: float
    reference_kg_m3: float | None
    sediment_water: float | None
    from_pressure: bool


def working(given: Given, book: Book) -> tuple[Line, ...]:
    """Return the lines from the table's volume down to the weight in air."""
    return tuple(_lines(given, book))


def _lines(given: Given, book: Book) -> Iterator[Line]:
    """Yield the lines; volumes go on with all their digits and are rounded only to be printed."""
    total = book.kept(book.volume(given.total_m3), book.volume_places)
    yield _volume(book, "TOV", "total observed volume", total, f"table at {given.level_m:.3f} m")
    observed, terms = total, "TOV"
    if given.water_m3:
        water = book.kept(book.volume(given.water_m3), book.volume_places)
        yield _volume(book, "FW", "free water", water, "table at the water's level")
        observed, terms = total - water, "(TOV - FW)"
    if given.shell is not None:
        shell = list(_shell_lines(given.shell, book))
        yield from shell
        observed, terms = observed * shell[-1].value, f"{terms} x CTSh"
    if given.stretch_m3:
        gain = book.volume(given.stretch_m3)
        made_of = "2 pi R^3 rho g depth / (E t) over the head, every course"
        yield _volume(book, "STR", "stretch of the shell", gain, made_of)
        observed, terms = observed + gain, f"{terms} + STR"
    if given.roof is not None:
        added, made_of = _roof(given.roof, book)
        yield _volume(book, "FRA", "roof", added, made_of)
        observed, terms = observed + added, f"{terms} + FRA"
    yield _volume(book, "GOV", "gross observed volume", observed, terms)
    yield from (_by_mass if given.from_pressure else _by_factor)(given, book, observed)


def _volume(book: Book, symbol: str, name: str, value: float, made_of: str) -> Line:
    places, unit = book.volume_places, book.volume_unit
    return Line(symbol, name, book.kept(value, places), book.places(places), unit, made_of)


def _tonnes(book: Book, symbol: str, name: str, value: float, made_of: str) -> Line:
    return Line(symbol, name, book.kept(value, 3), book.places(3), "t", made_of)


def _factor(book: Book, symbol: str, name: str, value: float, made_of: str) -> Line:
    return Line(symbol, name, book.kept(value, 5), book.places(5), "", made_of)


def _shell_lines(shell: ShellGiven, book: Book) -> Iterator[Line]:
    unit = book.temperature_unit
    liquid = book.temperature(shell.liquid_k)
    made_of = "that of the liquid"
    if not shell.insulated and shell.air_k is not None:
        air = book.temperature(shell.air_k)
        made_of = f"(7 x {book.show(liquid, 1)} + {book.show(air, 1)}) / 8"
        found = shell_temperature_k(liquid, air, insulated=False)
    else:
        found = liquid
    warm = book.kept(found, 0)
    yield Line("TSh", "shell temperature", warm, book.places(0), unit, made_of)
    base = book.temperature(shell.calibrated_k)
    kelvin, calibrated = book.kelvin(warm), book.kelvin(base)
    growth = linear_growth(shell.expansion_per_k, kelvin, calibrated)
    power = 3 if shell.solid else 2
    alpha = shell.expansion_per_k / (1.8 if book.fahrenheit else 1.0)
    made_of = f"(1 + {alpha:.4g} x ({book.show(warm, 0)} - {base:g}))^{power}"
    yield _factor(book, "CTSh", "factor of the shell", growth**power, made_of)


def _roof(roof: RoofGiven, book: Book) -> tuple[float, str]:
    """Return what the roof adds, in the book's unit, and what it is made of."""
    rho = book.kept(roof.density_kg_m3, 1)
    added = float(roof_adjustment_m3(roof.mass_kg, rho, roof.included_at_kg_m3))
    made_of = f"-{roof.mass_kg:g} kg / {book.show(rho, 1)} kg/m3"
    if roof.included_at_kg_m3 is not None:
        made_of = f"{roof.mass_kg:g} kg x (1/{roof.included_at_kg_m3:g} - 1/{book.show(rho, 1)})"
    return book.volume(added), made_of


def _by_factor(given: Given, book: Book, observed: float) -> Iterator[Line]:
    """Yield the lines from the volume: factor, standard and net volume, then mass and weight."""
    if given.factor is None:
        return
    factors = list(_factor_lines(given, given.factor, book))
    yield from factors
    standard = observed
    for line in factors:
        standard *= line.value
    yield from _net(given, book, standard, " x ".join(["GOV", *(line.symbol for line in factors)]))


def _by_mass(given: Given, book: Book, observed: float) -> Iterator[Line]:
    """Yield the lines from the mass that the pressure measures: the volumes follow from it."""
    mass = book.cubic_metres(observed) * given.density_kg_m3 / 1000.0
    # Not rounded: the mean density is what the readings and the profile give.
    made_of = f"GOV x {given.density_kg_m3:.4f} kg/m3, mean by the pressure"
    yield _tonnes(book, "m", "mass of the product", mass, made_of)
    if given.reference_kg_m3 is None:
        return
    reference = book.kept(given.reference_kg_m3, 1)
    standard = book.volume(mass * 1000.0 / reference)
    yield from _net(given, book, standard, f"m / {book.show(reference, 1)} kg/m3")


def _factor_lines(given: Given, factor: FactorGiven, book: Book) -> Iterator[Line]:
    value, made_of = factor.value, factor.source
    if factor.model is not None and factor.liquid_k is not None and factor.base_k is not None:
        assert given.reference_kg_m3 is not None
        reference = book.kept(given.reference_kg_m3, 1)
        number = book.temperature(factor.liquid_k)
        if book.rounding == "as printed":
            value = _factor_of(factor.model, reference, book.kelvin(number), factor.base_k)
        unit = book.temperature_unit
        base = to_unit(factor.base_k, unit, "temperature")
        made_of = (
            f"{factor.source}; {book.show(reference, 1)} kg/m3 at {base:g} {unit}, "
            f"{book.show(number, 1)} {unit}"
        )
    yield _factor(book, "CTL", "factor of temperature", value, made_of)
    if factor.pressure != 1.0:
        yield _factor(book, "CPL", "factor of pressure", factor.pressure, factor.source)


def _factor_of(model: DensityModel, reference: float, kelvin: float, base_k: float) -> float:
    """Return the factor of the liquid of a (rounded) reference density at a temperature."""
    import numpy as np

    liquid = model.of_reference(reference)
    at, base = liquid.checked_density(np.array([kelvin, base_k]))
    return float(at / base)


def _net(given: Given, book: Book, standard: float, made_of: str) -> Iterator[Line]:
    yield _volume(book, "GSV", "gross standard volume", standard, made_of)
    net, symbol = standard, "GSV"
    if given.sediment_water is not None:
        share = f"1 - {100.0 * given.sediment_water:.3f} %"
        clean = _factor(
            book, "CSW", "factor of sediment and water", 1.0 - given.sediment_water, share
        )
        yield clean
        net, symbol = standard * clean.value, "NSV"
        yield _volume(book, "NSV", "net standard volume", net, "GSV x CSW")
    if given.reference_kg_m3 is None:
        return
    reference = book.kept(given.reference_kg_m3, 1)
    mass, shown = book.cubic_metres(net) * reference / 1000.0, book.show(reference, 1)
    yield _tonnes(book, "M", "mass in vacuum", mass, f"{symbol} x {shown} kg/m3")
    air, steel = CONVENTIONAL_AIR_DENSITY_KG_M3, CONVENTIONAL_WEIGHT_DENSITY_KG_M3
    weight = mass * (1.0 - air / reference) / (1.0 - air / steel)
    made_of = f"M x (1 - {air:g}/{shown}) / (1 - {air:g}/{steel:g})"
    yield _tonnes(book, "W", "apparent weight in air", weight, made_of)

"""From the observed tank to net standard volume, mass and weight, line by line for an auditor.

Two ways of rounding. "As printed": what is read (the table's volumes, temperatures, density) and
every factor are rounded once, half up, to the decimals that the trade's standards print, and the
working goes on with them; volumes and masses go on unrounded and are rounded once, to be printed.
"Unrounded": nothing is rounded. What ``evaluate`` gives is unrounded.
"""

from __future__ import annotations

from collections.abc import Generator, Iterator
from dataclasses import replace

from tankcalc.constants import (
    CONVENTIONAL_AIR_DENSITY_KG_M3,
    CONVENTIONAL_WEIGHT_DENSITY_KG_M3,
)
from tankcalc.errors import InputError, RangeError
from tankcalc.gauging.roof import roof_adjustment_m3
from tankcalc.gauging.shell import linear_growth, shell_temperature_k
from tankcalc.sums.book import Book
from tankcalc.sums.given import FactorGiven, Given, HeadGiven, Line, RoofGiven, ShellGiven
from tankcalc.units import base_words


def working(given: Given, book: Book) -> tuple[Line, ...]:
    """Return the lines from the reading or the table's volume down to the weight in air."""
    return tuple(_lines(given, book))


def _lines(given: Given, book: Book) -> Iterator[Line]:
    if given.head is not None:
        yield from _head(given.head, given.level_m, book)
    # A mass that the pressure gives is not to carry the rounding of the shell's factor.
    shell_book = book if given.head is None else replace(book, rounding="unrounded")
    observed = yield from _observed(given, book, shell_book)
    if given.head is not None or given.factor is None:
        mass = yield from _gross_mass(given, book, observed)
        if given.factor is None:
            yield from _weight(given, book, mass, given.density_kg_m3, "GM")
        elif given.factor.own:
            yield from _by_factor(given, book, observed, given.factor)
        else:
            yield from _by_mass(given, book, mass, given.factor)
    else:
        yield from _by_factor(given, book, observed, given.factor)


def _head(head: HeadGiven, level_m: float, book: Book) -> Iterator[Line]:
    """Yield the lines from the pressure to the level."""
    kilopascal, areal = head.head_pa / 1000.0, head.head_pa / head.gravity_m_s2
    made_of = (
        f"at {head.tag}'s tap, less the pressure on the surface; {head.tag} reads "
        f"{head.reading_pa / 1000.0:.3f} kPa, air, vapour and legs taken off"
    )
    yield Line("dP", "head of the liquid", kilopascal, 4, "kPa", made_of)
    made_of = f"dP x 1000 / {head.gravity_m_s2:.5f} m/s2"
    yield Line("MA", "mass over an area", areal, 3, "kg/m2", made_of)
    if level_m > head.tap_m:
        mean = areal / (level_m - head.tap_m)
        made_of = f"{head.tap_m:.3f} m (tap) + MA / {mean:.4f} kg/m3, mean above the tap"
        yield Line("L", "level", level_m, 4, "m", made_of)


def _observed(given: Given, book: Book, shell_book: Book) -> Generator[Line, None, float]:
    """Yield the lines to the gross observed volume, and return it.

    Volumes go on with all their digits and are rounded only to be printed.
    """
    total = book.kept(book.volume(given.total_m3), book.volume_places)
    yield _volume(book, "TOV", "total observed volume", total, given.total_of)
    observed, terms = total, "TOV"
    if given.water_m3:
        water = book.kept(book.volume(given.water_m3), book.volume_places)
        yield _volume(book, "FW", "free water", water, f"table at {given.water_level_m:.3f} m")
        observed, terms = total - water, "(TOV - FW)"
    if given.shell is not None:
        shell = list(_shell_lines(given.shell, shell_book))
        yield from shell
        observed, terms = observed * shell[-1].value, f"{terms} x CTSh"
    if given.stretch_m3:
        gain = book.volume(given.stretch_m3)
        yield _volume(book, "STR", "stretch of the shell", gain, given.stretch_of)
        observed, terms = observed + gain, f"{terms} + STR"
    if given.roof is not None:
        added, made_of = _roof(given.roof, shell_book)
        yield _volume(book, "FRA", "floating-roof adjustment", added, made_of)
        observed, terms = observed + added, f"{terms} + FRA"
    yield _volume(book, "GOV", "gross observed volume", observed, terms)
    return observed


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
    return book.volume(added), made_of + book.per_unit


def _gross_mass(given: Given, book: Book, observed: float) -> Generator[Line, None, float]:
    """Yield the product's mass by its mean density, and return it (t).

    The density is not rounded: from a pressure it is what the readings and the profile give.
    """
    rho = given.density_kg_m3
    yield Line("RHO", "mean density in the tank", rho, 4, "kg/m3", given.density_of)
    mass = book.cubic_metres(observed) * rho / 1000.0
    yield _tonnes(book, "GM", "gross mass", mass, f"GOV{book.times_unit} x RHO / 1000")
    return mass


def _by_factor(given: Given, book: Book, observed: float, factor: FactorGiven) -> Iterator[Line]:
    """Yield the lines from the volume: factor, standard and net volume, then mass and weight."""
    factors = list(_factor_lines(given, factor, book))
    yield from factors
    standard = observed
    for line in factors:
        standard *= line.value
    yield from _net(given, book, standard, " x ".join(["GOV", *(line.symbol for line in factors)]))


def _by_mass(given: Given, book: Book, mass: float, factor: FactorGiven) -> Iterator[Line]:
    """Yield the lines from the mass that the pressure measures: the volumes follow from it."""
    assert given.reference_kg_m3 is not None
    reference = book.kept(given.reference_kg_m3, 1)
    shown = book.show(reference, 1)
    made_of = f"RHO / {shown}, not used here: {_source(given, factor, book)}"
    yield _factor(book, "CTL", "factor of temperature", factor.value * factor.pressure, made_of)
    standard = book.volume(mass * 1000.0 / reference)
    yield from _net(given, book, standard, f"GM x 1000 / {shown} kg/m3{book.per_unit}")


def _factor_lines(given: Given, factor: FactorGiven, book: Book) -> Iterator[Line]:
    value = factor.value
    if book.rounding == "as printed" and factor.model is not None:
        assert given.reference_kg_m3 is not None
        assert factor.liquid_k is not None
        assert factor.base_k is not None
        reference = book.kept(given.reference_kg_m3, 1)
        kelvin = book.kelvin(book.temperature(factor.liquid_k))
        value = _factor_of(factor, reference, kelvin)
    yield _factor(book, "CTL", "factor of temperature", value, _source(given, factor, book))
    if factor.pressure != 1.0:
        made_of = f"{factor.source}; {factor.gauge_pa / 1000.0:.3f} kPa gauge"
        yield _factor(book, "CPL", "factor of pressure", factor.pressure, made_of)


def _source(given: Given, factor: FactorGiven, book: Book) -> str:
    """Return whose factor it is, and the figures that go into it."""
    if factor.own or given.reference_kg_m3 is None or factor.base_k is None:
        return factor.source
    reference = book.show(book.kept(given.reference_kg_m3, 1), 1)
    unit = book.temperature_unit
    made_of = f"{factor.source}; {reference} kg/m3 at {base_words(factor.base_k, book.fahrenheit)}"
    if factor.liquid_k is None:
        return f"{made_of}, mean {given.density_kg_m3:.4f} kg/m3 in the tank"
    return f"{made_of}, liquid at {book.show(book.temperature(factor.liquid_k), 1)} {unit}"


def _factor_of(factor: FactorGiven, reference: float, kelvin: float) -> float:
    """Return the factor of a rounded reference density at a rounded temperature.

    Where rounding alone puts one of them outside the model's limits, the unrounded factor.
    """
    import numpy as np

    assert factor.model is not None
    try:
        liquid = factor.model.of_reference(reference)
        at, base = liquid.checked_density(np.array([kelvin, factor.base_k]))
    except (InputError, RangeError):
        return factor.value
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
    made_of = f"{symbol}{book.times_unit} x {shown} kg/m3 / 1000"
    yield _tonnes(book, "M", "mass in vacuum", mass, made_of)
    yield from _weight(given, book, mass, reference, "M")


def _weight(
    given: Given, book: Book, mass: float, density_kg_m3: float, symbol: str
) -> Iterator[Line]:
    air, steel = CONVENTIONAL_AIR_DENSITY_KG_M3, CONVENTIONAL_WEIGHT_DENSITY_KG_M3
    weight = mass * (1.0 - air / density_kg_m3) / (1.0 - air / steel)
    shown = book.show(density_kg_m3, 1) if given.factor is not None else "RHO"
    made_of = f"{symbol} x (1 - {air:g}/{shown}) / (1 - {air:g}/{steel:g})"
    yield _tonnes(book, "W", "apparent weight in air", weight, made_of)

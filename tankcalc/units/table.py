"""The units that operators type: what each is worth in SI, and how it is spelled.

A unit is exact by definition unless its row says otherwise. To add one, add a row here and its
independent value in ``tests/test_units_table.py``, which holds every row against another source.
"""

from __future__ import annotations

from typing import Final, NamedTuple

from tankcalc.constants import ICE_POINT_K, STANDARD_ATMOSPHERE_PA, STANDARD_GRAVITY_M_S2


class Unit(NamedTuple):
    """One unit: SI value = (number + shift) * factor / per.

    A factor and a divisor, so that both "30 mm" and "12.5 kPa" come out correctly rounded.
    """

    name: str
    dimension: str
    factor: float
    per: float = 1.0
    shift: float = 0.0

    def to_si(self, number: float) -> float:
        """Return the SI value of a number of this unit."""
        return (number + self.shift) * self.factor / self.per

    def from_si(self, si: float) -> float:
        """Return the number of this unit that makes an SI value."""
        return si * self.per / self.factor - self.shift


# Exact by definition.
_FT: Final = 0.3048  # international foot, 1959
_IN: Final = 0.0254
_FT3: Final = 0.028316846592
_LB: Final = 0.45359237  # international avoirdupois pound, 1959
_US_GAL: Final = 0.003785411784  # 231 in3
_IMP_GAL: Final = 0.00454609  # United Kingdom Units of Measurement Regulations 1995
_OIL_BBL: Final = 0.158987294928  # 42 US gallons
_G_N: Final = STANDARD_GRAVITY_M_S2
_PSI: Final = _LB * _G_N / _IN**2
_INCH_WATER: Final = 1000 * _G_N * _IN  # conventional: water of 1000 kg/m3
# As printed in NIST SP 811 (2008), B.8; no definition has more digits.
_INCH_WATER_39F: Final = 249.082
_INCH_WATER_60F: Final = 248.84
_INCH_MERCURY_60F: Final = 3376.85
# Water at 20 degC, 998.2067 kg/m3: Tanaka et al., Metrologia 38 (2001) 301, eq. (1).
_INCH_WATER_68F: Final = 998.2067 * _G_N * _IN

_Row = tuple[str, float, float, str]
"""Name, factor, divisor, other spellings (parted by commas)."""

_ROWS: Final[dict[str, tuple[_Row, ...]]] = {
    "length": (
        ("m", 1, 1, "metre, metres, meter, meters"),
        ("mm", 1, 1000, "millimetre, millimetres, millimeter, millimeters"),
        ("cm", 1, 100, "centimetre, centimetres, centimeter, centimeters"),
        ("ft", 3048, 10_000, "foot, feet, '"),
        ("in", 254, 10_000, "inch, inches, \", ''"),
        ("km", 1000, 1, ""),
        ("US survey ft", 1200, 3937, "ft(US survey), US survey foot, US survey feet"),
    ),
    "area": (
        ("m2", 1, 1, "sq m"),
        ("cm2", 1, 1e4, ""),
        ("mm2", 1, 1e6, ""),
        ("ft2", _FT**2, 1, "sq ft"),
        ("in2", _IN**2, 1, "sq in"),
    ),
    "volume": (
        ("m3", 1, 1, "cu m"),
        ("L", 1, 1000, "l, litre, litres, liter, liters, dm3"),
        (
            "US gal",
            _US_GAL,
            1,
            "USgal, gal(US), gals(US), gal US, US gals, US gallon, US gallons, gallons(US)",
        ),
        (
            "imp gal",
            _IMP_GAL,
            1,
            "impgal, gal(imp), gal(UK), UK gal, imp gals, imperial gal, imperial gallon,"
            " imperial gallons",
        ),
        ("oil bbl", _OIL_BBL, 1, "bbl(oil), oil barrel, oil barrels, oil bbls, bbl(42 US gal)"),
        ("ft3", _FT3, 1, "cu ft"),
        ("in3", _IN**3, 1, "cu in"),
        ("hL", 1, 10, "hl"),
        ("kL", 1, 1, "kl"),
        ("mL", 1, 1e6, "ml, cm3"),
    ),
    "mass": (
        ("kg", 1, 1, "kilogram, kilograms"),
        ("g", 1, 1000, "gram, grams"),
        ("t", 1000, 1, "tonne, tonnes, metric ton, metric tons, ton(metric)"),
        ("lb", _LB, 1, "lbs, pound, pounds"),
        ("long ton", 2240 * _LB, 1, "long tons, ton(long), ton(UK)"),
        ("short ton", 2000 * _LB, 1, "short tons, ton(short), ton(US)"),
    ),
    "pressure": (
        ("kPa", 1000, 1, ""),
        ("bar", 1e5, 1, "bars"),
        ("mbar", 100, 1, "millibar, millibars"),
        ("Pa", 1, 1, "pascal, pascals"),
        ("psi", _PSI, 1, "lbf/in2, lb/in2"),
        ("kgf/cm2", 1e4 * _G_N, 1, "kg/cm2, kp/cm2"),  # "kg/cm2" is how gauges print kgf/cm2
        ("hPa", 100, 1, ""),
        ("MPa", 1e6, 1, ""),
        ("GPa", 1e9, 1, ""),
        ("ksi", 1000 * _PSI, 1, ""),
        ("atm", STANDARD_ATMOSPHERE_PA, 1, ""),
        # Conventional columns: water of 1000 kg/m3, mercury of 13 595.1 kg/m3, standard gravity
        # (ISO 80000-4; NIST SP 811 B.8).
        ("mmH2O", _G_N, 1, "mmWC, mm WC, mmWG, mm WG"),
        ("cmH2O", 10 * _G_N, 1, "cmWC, cm WC"),
        ("mH2O", 1000 * _G_N, 1, "mWC, m WC"),
        ("inH2O@4degC", _INCH_WATER, 1, "inH2O@4C, inH2O(4degC), inH2O(conv)"),
        ("inH2O@39.2degF", _INCH_WATER_39F, 1, "inH2O@39.2F, inH2O(39.2degF)"),
        ("inH2O@60degF", _INCH_WATER_60F, 1, "inH2O@60F, inH2O(60degF)"),
        (
            "inH2O@68degF",
            _INCH_WATER_68F,
            1,
            "inH2O@68F, inH2O(68degF), inH2O@20degC, inH2O@20C, inH2O(20degC)",
        ),
        ("ftH2O@4degC", 12 * _INCH_WATER, 1, "ftH2O@4C, ftH2O(4degC), ftH2O(conv)"),
        ("ftH2O@39.2degF", 12 * _INCH_WATER_39F, 1, "ftH2O@39.2F, ftH2O(39.2degF)"),
        ("ftH2O@60degF", 12 * _INCH_WATER_60F, 1, "ftH2O@60F, ftH2O(60degF)"),
        (
            "ftH2O@68degF",
            12 * _INCH_WATER_68F,
            1,
            "ftH2O@68F, ftH2O(68degF), ftH2O@20degC, ftH2O@20C, ftH2O(20degC)",
        ),
        ("mmHg", 13.5951 * _G_N, 1, ""),
        ("inHg", 13.5951 * 25.4 * _G_N, 1, "inHg(conv), inHg@0degC, inHg@32degF"),
        ("inHg@60degF", _INCH_MERCURY_60F, 1, "inHg@60F, inHg(60degF)"),
        ("torr", STANDARD_ATMOSPHERE_PA, 760, "Torr"),
    ),
    "density": (
        ("kg/m3", 1, 1, "kg m-3"),
        ("g/cm3", 1000, 1, "g/cc"),
        ("kg/L", 1000, 1, "kg/l, kg/dm3"),
        ("g/mL", 1000, 1, "g/ml"),
        ("g/L", 1, 1, "g/l"),
        ("t/m3", 1000, 1, ""),
        ("lb/ft3", _LB, _FT3, "lb/cu ft, lbs/ft3"),
        ("lb/US gal", _LB, _US_GAL, "lb/USgal, lb/gal(US), lbs/US gal"),
        ("lb/imp gal", _LB, _IMP_GAL, "lb/impgal, lb/gal(imp), lbs/imp gal"),
    ),
    "temperature": (
        ("degC", 1, 1, "C, deg C, Celsius"),
        ("degF", 5, 9, "F, deg F, Fahrenheit"),
        ("K", 1, 1, "kelvin"),
        ("degR", 5, 9, "deg R"),
    ),
    "temperature_difference": (
        ("K", 1, 1, "kelvin"),
        ("degC", 1, 1, "C, deg C, Celsius"),
        ("degF", 5, 9, "F, deg F, Fahrenheit"),
        ("degR", 5, 9, "deg R"),
    ),
    "time": (
        ("s", 1, 1, "sec, second, seconds"),
        ("ms", 1, 1000, ""),
        ("min", 60, 1, "minute, minutes"),
        ("h", 3600, 1, "hr, hrs, hour, hours"),
        ("d", 86_400, 1, "day, days"),
    ),
    "angle": (
        ("deg", 3.141592653589793, 180, "degree, degrees"),
        ("rad", 1, 1, "radian, radians"),
    ),
    "fraction": (
        ("1", 1, 1, ""),
        ("%", 1, 100, "percent"),
        ("g/kg", 1, 1000, ""),
        ("ppm", 1, 1e6, ""),
    ),
    "dimensionless": (
        ("1", 1, 1, ""),
        ("%", 1, 100, "percent"),
        ("ppm", 1, 1e6, ""),
        ("mm/m", 1, 1000, ""),
        ("m/m", 1, 1, ""),
        ("in/ft", 1, 12, ""),
    ),
    "current": (("mA", 1, 1000, ""), ("A", 1, 1, "")),
    "acceleration": (
        ("m/s2", 1, 1, "m s-2"),
        ("ft/s2", _FT, 1, ""),
    ),
    "expansion": (
        ("1/K", 1, 1, "/K, per K, K-1"),
        ("1/degC", 1, 1, "/degC, /C, per degC"),
        ("1/degF", 9, 5, "/degF, /F, per degF"),
        ("ppm/K", 1, 1e6, "ppm/degC"),
        ("%/K", 1, 100, "%/degC"),
    ),
    "molar_mass": (
        ("g/mol", 1, 1000, ""),
        ("kg/mol", 1, 1, ""),
        ("kg/kmol", 1, 1000, ""),
        ("lb/lbmol", 1, 1000, ""),
    ),
    "volume_flow": (
        ("m3/h", 1, 3600, "m3/hr"),
        ("m3/min", 1, 60, ""),
        ("m3/s", 1, 1, ""),
        ("m3/d", 1, 86_400, "m3/day"),
        ("L/s", 1, 1000, "l/s"),
        ("L/min", 1, 60_000, "l/min"),
        ("L/h", 1, 3.6e6, "l/h"),
        ("US gal/min", _US_GAL, 60, "USgal/min, gal(US)/min, US gpm"),
        ("imp gal/min", _IMP_GAL, 60, "impgal/min, gal(imp)/min, imp gpm"),
        ("oil bbl/h", _OIL_BBL, 3600, "bbl(oil)/h, oil bbl/hr"),
        ("oil bbl/d", _OIL_BBL, 86_400, "bbl(oil)/d, oil bbl/day"),
        ("ft3/min", _FT3, 60, ""),
        ("ft3/h", _FT3, 3600, ""),
    ),
    "mass_flow": (
        ("t/h", 1000, 3600, "t/hr"),
        ("t/d", 1000, 86_400, "t/day"),
        ("kg/h", 1, 3600, "kg/hr"),
        ("kg/min", 1, 60, ""),
        ("kg/s", 1, 1, ""),
        ("lb/h", _LB, 3600, "lb/hr, lbs/h"),
        ("lb/min", _LB, 60, ""),
        ("lb/s", _LB, 1, ""),
    ),
    "speed": (
        ("m/s", 1, 1, ""),
        ("m/min", 1, 60, ""),
        ("m/h", 1, 3600, "m/hr"),
        ("mm/s", 1, 1000, ""),
        ("mm/min", 1, 60_000, ""),
        ("mm/h", 1, 3.6e6, "mm/hr"),
        ("cm/h", 1, 3.6e5, "cm/hr"),
        ("km/h", 1000, 3600, ""),
        ("ft/s", _FT, 1, ""),
        ("ft/min", _FT, 60, ""),
        ("ft/h", _FT, 3600, "ft/hr"),
        ("in/min", _IN, 60, ""),
        ("in/h", _IN, 3600, "in/hr"),
    ),
    "pressure_per_temperature": (
        ("Pa/K", 1, 1, "Pa/degC"),
        ("hPa/K", 100, 1, "hPa/degC"),
        ("kPa/K", 1000, 1, "kPa/degC"),
        ("mbar/K", 100, 1, "mbar/degC"),
        ("bar/K", 1e5, 1, "bar/degC"),
        ("psi/degF", _PSI * 9, 5, ""),
    ),
}

_SHIFTS: Final = {"degC": ICE_POINT_K, "degF": 459.67}
"""Added to a temperature before its factor; a temperature difference has none."""


def _unit(dimension: str, row: _Row) -> Unit:
    name, factor, per, _ = row
    shift = _SHIFTS.get(name, 0.0) if dimension == "temperature" else 0.0
    return Unit(name, dimension, float(factor), float(per), shift)


def _index(dimension: str) -> dict[str, Unit]:
    """Every spelling of every unit of a dimension."""
    words: dict[str, Unit] = {}
    for row in _ROWS[dimension]:
        unit = _unit(dimension, row)
        for word in (row[0], *(other.strip() for other in row[3].split(",") if other.strip())):
            words[word] = unit
    return words


WORDS: Final[dict[str, dict[str, Unit]]] = {dimension: _index(dimension) for dimension in _ROWS}
"""By dimension, then by spelling: the unit."""

NAMES: Final = {dimension: tuple(row[0] for row in rows) for dimension, rows in _ROWS.items()}
"""By dimension: the main spelling of each unit, the most usual first."""

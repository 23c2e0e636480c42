"""Correlations of others, from which tests build grids as a user would from a data sheet."""

from __future__ import annotations

import csv
import math
from collections.abc import Callable
from functools import cache
from pathlib import Path

import chemicals
import numpy as np
from CoolProp.CoolProp import PropsSI

from tankcalc.fluids.solution import Grid

ICE = 273.15

LALIBERTE = {
    "H2SO4": "7664-93-9",
    "Sodium hydroxide": "1310-73-2",
    "Sodium chloride": "7647-14-5",
    "Calcium chloride": "10043-52-4",
    "Potassium hydroxide": "1310-58-3",
    "Hydrogen chloride": "7647-01-0",
    "Nitric acid": "7697-37-2",
    "Phosphoric acid": "7664-38-2",
    "Sucrose": "57-50-1",
    "Ammonia": "7664-41-7",
}
"""Solutes of the published rows and their CAS numbers in the correlation's table."""


@cache
def _constants(cas: str) -> tuple[float, ...]:
    """The five constants of a solute, from the table in the chemicals library."""
    file = Path(chemicals.__file__).parent / "Electrolytes" / "Laliberte2009.tsv"
    with file.open(encoding="utf-8") as table:
        rows = csv.DictReader(table, delimiter="\t")
        row = next(row for row in rows if row["CASRN"] == cas)
    return tuple(float(row[f"c{n}"]) for n in range(5))


def laliberte(solute: str, mass_fraction: float, t_c: float) -> float:
    """Density, kg/m3, by Laliberte and Cooper, J. Chem. Eng. Data 49 (2004) 1141; Kell's water."""
    t = t_c
    water = 999.83952 + t * (16.945176 + t * (-7.9870401e-3 + t * (-4.6170461e-5)))
    water += t**4 * (1.0556302e-7 - 2.8054253e-10 * t)
    water /= 1.0 + 0.01687985 * t
    c0, c1, c2, c3, c4 = _constants(LALIBERTE[solute])
    apparent = (c0 * mass_fraction + c1) * math.exp(1e-6 * (t + c4) ** 2)
    apparent /= mass_fraction + c2 + c3 * t
    return 1.0 / ((1.0 - mass_fraction) / water + mass_fraction / apparent)


def coolprop(fluid: str, mass_fraction: float, t_c: float) -> float:
    """Density, kg/m3, of one of the library's aqueous solutions."""
    return float(PropsSI("D", "T", t_c + ICE, "P", 101_325, f"INCOMP::{fluid}[{mass_fraction}]"))


def grid_of(correlation: Callable[[float, float], float], most: float, hottest_c: int = 50) -> Grid:
    """A grid in steps of 5 % and 5 K, from 0 degC and from 5 % up to a largest mass fraction."""
    shares = tuple(float(w) for w in np.round(np.arange(0.05, most + 1e-9, 0.05), 6))
    temperatures = range(0, hottest_c + 1, 5)
    rows = tuple(tuple(correlation(w, float(t)) for t in temperatures) for w in shares)
    return Grid(shares, tuple(t + ICE for t in temperatures), rows, "a correlation", "2004")

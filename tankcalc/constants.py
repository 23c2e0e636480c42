"""Physical constants, each with its source and year."""

from __future__ import annotations

from typing import Final

STANDARD_GRAVITY_M_S2: Final = 9.80665
"""Standard acceleration of free fall: 3rd CGPM (1901), exact."""

GAS_CONSTANT_J_MOL_K: Final = 8.31446261815324
"""Molar gas constant: CODATA 2018, exact since the 2019 SI."""

STANDARD_ATMOSPHERE_PA: Final = 101_325.0
"""Standard atmosphere: 10th CGPM (1954), exact."""

ICE_POINT_K: Final = 273.15
"""0 degC in kelvin: definition of the Celsius scale, exact."""

CONVENTIONAL_AIR_DENSITY_KG_M3: Final = 1.2
"""Air density of the conventional mass: OIML D 28 (2004)."""

CONVENTIONAL_WEIGHT_DENSITY_KG_M3: Final = 8_000.0
"""Density of the reference weights of the conventional mass: OIML D 28 (2004)."""

"""Where the working begins, and what one of its lines is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

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
    gauge_pa : float
        The pressure that it is for, Pa gauge.
    own : bool
        Whether the user gave the factor.
    """

    value: float
    source: str
    model: DensityModel | None = None
    liquid_k: float | None = None
    base_k: float | None = None
    pressure: float = 1.0
    gauge_pa: float = 0.0
    own: bool = False


@dataclass(frozen=True, slots=True)
class HeadGiven:
    """The pressure that the level rests on.

    Attributes
    ----------
    tag : str
        The transmitter.
    reading_pa : float
        What it reads, Pa in its own reference.
    head_pa : float
        Pressure at its tap less that on the surface: the weight of the liquid between, Pa.
    gravity_m_s2 : float
    tap_m : float
        Elevation of the tap, m.
    """

    tag: str
    reading_pa: float
    head_pa: float
    gravity_m_s2: float
    tap_m: float


@dataclass(frozen=True, slots=True)
class Given:
    """Where the working begins: SI, and None where a line has nothing to say.

    Attributes
    ----------
    level_m, total_m3 : float
        The level, and what the table holds below it.
    total_of : str
        Where the table was read.
    water_m3 : float
        Of it free water.
    water_level_m : float or None
    stretch_m3 : float
        What the head adds to the volume of the product.
    stretch_of : str
        What that is made of.
    head : HeadGiven or None
        Where the level rests on a pressure: the mass is then primary, and the standard volume is
        mass over reference density.
    density_kg_m3 : float
        Mean density of the product in the tank.
    density_of : str
        Where it is from.
    reference_kg_m3 : float or None
        At the base temperature.
    sediment_water : float or None
        As a fraction of the standard volume.
    remark : str
        Why there is no standard volume; empty where there is one.
    """

    level_m: float
    total_m3: float
    total_of: str
    water_m3: float
    water_level_m: float | None
    stretch_m3: float
    stretch_of: str
    head: HeadGiven | None
    shell: ShellGiven | None
    roof: RoofGiven | None
    factor: FactorGiven | None
    density_kg_m3: float
    density_of: str
    reference_kg_m3: float | None
    sediment_water: float | None
    remark: str = ""

"""A liquid, or layers of liquids, as a profile file describes them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tankcalc.fluids.models import DensityModel
    from tankcalc.fluids.vapour import Vapour


@dataclass(frozen=True, slots=True)
class Layer:
    """One liquid of a stack: its density model and the elevation of its top.

    ``top_m`` is None for the uppermost layer, which reaches the surface; the standard
    uncertainty of the density is None where it is not stated.
    """

    name: str
    model: DensityModel
    top_m: float | None = None
    uncertainty_kg_m3: float | None = None


@dataclass(frozen=True, slots=True)
class Fluid:
    """Layers from the bottom up, with the vapour above them.

    Attributes
    ----------
    name : str
        Name shown to the operator.
    layers : tuple of Layer
        At least one; tops rise; only the last has none.
    vapour : Vapour or None
        What fills the space above; None: outside air.
    file : str
        Stem of the fluid's file.
    version : str
        SHA-256 over the bytes of every file it is made of, in hex.
    """

    name: str
    layers: tuple[Layer, ...]
    vapour: Vapour | None = None
    file: str = ""
    version: str = ""

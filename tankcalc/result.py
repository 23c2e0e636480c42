"""The answer: what is in the tank, how it is known, and what is worth a look."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    Number = float | npt.NDArray[np.float64]

Status = Literal["good", "check", "refused"]

Bounds = Mapping[str, tuple[float, float]]
"""By JSON key: the least and the most that a figure can be."""


@dataclass(frozen=True, slots=True)
class Notice:
    """A warning or a refusal as data: a code a program can test, a message a person can read.

    Attributes
    ----------
    code : str
        Stable, lower case with underscores.
    message : str
        One or two sentences: what was found, what to do.
    reading : str
        Name of the reading it belongs to ("p1", "level", ...); empty when it belongs to none.
    refuses : bool
        True where no honest answer exists because of it.
    where : array of bool or None
        The readings it applies to, when the answer is for an array; None: all of them.
    bounds : mapping of str to (float, float), or None
        Between what the figures lie all the same, where physics says so of one reading.
    """

    code: str
    message: str
    reading: str = ""
    refuses: bool = False
    where: npt.NDArray[np.bool_] | None = field(default=None, compare=False)
    bounds: Bounds | None = field(default=None, compare=False)


@dataclass(frozen=True, slots=True)
class LayerShare:
    """One layer as it lies in the tank at this answer: from, to (m), mean density, volume."""

    name: str
    bottom_m: float
    top_m: float
    density_kg_m3: float
    volume_m3: float


@dataclass(frozen=True, slots=True)
class Result:
    """What ``evaluate`` answers; SI throughout, the key says the unit.

    For one reading every figure is a float, or None where it cannot be known. For arrays every
    figure is an array of the readings' shape; rows whose ``refused`` is True hold NaN.
    """

    tank: str
    fluid: str
    basis: str
    status: Status
    warnings: tuple[Notice, ...] = ()
    level_m: Number | None = None
    ullage_m: Number | None = None
    fill: Number | None = None
    water_level_m: Number | None = None
    water_volume_m3: Number | None = None
    volume_m3: Number | None = None
    product_volume_m3: Number | None = None
    mass_kg: Number | None = None
    product_mass_kg: Number | None = None
    vapour_mass_kg: Number | None = None
    weight_in_air_kg: Number | None = None
    density_kg_m3: Number | None = None
    standard_volume_m3: Number | None = None
    net_standard_volume_m3: Number | None = None
    net_mass_kg: Number | None = None
    net_weight_in_air_kg: Number | None = None
    reference_temperature_c: float | None = None
    reference_density_kg_m3: Number | None = None
    ctl: Number | None = None
    cpl: float | None = None
    ctsh: float | None = None
    heel_volume_m3: Number | None = None
    heel_mass_kg: Number | None = None
    p1_pa: Number | None = None
    p2_pa: Number | None = None
    p3_pa: Number | None = None
    dp_pa: Number | None = None
    room_m3: Number | None = None
    pumpable_m3: Number | None = None
    expanded_uncertainty: Mapping[str, float | None] = field(
        default_factory=lambda: MappingProxyType({})
    )
    layers: tuple[LayerShare, ...] = ()
    refused: npt.NDArray[np.bool_] | None = field(default=None, compare=False)

    @property
    def refusals(self) -> tuple[Notice, ...]:
        """The notices that refuse."""
        return tuple(notice for notice in self.warnings if notice.refuses)

    @property
    def bounds(self) -> Bounds:
        """Between what the figures of a refused answer lie; empty where nothing bounds them."""
        return next((n.bounds for n in self.warnings if n.bounds is not None), {})


JSON_KEYS = (
    "tank",
    "fluid",
    "basis",
    "status",
    "level_m",
    "ullage_m",
    "fill",
    "water_level_m",
    "water_volume_m3",
    "volume_m3",
    "product_volume_m3",
    "mass_kg",
    "product_mass_kg",
    "vapour_mass_kg",
    "weight_in_air_kg",
    "density_kg_m3",
    "standard_volume_m3",
    "net_standard_volume_m3",
    "net_mass_kg",
    "net_weight_in_air_kg",
    "reference_temperature_c",
    "reference_density_kg_m3",
    "ctl",
    "cpl",
    "ctsh",
    "heel_volume_m3",
    "heel_mass_kg",
    "p1_pa",
    "p2_pa",
    "p3_pa",
    "dp_pa",
    "room_m3",
    "pumpable_m3",
)


def as_json(result: Result) -> dict[str, Any]:
    """Return the result of one reading as plain JSON data, keys as the interface names them."""
    data: dict[str, Any] = {key: getattr(result, key) for key in JSON_KEYS}
    data["expanded_uncertainty"] = dict(result.expanded_uncertainty)
    data["bounds"] = {key: list(pair) for key, pair in result.bounds.items()}
    data["warnings"] = [{"code": n.code, "message": n.message} for n in result.warnings]
    return data

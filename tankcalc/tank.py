"""One vessel with everything fitted to it, as the calculation sees it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING

from tankcalc.fluids.vapour import Vapour
from tankcalc.instruments import Accuracy, DifferentialTransmitter, Transmitter
from tankcalc.surroundings import Surroundings

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel

LIMIT_ORDER = (
    "low_low",
    "minimum_working",
    "maximum_working",
    "high_high",
    "overfill_action",
    "critical_high",
)
"""Levels of concern by their trade names, from the lowest up (order: common practice)."""


@dataclass(frozen=True, slots=True)
class Shell:
    """Shell material and the state the dimensions or the table were taken in (SI).

    ``courses_m`` are those of a vertical shell, from the bottom up: from, to and internal radius;
    ``thickness_m`` is one plate for all of them, or one for each.
    """

    expansion_per_k: float | None = None
    calibrated_at_k: float | None = None
    insulated: bool = False
    thickness_m: tuple[float, ...] = ()
    modulus_pa: float | None = None
    table_density_kg_m3: float | None = None
    material: str = ""
    courses_m: tuple[tuple[float, float, float], ...] = ()


@dataclass(frozen=True, slots=True)
class FloatingRoof:
    """A floating roof: mass, where it lands and where it floats (kg, m, m).

    ``included_at_kg_m3`` is the density at which the capacity table already allows for the roof;
    None where it does not.
    """

    mass_kg: float
    lands_at_m: float
    floats_at_m: float
    included_at_kg_m3: float | None = None


@dataclass(frozen=True, slots=True)
class TableCertificate:
    """What is known of the capacity table in use."""

    certificate: str = ""
    date: str = ""
    expires: str = ""
    uncertainty: float | None = None


@dataclass(frozen=True, slots=True)
class Tank:
    """A vessel, its instruments, limits and surroundings.

    Attributes
    ----------
    name : str
        Name shown to the operator.
    vessel : Vessel
        Geometry; elevations in metres above the datum.
    surroundings : Surroundings
        Gravity, outside air and its pressure, at this site.
    transmitters : mapping of str to Transmitter
        By tag: "p1", "p2", "p3".
    dp : DifferentialTransmitter or None
        The differential transmitter, where one is fitted.
    limits_m : mapping of str to float
        Levels of concern above the datum, m, by the names of `LIMIT_ORDER`.
    reference_height_m : float or None
        Where an ullage reads zero, m above the datum; None: the vessel's highest inside point.
    vapour : Vapour or None
        Overrides the vapour of the fluid.
    relief_pa : (float, float) or None
        Vacuum and pressure, gauge, at which the vapour space is relieved, Pa.
    response_time_s : float or None
        From the high-high level until a receipt has stopped, s; None: not stated.
    file : str
        Stem of the tank's file; what the command line calls the tank.
    version : str
        SHA-256 of the tank file's bytes (and of its table's), in hex.
    """

    name: str
    vessel: Vessel
    surroundings: Surroundings
    transmitters: Mapping[str, Transmitter] = field(default_factory=lambda: MappingProxyType({}))
    dp: DifferentialTransmitter | None = None
    limits_m: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    reference_height_m: float | None = None
    vapour: Vapour | None = None
    relief_pa: tuple[float, float] | None = None
    shell: Shell | None = None
    floating_roof: FloatingRoof | None = None
    table: TableCertificate | None = None
    level_gauge: Accuracy | None = None
    thermometer: Accuracy | None = None
    thermometer_elevations_m: tuple[float, ...] = ()
    largest_in_m3_s: float | None = None
    largest_out_m3_s: float | None = None
    response_time_s: float | None = None
    service: str = ""
    contents: str = ""
    kind: str = ""
    file: str = ""
    version: str = ""

    @property
    def ullage_reference_m(self) -> float:
        """Elevation an ullage is measured down from, m."""
        return self.vessel.z_max if self.reference_height_m is None else self.reference_height_m

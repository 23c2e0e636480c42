"""What was read, in SI: the input of the calculation."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    Number = float | npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Readings:
    """Readings of one instant, or of many (arrays that broadcast together).

    Every field may be missing (None). Pressures are in the transmitter's own reference.

    Attributes
    ----------
    p1_pa, p2_pa, p3_pa, dp_pa : float or array, Pa
        Bottom, middle, vapour-space and differential pressure.
    level_m, ullage_m : float or array, m
        Level above the datum; distance from the ullage reference down to the surface.
    volume_m3, mass_kg : float or array
        All liquid in the tank, at tank conditions.
    water_level_m : float or None
        Top of the free water above the datum, m.
    temperatures : tuple of (float or None, float)
        Liquid temperature in K with its elevation in m; elevation None: of the whole liquid.
    air_temperature_k, leg_temperature_k : float or None
    barometer_pa : float or None
        Outside pressure at the datum, Pa absolute.
    density_kg_m3 : float or None
        Observed density of the liquid at tank temperature.
    sediment_water : float or None
        Sediment and water, as a fraction of volume.
    ctl : float or None
        The user's own factor from the volume in the tank to the standard volume.
    signals : tuple of (str, str)
        Tags of transmitters whose signal was not plainly good, with its band: "failed",
        "uncertain" or "saturated". A failed one has no pressure above.
    """

    p1_pa: Number | None = None
    p2_pa: Number | None = None
    p3_pa: Number | None = None
    dp_pa: Number | None = None
    level_m: Number | None = None
    ullage_m: Number | None = None
    volume_m3: Number | None = None
    mass_kg: Number | None = None
    water_level_m: float | None = None
    temperatures: tuple[tuple[float | None, float], ...] = ()
    air_temperature_k: float | None = None
    leg_temperature_k: float | None = None
    barometer_pa: float | None = None
    density_kg_m3: float | None = None
    sediment_water: float | None = None
    ctl: float | None = None
    signals: tuple[tuple[str, str], ...] = ()

    def given(self) -> frozenset[str]:
        """Names of the fields that hold something."""
        held = ((f.name, getattr(self, f.name)) for f in fields(self))
        return frozenset(
            name for name, value in held if value is not None and not isinstance(value, tuple)
        ) | ({"temperatures"} if self.temperatures else frozenset())

"""A volume that was given beside other readings, as an observation of the surface."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from tankcalc.gauging.case import FloatArray
from tankcalc.gauging.model import Model, Slopes, State
from tankcalc.gauging.observations import UNSTATED_DIP_M, Observation

SMALLEST_SHARE = 1e-6
"""Standard uncertainty of a volume where the surface has no area, as a share of the capacity."""


def volume_observation(model: Model) -> Iterator[Observation]:
    """Yield the observation that a given volume makes, if there is one.

    Notes
    -----
    A volume comes off a table at a level, so it is as good as a dip: `UNSTATED_DIP_M` times the
    area of the surface. Surfaces beyond an end of the vessel count as at the end.
    """
    case, vessel = model.case, model.case.tank.vessel
    if "volume_m3" not in case.given:
        return

    def held(state: State) -> FloatArray:
        return np.clip(state.surface_m, vessel.z_min, vessel.z_max)

    def slopes(state: State) -> Slopes:
        zero = np.zeros(state.surface_m.shape)
        return np.asarray(vessel.area(held(state))), zero, zero

    value = np.broadcast_to(case.given["volume_m3"], case.shape)
    inside = np.clip(value, vessel.volume(vessel.z_min), vessel.capacity)
    area = np.asarray(vessel.area(vessel.level(inside)))
    smallest = SMALLEST_SHARE * vessel.capacity
    yield Observation(
        "volume",
        value,
        np.maximum(UNSTATED_DIP_M * area, smallest),
        lambda state: model.volume(replace(state, surface_m=held(state))),
        slopes,
    )

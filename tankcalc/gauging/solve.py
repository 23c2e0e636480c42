"""From tank, fluid and readings to the state: readings that cannot bear on it are left out."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging.case import Case
from tankcalc.gauging.model import Model
from tankcalc.gauging.state import Found, find_state
from tankcalc.gauging.words import length, listed
from tankcalc.readings import Readings
from tankcalc.result import Notice
from tankcalc.tank import Tank

SIGNAL_WORDS = {
    "failed": "is that of a failed transmitter: it has no part in the answer.",
    "uncertain": "lies between the measuring range and failure: its pressure is uncertain.",
    "saturated": "is at the end of the range: the transmitter may show no more than that.",
}


def solve(tank: Tank, fluid: Fluid, readings: Readings) -> tuple[Model, Found]:
    """Return the model of the question and the state that answers it.

    Temperature elements that turn out to hang above the surface are left out, and the question
    is asked again; the notices say so, and what the signals' bands mean.

    Raises
    ------
    RangeError, InputError
        As ``Case.of``.
    """
    dropped: list[float] = []
    model = Model(Case.of(tank, fluid, readings))
    found = find_state(model)
    while not model.case.shape and (hanging := _hanging(model.case.readings, found)):
        dropped += hanging
        kept = tuple(p for p in model.case.readings.temperatures if p[0] not in hanging)
        model = Model(Case.of(tank, fluid, replace(model.case.readings, temperatures=kept)))
        found = find_state(model)
    if _warms_unevenly(model) and not np.isnan(found.state.surface_m):
        surface = float(found.state.surface_m)
        model = Model(Case.of(tank, fluid, model.case.readings, surface))
        found = find_state(model)
    notices = [*_signals(readings), *_elements(dropped), *_dry(model, found), *found.notices]
    return model, replace(found, notices=tuple(notices))


def _warms_unevenly(model: Model) -> bool:
    """Return whether the shell's temperature depends on where the surface is."""
    case = model.case
    return not case.shape and case.shell.factor is not None and len(case.readings.temperatures) > 1


def _hanging(readings: Readings, found: Found) -> list[float]:
    """Return the elevations (m) of elements above the surface, never the lowest element."""
    elevations = sorted(z for z, _ in readings.temperatures if z is not None)
    surface = float(found.state.surface_m)
    return [z for z in elevations[1:] if z > surface]


def _dry(model: Model, found: Found) -> list[Notice]:
    """Say so where not even the lowest temperature element is in the liquid."""
    elevations = [z for z, _ in model.case.readings.temperatures if z is not None]
    if model.case.shape or not elevations or not min(elevations) > float(found.state.surface_m):
        return []
    message = "No temperature element is in the liquid: that of the vapour is taken for it."
    return [Notice("no_element_in_liquid", message, "temperature")]


def _elements(dropped: list[float]) -> list[Notice]:
    if not dropped:
        return []
    where = listed([length(z) for z in sorted(dropped)])
    message = f"The temperature at {where} is that of the vapour: it is left out."
    return [Notice("element_in_vapour", message, "temperature")]


def _signals(readings: Readings) -> list[Notice]:
    return [
        Notice(f"signal_{status}", f"The signal of {tag} {SIGNAL_WORDS[status]}", tag)
        for tag, status in readings.signals
        if status in SIGNAL_WORDS
    ]

"""Faults of free size in one reading: an instrument that is off, a dead one, another batch."""

from __future__ import annotations

from collections.abc import Iterator

from tankcalc.consistency.explanation import Explanation
from tankcalc.consistency.inquiry import Inquiry, corrected
from tankcalc.consistency.plausibility import (
    BATCH_SCALE,
    BLANKET_SCALE_PA,
    DRIFT_SCALE,
    WORKING_BUT_DEAD,
    choice_penalty,
    size_penalty,
)
from tankcalc.consistency.refits import Refit
from tankcalc.instruments import Transmitter

SETTLES = {
    "p1": "Compare p1 with a test gauge, or look at its zero.",
    "p2": "Compare p2 with a test gauge, or look at its zero.",
    "p3": "Look at a pressure gauge on the vapour space, and at p3's valve.",
    "dp": "Compare dp with a test gauge, or look at its zero.",
    "level": "Dip again.",
    "ullage": "Dip again.",
    "volume": "Look the level up in the table again.",
    "density": "Take another sample.",
}
"""By the name of a reading: what would settle whether it is wrong."""


def drifts(inquiry: Inquiry) -> Iterator[Explanation]:
    """Yield every single reading which, being off by some amount, would reconcile the others."""
    for refit in inquiry.refits.values():
        found = _drift(inquiry, refit) if refit.solution.solved else None
        if found is not None:
            yield found


def is_dead(transmitter: Transmitter, reading_pa: float) -> bool:
    """Return whether a reading is exactly what a transmitter shows that feels nothing."""
    low = 0.0 if transmitter.range_pa is None else transmitter.range_pa[0]
    return reading_pa in (0.0, low)


def _drift(inquiry: Inquiry, refit: Refit) -> Explanation | None:
    name, own = refit.name, inquiry.problem.at(refit.name)
    code, size, uncertainty = "drift", refit.bias, refit.uncertainty
    scale, dimension = DRIFT_SCALE * float(own.uncertainty[0]), "pressure"
    hints = [SETTLES[name]]
    value = float(own.value[0]) - refit.bias
    if name in ("level", "ullage"):
        dimension = "length"
    elif name == "volume":
        dimension = "volume"
    elif name == "density":
        code, dimension, scale = "other_density", "density", BATCH_SCALE
    elif name == "p3" and is_dead(inquiry.tank.transmitters["p3"], float(own.value[0])):
        code, scale = "blanket_missing", BLANKET_SCALE_PA
        hints.insert(0, "p3 shows exactly what a dead transmitter shows.")
    penalty = size_penalty(size, uncertainty, scale)
    if code == "blanket_missing":
        penalty -= choice_penalty(WORKING_BUT_DEAD)
    if name == "ullage":
        size, value = -size, inquiry.tank.ullage_reference_m - value
    elif name == "density":
        observed = inquiry.readings.density_kg_m3 or 0.0
        size, uncertainty, value = size * observed, uncertainty * observed, value * observed
    elif code == "blanket_missing":
        size = -size
    return inquiry.explanation(
        code,
        inquiry.problem.model,
        refit.solution,
        penalty,
        reading=name,
        size=size,
        dimension=dimension,
        uncertainty=uncertainty,
        readings=corrected(inquiry.readings, name, value),
        hints=tuple(hints),
    )

"""What each correction of an answer is worth: the answer with it, less the answer without."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from tankcalc.constants import ICE_POINT_K, STANDARD_GRAVITY_M_S2
from tankcalc.fluids.fluid import Fluid
from tankcalc.fluids.vapour import Vapour
from tankcalc.gauging import evaluate
from tankcalc.instruments import DifferentialTransmitter, FilledLeg, Side, Transmitter
from tankcalc.readings import Readings
from tankcalc.tank import Tank

REFERENCE_K = ICE_POINT_K + 15.0
"""Temperature a density is often taken at without thinking, K."""


@dataclass(frozen=True, slots=True)
class Term:
    """One correction.

    Attributes
    ----------
    name : str
        What would be left out, in words.
    level_m, mass_kg : float
        How much the answer moves by the correction being there.
    """

    name: str
    level_m: float
    mass_kg: float


Variant = tuple[str, Tank, Fluid, Readings]


def terms(tank: Tank, fluid: Fluid, readings: Readings) -> tuple[Term, ...]:
    """Return the corrections in the answer to one set of readings, the largest mass first.

    Parameters
    ----------
    tank, fluid, readings
        As for ``evaluate``; single readings, not arrays.

    Notes
    -----
    Each term is found by leaving one correction out and keeping all the others. They do not
    add up exactly: vapour and outside air, for one, partly cancel.
    """
    full = evaluate(tank, fluid, readings)
    if full.status == "refused":
        return ()
    found = []
    for name, *changed in _without(tank, fluid, readings):
        other = evaluate(*changed)  # type: ignore[arg-type]
        if other.status != "refused":
            level = float(full.level_m) - float(other.level_m)  # type: ignore[arg-type]
            mass = float(full.mass_kg) - float(other.mass_kg)  # type: ignore[arg-type]
            found.append(Term(name, level, mass))
    felt = [t for t in found if abs(t.level_m) > 1e-9 or abs(t.mass_kg) > 1e-6]
    return tuple(sorted(felt, key=lambda t: -abs(t.mass_kg)))


def _without(tank: Tank, fluid: Fluid, readings: Readings) -> Iterator[Variant]:
    """Yield the question with one correction left out at a time."""
    around = tank.surroundings
    weightless = replace(tank, vapour=Vapour(density_kg_m3=0.0))
    yield "weight of the vapour above the liquid", weightless, fluid, readings
    no_air = replace(around, air_density_kg_m3=0.0)
    kept = tank.vapour or fluid.vapour or Vapour(density_kg_m3=around.air_density_kg_m3)
    yield (
        "weight of the outside air",
        replace(tank, surroundings=no_air, vapour=kept),
        fluid,
        readings,
    )
    standard = replace(around, gravity_m_s2=STANDARD_GRAVITY_M_S2)
    yield "local gravity", replace(tank, surroundings=standard), fluid, readings
    if "p3" in tank.transmitters and readings.p3_pa is not None:
        others = {tag: t for tag, t in tank.transmitters.items() if tag != "p3"}
        unread = replace(readings, p3_pa=None)
        yield "pressure above the liquid", replace(tank, transmitters=others), fluid, unread
    yield from _without_load(tank, fluid, readings)
    yield from _without_legs(tank, fluid, readings)
    yield from _without_temperature(tank, fluid, readings)
    if len(fluid.layers) > 1:
        product = replace(fluid, layers=(replace(fluid.layers[-1], top_m=None),))
        dry = replace(readings, water_level_m=None)
        yield "the layers below the uppermost", tank, product, dry
    elif readings.water_level_m is not None:
        yield "free water", tank, fluid, replace(readings, water_level_m=None)


def _without_load(tank: Tank, fluid: Fluid, readings: Readings) -> Iterator[Variant]:
    """Yield the question without the shell's growth, its stretch, and the roof."""
    shell = tank.shell
    if shell is not None and shell.expansion_per_k is not None:
        rigid = replace(shell, expansion_per_k=None)
        yield "temperature of the shell", replace(tank, shell=rigid), fluid, readings
    if shell is not None and shell.thickness_m:
        stiff = replace(shell, thickness_m=())
        yield "stretch of the shell under the head", replace(tank, shell=stiff), fluid, readings
    if tank.floating_roof is not None:
        yield "floating roof", replace(tank, floating_roof=None), fluid, readings


def _without_legs(tank: Tank, fluid: Fluid, readings: Readings) -> Iterator[Variant]:
    legged = {tag: t for tag, t in tank.transmitters.items() if t.leg is not None}
    if legged:
        bare = {tag: replace(t, leg=None) for tag, t in tank.transmitters.items()}
        yield "legs between tap and sensor", replace(tank, transmitters=bare), fluid, readings
    cold = {tag: _cold(t) for tag, t in tank.transmitters.items()}
    dp = tank.dp
    if dp is not None:
        dp = replace(dp, high=_cold_side(dp.high), low=_cold_side(dp.low))
    if cold != dict(tank.transmitters) or dp != tank.dp:
        yield "temperature of the legs", replace(tank, transmitters=cold, dp=dp), fluid, readings
    if tank.dp is not None and _filled(tank.dp):
        empty = replace(
            tank.dp,
            high=Side(tank.dp.high.elevation_m, 0.0),
            low=Side(tank.dp.low.elevation_m, 0.0),
        )
        yield "fill of the differential's legs", replace(tank, dp=empty), fluid, readings


def _cold(transmitter: Transmitter) -> Transmitter:
    """Return a transmitter whose leg keeps its stated density."""
    if not isinstance(transmitter.leg, FilledLeg):
        return transmitter
    return replace(transmitter, leg=replace(transmitter.leg, fill_expansion_per_k=0.0))


def _cold_side(side: Side) -> Side:
    return replace(side, fill_expansion_per_k=0.0)


def _filled(dp: DifferentialTransmitter) -> bool:
    return any(side.fill_density_kg_m3 is not None for side in (dp.high, dp.low))


def _without_temperature(tank: Tank, fluid: Fluid, readings: Readings) -> Iterator[Variant]:
    if any(layer.model.needs_temperature for layer in fluid.layers):
        reference = replace(readings, temperatures=((None, REFERENCE_K),))
        yield "liquid temperature against 15 degC", tank, fluid, reference

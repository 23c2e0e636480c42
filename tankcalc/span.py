"""What each transmitter of a tank reads at the levels of interest, and the range to set it to."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass, replace
from typing import Any, Literal

import numpy as np

from tankcalc.constants import ICE_POINT_K
from tankcalc.errors import InputError, NoAnswerError
from tankcalc.fluids.fluid import Fluid
from tankcalc.gauging import evaluate
from tankcalc.gauging.case import Case, FloatArray
from tankcalc.gauging.model import Model, State
from tankcalc.gauging.words import listed, pressure
from tankcalc.instruments import DifferentialTransmitter, FilledLeg, Transmitter
from tankcalc.readings import Readings
from tankcalc.result import Notice
from tankcalc.signals import (
    Range,
    covers,
    measured_current_a,
    range_to_set,
    share_from_pressure_pa,
)
from tankcalc.tank import LIMIT_ORDER, Tank

BEARING = frozenset(
    {
        "gravity_standard",
        "air_assumed",
        "barometer_assumed",
        "temperature_assumed",
        "vapour_pressure_assumed",
        "density_inverted",
    }
)
"""Notices on an answer that bear on what is foretold here too."""


@dataclass(frozen=True, slots=True)
class Liquid:
    """A liquid that was asked about: its name and its mean density in a full tank."""

    name: str
    density_kg_m3: float


@dataclass(frozen=True, slots=True)
class Foretold:
    """What a transmitter reads with one liquid, Pa in its own reference, and as a signal.

    ``share`` is that of the present range, 0 at 4 mA, and ``current_a`` its current; None without
    a range, and no current where the transmitter saturates before it.
    """

    fluid: str
    reading_pa: float
    share: float | None = None
    current_a: float | None = None


@dataclass(frozen=True, slots=True)
class Point:
    """One level of interest: what it is, the level (m), the readings from the lowest up."""

    at: str
    level_m: float
    readings: tuple[Foretold, ...]


@dataclass(frozen=True, slots=True)
class TransmitterSpan:
    """What one transmitter reads, from an empty tank to a full one.

    Attributes
    ----------
    tag, reads : str
        Which one, and the reference of its readings.
    taps_m : tuple of float
        Where it feels the tank: one elevation, or those of the high and the low side.
    range_pa : (float, float) or None
        Its present range.
    lowest_pa, highest_pa : float
        The extremes over all points, liquids and pressures above them.
    to_set : Range or None
        The range to set; None for a p3 where nothing says how its pressure moves.
    covered, used : bool and float, or None
        Whether the extremes lie within the present range, and the part of it between them; None
        without a range.
    """

    tag: str
    reads: Literal["gauge", "absolute", "differential"]
    taps_m: tuple[float, ...]
    range_pa: tuple[float, float] | None
    points: tuple[Point, ...]
    lowest_pa: float
    highest_pa: float
    to_set: Range | None
    covered: bool | None
    used: float | None
    warnings: tuple[Notice, ...]


@dataclass(frozen=True, slots=True)
class TankSpan:
    """What the transmitters of a tank read with some liquids, and what was assumed for it.

    ``vapour_pa`` is the pressure above the liquid, Pa absolute, at p3's tap or the vessel's top.
    """

    tank: str
    liquids: tuple[Liquid, ...]
    vapour_pa: float
    transmitters: tuple[TransmitterSpan, ...]
    warnings: tuple[Notice, ...]


def span_of(
    tank: Tank,
    fluids: Sequence[Fluid],
    readings: Readings,
    tags: Sequence[str] = (),
    step_unit_pa: float = 1000.0,
) -> TankSpan:
    """Return what the transmitters of a tank read from empty to full, and the ranges to set.

    Parameters
    ----------
    tank : Tank
        At least one transmitter.
    fluids : sequence of Fluid
        The liquids the tank may hold, at least one.
    readings : Readings
        Temperatures, leg temperature, barometer and p3 are used. Without p3 the pressure above
        the liquid is the outside air's.
    tags : sequence of str
        The transmitters asked about; none: all that are fitted.
    step_unit_pa : float
        Unit in which the steps of a range are round, Pa.

    Raises
    ------
    InputError
        A transmitter is not fitted; p3 is no pressure.
    NoAnswerError
        The liquid cannot be computed at these temperatures, or the tank not at all.

    Notes
    -----
    The readings are those of ``Model.expected``, the equation the gauging itself solves. The
    range to set spans the extremes over all levels and liquids, and over the relief settings
    where they are stated and p3 was not given.
    """
    fitted = _asked_for(tank, tags)
    liquids, notices = _full(tank, fluids, readings)
    models = [Model(Case.of(tank, fluid, readings)) for fluid in fluids]
    pressures = _vapour_pressures(models[0])
    if len(pressures) > 1:
        notices = (*notices, _allowed_for_relief(tank.relief_pa or ()))
    return TankSpan(
        tank.name,
        liquids,
        pressures[0],
        tuple(_transmitter(models, tag, pressures, step_unit_pa) for tag in fitted),
        notices,
    )


def _asked_for(tank: Tank, tags: Sequence[str]) -> tuple[str, ...]:
    """Return the tags of the transmitters to speak of, all of them fitted."""
    fitted = [tag for tag in ("p1", "p2", "p3") if tag in tank.transmitters]
    fitted += ["dp"] if tank.dp is not None else []
    if not fitted:
        raise InputError(f"{tank.name} has no pressure transmitter: there is nothing to set.")
    for tag in tags:
        if tag not in fitted:
            raise InputError(f"{tank.name} has no {tag} transmitter. Fitted: {', '.join(fitted)}.")
    return tuple(tags) or tuple(fitted)


def _full(
    tank: Tank, fluids: Sequence[Fluid], readings: Readings
) -> tuple[tuple[Liquid, ...], tuple[Notice, ...]]:
    """Return the liquids as they fill the tank, and what was assumed for that."""
    found, notices = [], []
    filled = replace(readings, level_m=tank.vessel.z_max)
    for fluid in fluids:
        full = evaluate(tank, fluid, filled)
        if full.status == "refused" or full.density_kg_m3 is None:
            whys = " ".join(notice.message for notice in full.refusals)
            raise NoAnswerError(f"{fluid.name} in {tank.name}: {whys}")
        found.append(Liquid(fluid.name, float(full.density_kg_m3)))
        notices += [notice for notice in full.warnings if notice.code in BEARING]
    return tuple(found), tuple(dict.fromkeys(notices))


def _vapour_pressures(model: Model) -> tuple[float, ...]:
    """Return the pressures above the liquid to reckon with, Pa absolute, the one shown first."""
    case = model.case
    if "p3_pa" in case.given:
        return (float(model.vapour_from_p3(case.given["p3_pa"])),)
    outside = case.conditions.outside_pa(model.vapour_at_m)
    return (outside, *(outside + gauge_pa for gauge_pa in case.tank.relief_pa or ()))


def _allowed_for_relief(settings_pa: Sequence[float]) -> Notice:
    shown = listed([pressure(gauge_pa) for gauge_pa in settings_pa])
    return Notice(
        "relief_allowed_for",
        f"The ranges to set allow for {shown} against the outside air above the liquid, where its "
        "vapour is relieved.",
        "p3",
    )


def _transmitter(
    models: Sequence[Model], tag: str, pressures: Sequence[float], step_unit_pa: float
) -> TransmitterSpan:
    """Return what one transmitter reads with each liquid, given its model."""
    tank = models[0].case.tank
    fitted = tank.transmitters[tag] if tag != "dp" else tank.dp
    assert fitted is not None
    taps = _taps(fitted)
    levels = _levels(tank, taps)
    heights = np.array([level_m for _, level_m in levels])
    # By pressure above the liquid, liquid and level.
    readings = np.array([[_expected(m, tag, heights, p) for m in models] for p in pressures])
    lowest, highest, ranged = float(readings.min()), float(readings.max()), fitted.range_pa
    settled = highest > lowest and (tag != "p3" or len(pressures) > 1)
    names = [model.case.fluid.name for model in models]
    return TransmitterSpan(
        tag=tag,
        reads="differential" if isinstance(fitted, DifferentialTransmitter) else fitted.reads,
        taps_m=tuple(level_m for _, level_m in taps),
        range_pa=ranged,
        points=tuple(
            Point(at, level_m, _foretold(names, readings[0, :, k].tolist(), ranged))
            for k, (at, level_m) in enumerate(levels)
        ),
        lowest_pa=lowest,
        highest_pa=highest,
        to_set=range_to_set(lowest, highest, step_unit_pa) if settled else None,
        covered=None if ranged is None else covers(ranged, lowest, highest),
        used=None if ranged is None else (highest - lowest) / abs(ranged[1] - ranged[0]),
        warnings=tuple(_notices(models[0], fitted, readings)),
    )


def _taps(fitted: Transmitter | DifferentialTransmitter) -> list[tuple[str, float]]:
    """Return where a transmitter feels the tank, named."""
    if isinstance(fitted, DifferentialTransmitter):
        return [("high_tap", fitted.high.elevation_m), ("low_tap", fitted.low.elevation_m)]
    return [("tap", fitted.elevation_m)]


def _levels(tank: Tank, taps: Sequence[tuple[str, float]]) -> list[tuple[str, float]]:
    """Return the levels of interest, named, from the lowest up."""
    low, high = tank.vessel.z_min, tank.vessel.z_max
    limits = [(name, tank.limits_m[name]) for name in LIMIT_ORDER if name in tank.limits_m]
    inner = [(name, level_m) for name, level_m in (*taps, *limits) if low <= level_m <= high]
    return [("empty", low), *sorted(inner, key=lambda named: named[1]), ("full", high)]


def _expected(model: Model, tag: str, levels_m: FloatArray, vapour_pa: float) -> FloatArray:
    """Return the readings (Pa) of a transmitter at levels (m) under a pressure (Pa absolute)."""
    same = np.ones(levels_m.shape)
    expected = model.expected(tag, State(levels_m, same, vapour_pa * same))
    return np.broadcast_to(expected, levels_m.shape)


def _foretold(
    names: Sequence[str], readings_pa: Sequence[float], range_pa: tuple[float, float] | None
) -> tuple[Foretold, ...]:
    """Return the readings with each liquid, the lowest first."""
    found = []
    for name, reading_pa in sorted(zip(names, readings_pa, strict=True), key=lambda one: one[1]):
        if range_pa is None:
            found.append(Foretold(name, reading_pa))
        else:
            share = share_from_pressure_pa(reading_pa, range_pa)
            found.append(Foretold(name, reading_pa, share, measured_current_a(share)))
    return tuple(found)


def _notices(
    model: Model, fitted: Transmitter | DifferentialTransmitter, readings_pa: FloatArray
) -> list[Notice]:
    """Return what is worth a look about a transmitter's readings, (pressure, liquid, level)."""
    tag, found = fitted.tag, []
    if isinstance(fitted, Transmitter) and fitted.reads == "absolute":
        barometer = pressure(model.case.conditions.barometer_pa)
        message = (
            f"{tag} reads absolute pressure: under outside air its readings move with the "
            f"barometer, here {barometer} at the datum."
        )
        found.append(Notice("moves_with_barometer", message, tag))
    if _expands(fitted):
        legs_k = model.case.conditions.leg_temperature_k
        where = "the temperature its density is stated at, as no other is known"
        if legs_k is not None and model.case.legs_known_by != "assumed":
            where = f"{legs_k - ICE_POINT_K:.1f} degC"
        message = f"The fill of {tag}'s legs is taken at {where}: see --leg-temperature."
        found.append(Notice("leg_temperature", message, tag))
    if tag == "p3":
        message = "p3 follows the pressure above the liquid, not the level."
        found.append(Notice("follows_vapour", message, tag))
        return found
    if tag != "dp" and "p3" in model.case.tank.transmitters and len(readings_pa) == 1:
        message = (
            f"{tag} feels the pressure above the liquid too, and this range is for one such "
            "pressure only. Widen it by what that pressure rises and falls."
        )
        found.append(Notice("one_vapour_pressure", message, tag))
    if np.any(readings_pa[..., -1] < readings_pa[..., 0]):
        message = f"{tag} falls as the tank fills. Check which side is high and which is low."
        found.append(Notice("falls_with_level", message, tag))
    elif tag == "dp" and readings_pa.max() < 0.0:
        message = (
            "Every reading is negative, and so is the right range: the fill of the low leg "
            "outweighs the liquid. 4 mA is the empty tank, 20 mA the full one."
        )
        found.append(Notice("all_negative", message, tag))
    return found


def _expands(fitted: Transmitter | DifferentialTransmitter) -> bool:
    """Return whether what stands in a transmitter's legs depends on their temperature."""
    if isinstance(fitted, DifferentialTransmitter):
        return any(side.fill_expansion_per_k for side in (fitted.high, fitted.low))
    return isinstance(fitted.leg, FilledLeg) and bool(fitted.leg.fill_expansion_per_k)


def as_json(span: TankSpan) -> dict[str, Any]:
    """Return the readings and ranges as plain JSON data: SI, and the keys say the unit."""
    return asdict(span, dict_factory=_plain)


def _plain(fields: list[tuple[str, Any]]) -> dict[str, Any]:
    """Return the fields of one object that are data of this answer."""
    return {name: value for name, value in fields if name not in ("refuses", "where", "bounds")}

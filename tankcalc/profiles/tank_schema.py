"""A tank file: one vessel, its instruments and limits, and what must hold between them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from tankcalc.errors import GeometryError
from tankcalc.instruments import Accuracy, DifferentialTransmitter, Transmitter
from tankcalc.profiles.findings import Findings
from tankcalc.profiles.instrument_schema import LEVEL_GAUGE, THERMOMETER, TRANSMITTERS
from tankcalc.profiles.leaves import quantity, text
from tankcalc.profiles.shape_schema import SHAPE
from tankcalc.profiles.shell_schema import CERTIFICATE, DEADWOOD, FLOATING_ROOF, FLOW, SHELL
from tankcalc.profiles.tables import Loose, Table, Values, may, need
from tankcalc.profiles.tank_checks import check_elevations, check_limits, check_shell
from tankcalc.profiles.vapour_schema import VAPOUR, VAPOUR_SPACE
from tankcalc.profiles.vessels import Shaped, place_of
from tankcalc.surroundings import Surroundings
from tankcalc.tank import LIMIT_ORDER, Tank

if TYPE_CHECKING:
    from tankcalc.geometry import Vessel
    from tankcalc.profiles.documents import Document

TANK = Table(
    {
        "name": may(text(40)),
        "service": may(text(), ""),
        "contents": may(text(), ""),
        "shape": need(SHAPE),
        "shell": may(SHELL),
        "transmitters": may(Loose(TRANSMITTERS)),
        "limits": may(
            Table(
                {name: may(quantity("length")) for name in LIMIT_ORDER}
                | {"response_time": may(quantity("time", "positive"))}
            )
        ),
        "deadwood": may(DEADWOOD),
        "floating_roof": may(FLOATING_ROOF),
        "table": may(CERTIFICATE),
        "level_gauge": may(LEVEL_GAUGE),
        "thermometer": may(THERMOMETER),
        "flow": may(FLOW),
        "vapour": may(VAPOUR),
        "vapour_space": may(VAPOUR_SPACE),
    }
)


def read_tank(document: Document, surroundings: Surroundings) -> Tank | None:
    """Return the tank of a file, or None; everything wrong goes to the document's findings."""
    if not document.readable:
        return None
    findings = document.findings
    values = TANK.values(document.data, (), findings)
    made: Shaped | None = values["shape"]
    bare = None if made is None else made.vessel
    vessel = None if bare is None else _with_deadwood(bare, values["deadwood"], findings)
    transmitters = _transmitters(values)
    given = values["limits"] or {}
    limits = {name: given[name] for name in LIMIT_ORDER if given.get(name) is not None}
    check_limits(limits, bare, findings)
    check_elevations(transmitters, bare, findings)
    check_shell(values, findings)
    if made is None or vessel is None or len(findings):
        return None
    return Tank(
        name=values["name"] or document.path.stem,
        vessel=vessel,
        surroundings=surroundings,
        transmitters=MappingProxyType(transmitters),
        limits_m=MappingProxyType(limits),
        reference_height_m=made.reference_height_m,
        kind=vessel.kind,
        file=document.path.stem,
        version=document.version,
        **_fitted(values, made),
    )


def _with_deadwood(
    vessel: Vessel, pieces: list[tuple[float, float, float]] | None, findings: Findings
) -> Vessel | None:
    from tankcalc.geometry import with_deadwood

    try:
        return with_deadwood(vessel, pieces) if pieces else vessel
    except GeometryError as error:
        findings.add(place_of(error.key, {}, ()), error.why)
        return None


def _transmitters(values: Values) -> dict[str, Transmitter]:
    fitted = values["transmitters"] or {}
    return {tag: fitted[tag] for tag in ("p1", "p2", "p3") if fitted.get(tag) is not None}


def _fitted(values: Values, made: Shaped) -> dict[str, Any]:
    """Return the fields of a Tank that need nothing but their own table."""
    flow, shell = values["flow"] or {}, values["shell"]
    gauge, thermometer = values["level_gauge"] or {}, values["thermometer"] or {}
    dp: DifferentialTransmitter | None = (values["transmitters"] or {}).get("dp")
    return {
        "dp": dp,
        "vapour": values["vapour"],
        "relief_pa": values["vapour_space"],
        "shell": None if shell is None else replace(shell, courses_m=made.courses_m),
        "floating_roof": values["floating_roof"],
        "table": values["table"],
        "level_gauge": _accuracy(gauge),
        "thermometer": _accuracy(thermometer),
        "thermometer_elevations_m": thermometer.get("elevations", ()),
        "largest_in_m3_s": flow.get("largest_in"),
        "largest_out_m3_s": flow.get("largest_out"),
        "response_time_s": (values["limits"] or {}).get("response_time"),
        "service": values["service"],
        "contents": values["contents"],
    }


def _accuracy(instrument: Mapping[str, Any]) -> Accuracy | None:
    stated = instrument.get("accuracy")
    return None if stated is None else Accuracy(fixed=stated)

"""Live sources: where a site's plant is reached, and which value of it an instrument shows.

Checked for their shape, so that a site folder can carry them; no reading is taken from them here.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any

from tankcalc import units
from tankcalc.errors import QuantityError
from tankcalc.profiles.findings import At, Findings, did_you_mean, show
from tankcalc.profiles.leaves import (
    UnfitError,
    choice,
    leaf,
    number,
    pair,
    quantity,
    text,
    whole,
)
from tankcalc.profiles.tables import ByKind, Table, Values, may, need

_ADDRESS = text(200)
_EVERY = quantity("time", "positive")

SITE_SOURCE = ByKind(
    "kind",
    {
        "modbus tcp": Table(
            {"address": need(_ADDRESS), "unit": may(whole(0, 255), 1), "every": may(_EVERY)}
        ),
        "opc ua": Table({"address": need(_ADDRESS), "every": may(_EVERY)}),
    },
)
"""One entry of ``[sources]`` in site.toml."""


def _unit_of(dimension: str) -> Callable[[object], str]:
    def read(value: object) -> str:
        if not isinstance(value, str):
            raise UnfitError(f"a unit in quotes is wanted, found {show(value)}.")
        try:
            return units.parse(f"1 {value}", dimension).unit
        except QuantityError as error:
            raise UnfitError(f"{show(value)} cannot be used: {error.why}", error.advice) from None

    return read


def _place_is_clear(values: Values, at: At, findings: Findings) -> Values | None:
    before = len(findings)
    if (values["register"] is None) == (values["node"] is None):
        findings.add(at, "a source takes a register or a node.", "Give one of them.")
    if values["scale"] is not None and values["scale"][0] == values["scale"][1]:
        findings.add((*at, "scale"), "both ends of the scale are the same.")
    return values if len(findings) == before else None


def source(dimension: str) -> Table:
    """Return the table that says where an instrument's reading is found in the plant."""
    return Table(
        {
            "from": need(text()),
            "register": may(whole(0, 65_535)),
            "table": may(choice("holding", "input"), "holding"),
            "type": may(choice("int16", "uint16", "int32", "uint32", "float32", "float64")),
            "words": may(choice("big", "little"), "big"),
            "bytes": may(choice("big", "little"), "big"),
            "node": may(text(200)),
            "is": may(leaf(_unit_of(dimension))),
            "scale": may(pair(number(), number())),
            "stale_after": may(_EVERY),
        },
        _place_is_clear,
    )


def named_sources(data: Mapping[str, Any], at: At = ()) -> Iterator[tuple[At, dict[str, Any]]]:
    """Yield every ``source`` table of a tank file that names a source, with its place."""
    for key, held in data.items():
        if key == "source" and isinstance(held, dict) and isinstance(held.get("from"), str):
            yield (*at, key), held
        elif isinstance(held, dict):
            yield from named_sources(held, (*at, key))


def check_source(
    named: Mapping[str, Any], sources: Mapping[str, Any], at: At, findings: Findings
) -> None:
    """Note a source that the site does not have, or that is reached in another way."""
    if named["from"] not in sources:
        findings.add(
            (*at, "from"),
            f"site.toml has no source {show(named['from'])}.",
            did_you_mean(named["from"], sources) or "Add it there, under [sources].",
        )
        return
    site_source = sources[named["from"]]
    kind = site_source.get("kind") if isinstance(site_source, dict) else None
    wanted = {"modbus tcp": "register", "opc ua": "node"}.get(str(kind))
    if wanted is not None and wanted not in named and {"register", "node"} & named.keys():
        findings.add((*at, wanted), "missing.", f"The source is of the kind {show(kind)}.")

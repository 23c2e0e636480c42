"""A fluid file: a single liquid by its density model, or layers of liquids from other files."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.profiles.density_schema import DENSITY
from tankcalc.profiles.documents import Document
from tankcalc.profiles.findings import At, Findings, did_you_mean, show
from tankcalc.profiles.leaves import quantity, text
from tankcalc.profiles.names import names_in
from tankcalc.profiles.tables import ListOf, Table, Values, may, need
from tankcalc.profiles.vapour_schema import VAPOUR

if TYPE_CHECKING:
    from tankcalc.fluids.vapour import Vapour

_LAYER = Table({"fluid": need(text()), "top": may(quantity("length"))})

FLUID = Table(
    {
        "name": may(text(40)),
        "density": may(DENSITY),
        "layer": may(ListOf(_LAYER)),
        "vapour": may(VAPOUR),
    }
)


def read_fluid(document: Document) -> Fluid | None:
    """Return the fluid of a file, or None; everything wrong goes to the document's findings."""
    if not document.readable:
        return None
    findings = document.findings
    values = FLUID.values(document.data, (), findings)
    name = values["name"] or document.path.stem
    vapour = values["vapour"]
    layers: tuple[Layer, ...] = ()
    if ("density" in document.data) == ("layer" in document.data):
        findings.add((), "a fluid takes [density] or [[layer]].", "Write one of them.")
    elif values["density"] is not None:
        stated = values["density"]
        layers = (Layer(name, stated.model, None, stated.uncertainty_kg_m3),)
        vapour = vapour or stated.model.vapour
    elif values["layer"] is not None:
        layers, vapour_of_top = _layers(values["layer"], document)
        vapour = vapour or vapour_of_top
    if len(findings):
        return None
    return Fluid(name, layers, vapour, document.path.stem, document.version)


def _layers(stack: list[Values], document: Document) -> tuple[tuple[Layer, ...], Vapour | None]:
    """Return the layers of a stack, and what the file of the uppermost says of its vapour."""
    _check_tops(stack, document.findings)
    layers = []
    vapour = None
    for n, entry in enumerate(stack):
        liquid = _liquid(entry["fluid"], ("layer", n, "fluid"), document)
        if liquid is not None:
            layers.append(replace(liquid.layers[0], name=liquid.name, top_m=entry["top"]))
            vapour = liquid.vapour
    return tuple(layers), vapour


def _check_tops(stack: list[Values], findings: Findings) -> None:
    """Note layers without a top, tops that do not rise, and a top on the last layer."""
    below: float | None = None
    for n, entry in enumerate(stack):
        top, last = entry["top"], n == len(stack) - 1
        if last and top is not None:
            findings.add(
                ("layer", n, "top"), "the last layer reaches the surface.", "Leave it out."
            )
        elif not last and top is None:
            findings.add(("layer", n, "top"), "missing.", "Only the last layer has none.")
        elif top is not None and below is not None and not top > below:
            findings.add(
                ("layer", n, "top"),
                f"{top:g} m is not above the layer below, {below:g} m.",
                "List the layers from the bottom up.",
            )
        below = below if top is None else top


def _liquid(name: str, at: At, document: Document) -> Fluid | None:
    """Return the single liquid that a layer names; None, with a finding, where there is none."""
    findings = document.findings
    known = names_in(document.path.parent)
    if name == document.path.stem:
        findings.add(at, "the file names itself as a layer.", "Name the file of a single liquid.")
        return None
    if name not in known:
        findings.add(at, f"there is no fluid {show(name)}.", did_you_mean(name, known))
        return None
    file = f"{name}.toml"
    other = Document(document.path.with_name(file), f"fluids/{file}")
    if "layer" in other.data:
        findings.add(
            at, f"{show(name)} is itself layered.", "Name the liquids of its layers one by one."
        )
        return None
    liquid = read_fluid(other)
    findings.beside[file] = other.held
    if liquid is None:
        findings.add(at, f"{show(name)} cannot be used: {other.problems()[0]}")
    return liquid

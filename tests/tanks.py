"""Plain tanks for tests; the figures are of no real plant."""

from __future__ import annotations

from typing import Any

from tankcalc.fluids.constant import Constant
from tankcalc.fluids.fluid import Fluid, Layer
from tankcalc.fluids.models import DensityModel
from tankcalc.geometry import FlatEnd, vertical_cylinder
from tankcalc.instruments import Transmitter
from tankcalc.surroundings import Surroundings
from tankcalc.tank import Tank


def around(**changes: Any) -> Surroundings:
    """Surroundings with g = 9.81, air of 1.2 kg/m3 and 101 325 Pa, changed as named."""
    stated: dict[str, Any] = {
        "gravity_m_s2": 9.81,
        "gravity_from": "value",
        "air_density_kg_m3": 1.2,
        "air_from": "density",
        "outside_pressure_pa": 101_325.0,
        "outside_pressure_from": "value",
        "air_temperature_k": 288.15,
    }
    return Surroundings(**(stated | changes))


def transmitters(**elevations: float) -> dict[str, Transmitter]:
    """Gauge transmitters by tag, with their diaphragms at these elevations (m)."""
    return {tag: Transmitter(tag, z, "gauge") for tag, z in elevations.items()}


def upright(**changes: Any) -> Tank:
    """A flat vertical tank, 20 m wide and 15 m high, with p1 at 0.5 m, changed as named."""
    stated: dict[str, Any] = {
        "name": "V-1",
        "vessel": vertical_cylinder([(15.0, 20.0)], FlatEnd(), FlatEnd()),
        "surroundings": around(),
        "transmitters": transmitters(p1=0.5),
    }
    return Tank(**(stated | changes))


def single(model: DensityModel | float, **changes: Any) -> Fluid:
    """A single liquid of a model, or of a constant density (kg/m3)."""
    model = Constant(model) if isinstance(model, float) else model
    return Fluid("liquid", (Layer("liquid", model),), **changes)


def stacked(*layers: tuple[DensityModel | float, float | None]) -> Fluid:
    """Layers from the bottom up, each with the elevation of its top (m); 1000 kg/m3 is water."""
    made = [
        Layer(
            "water" if m == 1000.0 else f"layer {k}",
            Constant(m) if isinstance(m, float) else m,
            top,
        )
        for k, (m, top) in enumerate(layers)
    ]
    return Fluid("layers", tuple(made))

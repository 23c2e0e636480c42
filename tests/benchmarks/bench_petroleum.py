"""How fast a million observed densities become densities at a base, beside a plain loop.

Run ``python tests/benchmarks/bench_petroleum.py``. Wall times of shared machines wander, so the
figure to quote is the ratio to the loop, taken in the same run.
"""

from __future__ import annotations

import math
import time

import numpy as np

from tankcalc.fluids.petroleum_2004 import COMPRESSIBILITY, SCALE_SHIFT, SHIFT_60, factors_from_60
from tankcalc.fluids.petroleum_bases import base_density_from_observed
from tankcalc.fluids.petroleum_groups import CRUDE, REFINED, Commodity

COUNT = 1_000_000
SAMPLE = 2_000
BASE_DEGF = 59.0
ROUNDS = 5


def plain_density(k: tuple[float, float, float], rho: float, t: float, p: float) -> float:
    """Return the density (kg/m3) at degF and psig of one at 60 degF, without numpy."""
    k0, k1, k2 = k
    t90 = (t - 32.0) / 1.8
    shift = 0.0
    for coefficient in reversed(SCALE_SHIFT):
        shift = (shift + coefficient) * t90 / 630.0
    t68 = 1.8 * (t90 - shift) + 32.0
    a = SHIFT_60 / 2.0 * ((k0 / rho + k1) / rho + k2)
    b = (2.0 * k0 + k1 * rho) / (k0 + (k1 + k2 * rho) * rho)
    rho68 = rho * (1.0 + (math.exp(a * (1.0 + 0.8 * a)) - 1.0) / (1.0 + a * (1.0 + 1.6 * a) * b))
    alpha = (k0 / rho68 + k1) / rho68 + k2
    dt = t68 - 60.0 - SHIFT_60 / 2.0
    ctl = math.exp(-alpha * dt * (1.0 + 0.8 * alpha * (dt + SHIFT_60)))
    c1, c2, c3, c4 = COMPRESSIBILITY
    scaled = math.exp(c1 + c2 * t68 + (c3 + c4 * t68) / rho68**2)
    return rho * ctl / (1.0 - 1e-5 * scaled * p)


def plain_base(commodity: Commodity, observed: float, t: float, p: float) -> float:
    """Return the density (kg/m3) at the base by bisection, one liquid at a time."""

    def group(rho: float) -> tuple[float, float, float]:
        found = next(g for g in reversed(commodity.groups) if rho >= g.low_kg_m3)
        return found.constants  # type: ignore[return-value]

    low, high = commodity.low_kg_m3, commodity.high_kg_m3
    while high - low > 1e-9:
        middle = (low + high) / 2.0
        if plain_density(group(middle), middle, t, p) < observed:
            low = middle
        else:
            high = middle
    return plain_density(group(low), low, BASE_DEGF, 0.0)


def measure(commodity: Commodity) -> None:
    """Print the rate for one commodity."""
    rng = np.random.default_rng(1)
    density = rng.uniform(commodity.low_kg_m3 + 1.0, commodity.high_kg_m3 - 1.0, COUNT)
    t, p = rng.uniform(-58.0, 302.0, COUNT), rng.uniform(0.0, 1500.0, COUNT)
    observed = density * factors_from_60(commodity, density, t, p).ctpl
    times = []
    for _ in range(ROUNDS):
        start = time.perf_counter()
        found = base_density_from_observed(commodity, observed, t, p, BASE_DEGF)
        times.append(time.perf_counter() - start)
    start = time.perf_counter()
    plain = [
        plain_base(commodity, *row)
        for row in zip(*(x[:SAMPLE].tolist() for x in (observed, t, p)), strict=True)
    ]
    loop = (time.perf_counter() - start) * COUNT / SAMPLE
    apart = float(np.max(np.abs(found[:SAMPLE] - plain)))
    took = min(times)
    print(
        f"{commodity.name:17} {COUNT / took / 1e6:5.2f} million/s, {loop / took:6.0f} times a "
        f"plain loop (of {SAMPLE}); at most {apart:.0e} kg/m3 apart"
    )


if __name__ == "__main__":
    for oil in (CRUDE, REFINED):
        measure(oil)

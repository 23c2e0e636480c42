"""Rate of volume and moment for a million levels, beside a plain NumPy copy of the same data.

Run by hand: ``python tests/benchmarks/bench_geometry.py``.
"""

from __future__ import annotations

import time
from collections.abc import Callable

import numpy as np

from tankcalc.geometry import (
    EllipsoidalEnd,
    FlatEnd,
    Vessel,
    horizontal_cylinder,
    sphere,
    torispherical_standard,
    vertical_cylinder,
)

LEVELS = 1_000_000
HEAD = torispherical_standard("DIN 28011", 3.0)

VESSELS = {
    "torispherical, level": horizontal_cylinder(3.0, 6.0, HEAD, HEAD),
    "torispherical, tilted": horizontal_cylinder(3.0, 6.0, HEAD, HEAD, 0.02, 1.0),
    "2:1 heads, level": horizontal_cylinder(3.0, 6.0, EllipsoidalEnd(), EllipsoidalEnd()),
    "standing, torispherical": vertical_cylinder([(6.0, 3.0)], HEAD, HEAD),
    "standing, flat": vertical_cylinder([(6.0, 3.0)], FlatEnd(), FlatEnd()),
    "sphere": sphere(3.0),
}


def seconds(work: Callable[[], object], times: int = 7) -> float:
    """The shortest of several runs."""
    shortest = float("inf")
    for _ in range(times):
        start = time.perf_counter()
        work()
        shortest = min(shortest, time.perf_counter() - start)
    return shortest


def line(name: str, vessel: Vessel) -> str:
    """One vessel's figures."""
    z = np.random.default_rng(1).uniform(vessel.z_min, vessel.z_max, LEVELS)
    first = seconds(lambda: vessel.volume_and_moment(z), times=1)
    both = seconds(lambda: vessel.volume_and_moment(z))
    copy = seconds(lambda: (z.copy(), z.copy()))
    inverse = seconds(lambda: vessel.level(vessel.capacity * (z - z.min()) / np.ptp(z)), times=2)
    return (
        f"{name:24} {both / LEVELS * 1e9:6.1f} ns {LEVELS / both / 1e6:6.1f} M/s "
        f"{both / copy:6.1f} {first * 1e3:8.0f} ms {inverse / LEVELS * 1e9:8.0f} ns"
    )


def main() -> None:
    """Print a line a vessel."""
    print("volume and moment          a level     rate  copies  first call   level(V)")
    for name, vessel in VESSELS.items():
        print(line(name, vessel))


if __name__ == "__main__":
    main()

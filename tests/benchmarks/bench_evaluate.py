"""How fast a million pressures become level, volume and mass, beside a plain copy of them.

Run ``python tests/benchmarks/bench_evaluate.py``. Wall times of shared machines wander, so the
figure to quote is the ratio to the copy, taken in the same run.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parent.parent))

from tanks import single, transmitters, upright

from tankcalc.fluids.samples import Samples
from tankcalc.gauging import evaluate
from tankcalc.gauging.case import Case
from tankcalc.gauging.model import Model
from tankcalc.gauging.state import find_state
from tankcalc.geometry import horizontal_cylinder, torispherical_standard
from tankcalc.readings import Readings

COUNT = 1_000_000
ROUNDS = 7


def best(work: Callable[[], object]) -> float:
    """Return the shortest of several wall times, s, after one that is not counted."""
    work()
    times = []
    for _ in range(ROUNDS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


def measure(slope: float) -> None:
    """Print the rates for one tilt of the vessel."""
    head = torispherical_standard("DIN 28011", 3.0)
    vessel = horizontal_cylinder(3.0, 9.0, head, head, slope=slope, dip_at_m=1.0)
    tank = upright(vessel=vessel, transmitters=transmitters(p1=0.1))
    brine = single(Samples((0.3, 1.0, 1.6, 2.5), (1190.0, 1150.0, 1120.0, 1080.0)))
    pressures = np.random.default_rng(1).uniform(1_000.0, 28_000.0, COUNT)
    readings = Readings(p1_pa=pressures)

    def contents() -> object:
        model = Model(Case.of(tank, brine, readings))
        return model.contents(find_state(model).state)

    copy = best(pressures.copy)
    for name, work in (
        ("p1 -> level -> volume -> mass", contents),
        ("evaluate, every figure", lambda: evaluate(tank, brine, readings)),
    ):
        took = best(work)
        print(
            f"slope {slope:4.2f}  {name:32} {COUNT / took / 1e6:6.2f} million/s, "
            f"{took / copy:7.1f} times a plain copy ({copy * 1e3:.2f} ms)"
        )


if __name__ == "__main__":
    for tilt in (0.0, 0.02):
        measure(tilt)

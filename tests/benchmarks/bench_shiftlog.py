"""How long a big log takes to open: its last page, and the latest entry of every tank.

    python tests/benchmarks/bench_shiftlog.py [ENTRIES] [FILE]

The entries are put in past the program (direct SQL), with bodies of the real size and without
hashes that would verify: only reading is measured. A file that is there already is measured
again. Both targets are 50 ms, at ten million entries of 300 tanks.
"""

from __future__ import annotations

import os
import sqlite3
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from dataclasses import replace
from pathlib import Path

from tankcalc.shiftlog import Entry, open_store
from tankcalc.shiftlog.entry import canonical
from tankcalc.shiftlog.kinds import AMENDMENT, READING, WITHDRAWAL
from tankcalc.shiftlog.uid import new_uid

TANKS = 300
START_US = 1_600_000_000_000_000
STEP_US = 3_000_000
CORRECTED = 97
"""One reading in so many is amended, and every fifth of those withdrawn after it."""

RESULT = {
    "tank": "Tank", "fluid": "Gas oil", "basis": "p1 fixed the surface", "status": "good",
    "level_m": 10.1, "volume_m3": 3173.0, "mass_kg": 2681185.0, "density_kg_m3": 845.0,
    "expanded_uncertainty": {"level_m": 0.01, "volume_m3": 3.2, "mass_kg": 2700.0},
    "bounds": {}, "warnings": [],
}  # fmt: skip
SAMPLE = Entry(
    uid=bytes(16), kind=READING, t_us=START_US, entered_us=START_US, shift="Day",
    shift_date="2026-12-01", time_zone="Europe/Lisbon", site="Skerry Point Terminal",
    user="operator", console="host:1", program="0", who="A. Rook", tank="T-000", fluid="gas-oil",
    typed={"p1": "85.3 kPa", "temperature": "18 degC"}, result=RESULT,
)  # fmt: skip


def rows(count: int) -> Iterator[tuple[object, ...]]:
    """Yield the columns of the entries of the log, all but ``seq``."""
    body = canonical(SAMPLE).decode()
    last: dict[str, bytes] = {}
    prev = os.urandom(32)
    for number in range(count):
        t_us = START_US + number * STEP_US
        tank, kind, ref = f"T-{number % TANKS:03}", READING, None
        if number >= TANKS and number % CORRECTED == 0:
            kind = WITHDRAWAL if number % (5 * CORRECTED) == 0 else AMENDMENT
            ref = last[tank]
        uid = new_uid(t_us)
        if kind == READING:
            last[tank] = uid
        digest = os.urandom(32)
        yield uid, kind, ref, tank, t_us, body, prev, digest
        prev = digest


def build(path: Path, count: int) -> None:
    """Make the log: its tables by the program, its entries without waiting for the disk."""
    store = open_store(path)
    store.append(replace(SAMPLE, uid=new_uid(START_US)), {})
    store.close()
    db = sqlite3.connect(path, isolation_level=None)
    db.execute("PRAGMA synchronous=OFF")
    db.execute("PRAGMA cache_size=-400000")
    db.execute("BEGIN")
    db.executemany(
        "INSERT INTO entry(uid, kind, ref, tank, t_us, body, prev, hash)"
        " VALUES (?, ?, ?, ?, ?, ?, ?, ?)",
        rows(count),
    )
    db.execute("COMMIT")
    db.close()


def measure(name: str, call: Callable[[], object]) -> None:
    """Print the time of the first call and the best of the next ones, in milliseconds."""
    times = []
    for _ in range(6):
        start = time.perf_counter()
        call()
        times.append((time.perf_counter() - start) * 1000.0)
    print(f"{name:42} first {times[0]:9.1f} ms   best {min(times[1:]):9.1f} ms")


def main() -> None:
    """Build the log where there is none, and measure."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    with tempfile.TemporaryDirectory() as folder:
        path = Path(sys.argv[2]) if len(sys.argv) > 2 else Path(folder) / "big.sqlite"
        if not path.exists():
            start = time.perf_counter()
            build(path, count)
            print(f"built {count} entries in {time.perf_counter() - start:.0f} s")
        print(f"{path.stat().st_size / 1e9:.2f} GB")

        def opened_and_tail() -> None:
            store = open_store(path)
            store.tail(500)
            store.close()

        store = open_store(path)
        middle = store.tail(1)[0].seq // 2
        measure("open, last 500", opened_and_tail)
        measure("last 500", lambda: store.tail(500))
        measure("500 before the middle", lambda: store.tail(500, before=middle))
        measure("last 500 of one tank", lambda: store.tail(500, tank="T-017"))
        measure("last 500 amendments", lambda: store.tail(500, kind=AMENDMENT))
        measure(
            "last 100 withdrawals of one tank",
            lambda: store.tail(100, tank="T-017", kind=WITHDRAWAL),
        )
        measure("latest of each tank", store.latest)
        measure("count", store.count)
        some = store.tail(1, kind=AMENDMENT)[0].entry
        measure("history", lambda: store.history(some.uid))
        store.close()


if __name__ == "__main__":
    main()

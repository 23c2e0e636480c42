"""Entries, texts and a writing process for the tests of the log."""

from __future__ import annotations

import itertools
import os
import random
import subprocess
import sys
import time
from hashlib import sha256
from pathlib import Path
from typing import IO, Any

import tankcalc
from tankcalc.shiftlog import Entry, now_us, open_store
from tankcalc.shiftlog.uid import new_uid

SITE_TEXT, TANK_TEXT, FLUID_TEXT = b'name = "Skerry Point"\n', b'name = "T-101"\n', b"name = 'x'\n"
TEXTS = {sha256(text).hexdigest(): text for text in (SITE_TEXT, TANK_TEXT, FLUID_TEXT)}
VERSIONS = dict(zip(("site", "tank", "fluid"), TEXTS, strict=True))
NOON_US = 1_796_126_400_000_000  # 2026-12-01T12:00Z


def sample(**changes: Any) -> Entry:
    """Return a reading, with some of its facts changed."""
    facts: dict[str, Any] = {
        "uid": new_uid(now_us()),
        "kind": "reading",
        "t_us": NOON_US,
        "entered_us": NOON_US,
        "shift": "Day",
        "shift_date": "2026-12-01",
        "time_zone": "Europe/Lisbon",
        "site": "Skerry Point Terminal",
        "user": "operator",
        "console": "host:1",
        "program": "0.1.0",
        "who": "A. Rook",
        "tank": "T-101",
        "fluid": "gas-oil",
        "typed": {"p1": "85.3 kPa", "temperature": "18 degC"},
        "result": {
            "tank": "T-101",
            "status": "good",
            "level_m": 10.1,
            "volume_m3": 3173.0,
            "mass_kg": 2681185.0,
            "p2_pa": None,
            "warnings": [],
        },
        "versions": VERSIONS,
    }
    return Entry(**facts | changes)


def write(path: str, count: int) -> None:
    """Append entries one by one and print the identifier of each once it is acknowledged.

    Between two entries there is a pause: SQLite's lock has no queue, and writers that never
    pause starve each other.
    """
    store = open_store(path)
    for number in itertools.count():
        if number == count:
            return
        receipt = store.append(sample(tank=f"T-{number % 5}"), TEXTS)
        print(receipt.uid.hex(), flush=True)
        time.sleep(random.uniform(0.0, 0.008))


def python(
    code: str, *arguments: str, stdout: IO[str] | int = subprocess.PIPE
) -> subprocess.Popen[str]:
    """Start another Python that can import this module."""
    roots = (Path(__file__).parent, Path(tankcalc.__file__).parents[1])
    environment = os.environ | {"PYTHONPATH": os.pathsep.join(map(str, roots))}
    return subprocess.Popen(
        [sys.executable, "-c", code, *arguments],
        env=environment,
        stdin=subprocess.PIPE,
        stdout=stdout,
        stderr=subprocess.PIPE,
        text=True,
    )


def writer(path: Path, said: Path, count: int = -1) -> subprocess.Popen[str]:
    """Start a process that appends ``count`` entries (without end when it is negative).

    It says what it has done in a file, where a kill leaves what was said.
    """
    code = "import sys; from shiftlog_samples import write; write(sys.argv[1], int(sys.argv[2]))"
    with said.open("w") as output:
        return python(code, str(path), str(count), stdout=output)

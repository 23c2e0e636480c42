"""A small site folder for tests of the command line; the figures are of no real plant."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

SITE = """\
name = "Test Site"
time_zone = "Europe/Lisbon"
units = "metric"

[gravity]
value = "9.81 m/s2"

[air]
density = "1.2 kg/m3"

[shifts]
Day = "06:00"
Night = "18:00"
"""

TANK = """\
name = "V-1"
contents = "oil"

[shape]
kind = "vertical cylinder"
diameter = "20 m"
height = "15 m"
bottom = { kind = "flat" }
roof = { kind = "flat" }

[transmitters.p1]
elevation = "0.5 m"
reads = "gauge"
range = ["0 kPa", "160 kPa"]
"""

BLANKET = """
[transmitters.p3]
elevation = "15 m"
reads = "gauge"
"""

OIL = """\
name = "Oil"

[density]
model = "constant"
value = "850 kg/m3"
"""


def make_site(folder: Path) -> Path:
    """Write a site with the tanks V-1 and V-3 (blanketed) and the fluid oil."""
    (folder / "tanks").mkdir(parents=True)
    (folder / "fluids").mkdir()
    (folder / "site.toml").write_text(SITE)
    (folder / "tanks" / "V-1.toml").write_text(TANK)
    (folder / "tanks" / "V-3.toml").write_text(TANK.replace("V-1", "V-3") + BLANKET)
    (folder / "fluids" / "oil.toml").write_text(OIL)
    return folder


def environment(home: Path) -> dict[str, str]:
    """An environment whose user has nothing yet: no configuration, no data, no state."""
    kept = {k: v for k, v in os.environ.items() if not k.startswith(("TANKCALC", "XDG_"))}
    return kept | {"HOME": str(home), "LC_ALL": "C.UTF-8"}


def run(home: Path, *words: str | bytes, **more: str) -> subprocess.CompletedProcess[str]:
    """Run the command line in a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "tankcalc", *words],
        capture_output=True,
        text=True,
        errors="surrogateescape",
        env=environment(home) | more,
        timeout=60,
        check=False,
        stdin=subprocess.DEVNULL,
    )

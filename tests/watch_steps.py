"""A site with limits and a log of readings, for tests of the console's screens of the shift."""

from __future__ import annotations

from contextlib import closing
from pathlib import Path

from sites import make_site

from tankcalc.gauging import evaluate
from tankcalc.profiles import load_site
from tankcalc.shiftlog import (
    Entry,
    movement_entry,
    note_entry,
    now_us,
    open_store,
    reading_entry,
)
from tankcalc.typed import readings_from_text
from tankcalc.uncertainty import assess, with_uncertainty

LIMITS = """
[limits]
critical_high = "14.5 m"
high_high = "14.0 m"
maximum_working = "13.6 m"
minimum_working = "0.9 m"
"""
HOUR_US = 3_600_000_000
OIL = """\
name = "Oil"

[density]
model = "expansion"
reference = "850 kg/m3"
at = "15 degC"
coefficient = "8e-4 / K"
"""


class Logged:
    """A site and its log, to be filled before a console is opened on it."""

    def __init__(self, tmp_path: Path, *, limits: bool = True) -> None:
        self.folder = make_site(tmp_path / "site")
        if limits:
            tank = self.folder / "tanks" / "V-1.toml"
            tank.write_text(tank.read_text() + LIMITS)
        (self.folder / "fluids" / "oil.toml").write_text(OIL)
        self.site = load_site(self.folder)
        self.path = tmp_path / "log.sqlite"
        self.now_us = now_us()

    def read(self, hours_ago: float, p1: str, tank: str = "V-1", note: str = "") -> int:
        """Log a reading at 15 degC; return the number of its entry."""
        vessel = self.site.tank(tank)
        fluid = self.site.fluid_for(vessel, None)
        typed = {"p1": p1, "temperature": "15 degC"}
        if tank == "V-3":
            typed["p3"] = "0 kPa"
        readings, problems = readings_from_text(vessel, typed)
        assert not problems
        result = evaluate(vessel, fluid, readings)
        if result.status != "refused":
            result = with_uncertainty(result, assess(vessel, fluid, readings))
        entry = reading_entry(
            site=self.site,
            tank=vessel,
            fluid=fluid,
            typed=typed,
            result=result,
            now_us=self.now_us - round(hours_ago * HOUR_US),
            who="JD",
            note=note,
        )
        return self._append(entry)

    def note(self, words: str) -> int:
        """Log a note on V-1, now."""
        tank = self.site.tank("V-1")
        return self._append(note_entry(site=self.site, note=words, now_us=self.now_us, tank=tank))

    def receive(self, hours_ago: float, quantity: str) -> int:
        """Log a receipt into V-1."""
        entry = movement_entry(
            site=self.site,
            tank=self.site.tank("V-1"),
            received=quantity,
            now_us=self.now_us - round(hours_ago * HOUR_US),
            who="JD",
        )
        return self._append(entry)

    def entries(self) -> list[Entry]:
        """What the log holds now."""
        with closing(open_store(self.path)) as store:
            return [row.entry for row in store.tail(1000)]

    def _append(self, entry: Entry) -> int:
        versions = {self.site.version, *entry.versions.values()}
        with closing(open_store(self.path)) as store:
            return store.append(entry, {v: self.site.text(v) for v in versions}).seq


def above(tmp_path: Path) -> Logged:
    """V-1 above its maximum working level, and V-3 with nothing to tell.

    114 kPa of 850 kg/m3 at 9.81 m/s2 is 0.5 + 114000 / (9.81 x 848.8) = 14.191 m, the air
    weighing 1.2 kg/m3.
    """
    logged = Logged(tmp_path)
    logged.read(2.0, "100 kPa")
    logged.read(1.0, "114 kPa")
    logged.read(1.0, "50 kPa", "V-3")
    return logged

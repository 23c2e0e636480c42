"""A site with a log that can be filled, for the tests of what is made from both."""

from __future__ import annotations

from contextlib import closing
from pathlib import Path
from typing import Any

from sites import TANK, make_site

from tankcalc.profiles import Site, load_site
from tankcalc.shiftlog import (
    Entry,
    acknowledgement_entry,
    amended_reading,
    fault_entry,
    movement_entry,
    note_entry,
    open_store,
    reading_entry,
    sign_entry,
    withdrawal_entry,
)
from tankcalc.typed import readings_from_text
from tankcalc.uncertainty import answered

HOUR_US = 3_600_000_000
NOON_US = 1_796_126_400_000_000  # 2026-12-01T12:00Z; in Lisbon the day shift runs from 06:00Z
DAY_US = 24 * HOUR_US

LIMITS = """
[limits]
minimum_working = "0.9 m"
maximum_working = "13.6 m"
high_high = "14.0 m"
critical_high = "14.5 m"
"""

AREA_M2 = 314.1592653589793
OIL_KG_M3 = 850.0


class Plant:
    """A site folder and a log, by their paths."""

    def __init__(self, root: Path) -> None:
        self.folder, self.log = make_site(root / "site"), root / "log.sqlite"
        for name in ("V-1", "V-2"):
            self.tank_file(name, TANK.replace("V-1", name) + 'accuracy = "30 Pa"\n' + LIMITS)
        (self.folder / "tanks" / "V-3.toml").unlink()
        self.site: Site = load_site(self.folder)

    def tank_file(self, name: str, text: str) -> None:
        (self.folder / "tanks" / f"{name}.toml").write_text(text)

    def site_file(self, **replaced: str) -> None:
        """Change site.toml: each word for another text."""
        path = self.folder / "site.toml"
        text = path.read_text()
        for old, new in replaced.items():
            text = text.replace(old, new)
        path.write_text(text)
        self.site = load_site(self.folder)

    def put(self, entry: Entry) -> Entry:
        versions = {self.site.version, *entry.versions.values()}
        with closing(open_store(self.log)) as store:
            store.append(entry, {v: self.site.text(v) for v in versions})
        return entry

    def read(self, tank: str, t_us: int, **facts: Any) -> Entry:
        """Log a reading; ``typed`` is what was typed, ``entered_us`` when."""
        vessel = self.site.tank(tank)
        fluid = self.site.fluid_for(vessel, None)
        typed = facts.pop("typed")
        result = answered(vessel, fluid, readings_from_text(vessel, typed)[0])
        return self.put(
            reading_entry(
                site=self.site, tank=vessel, fluid=fluid, typed=typed, result=result,
                now_us=facts.pop("entered_us", t_us), t_us=t_us, **facts,
            )
        )  # fmt: skip

    def level(self, tank: str, t_us: int, level_m: float, **facts: Any) -> Entry:
        """Log the p1 that a level gives: 0.5 m is below the tap, air and g as the site states."""
        p1 = (level_m - 0.5) * (OIL_KG_M3 - 1.2) * 9.81
        return self.read(tank, t_us, typed={"p1": f"{p1!r} Pa"}, **facts)

    def amend(self, original: Entry, typed: dict[str, str], now_us: int, reason: str) -> Entry:
        vessel = self.site.tank(original.tank or "")
        fluid = self.site.fluid_for(vessel, None)
        result = answered(vessel, fluid, readings_from_text(vessel, typed)[0])
        return self.put(
            amended_reading(
                site=self.site, original=original, tank=vessel, fluid=fluid, typed=typed,
                result=result, reason=reason, now_us=now_us,
            )
        )  # fmt: skip

    def withdraw(self, original: Entry, now_us: int, reason: str = "wrong tank") -> Entry:
        return self.put(
            withdrawal_entry(site=self.site, original=original, reason=reason, now_us=now_us)
        )

    def note(self, now_us: int, note: str, **facts: Any) -> Entry:
        return self.put(note_entry(site=self.site, note=note, now_us=now_us, **facts))

    def fault(
        self, tank: str, now_us: int, instrument: str, *, opened: bool = True, note: str = "n"
    ) -> Entry:
        return self.put(
            fault_entry(
                site=self.site, tank=self.site.tank(tank), instrument=instrument,
                opened=opened, note=note, now_us=now_us, who="A. Rook",
            )
        )  # fmt: skip

    def move(self, tank: str, now_us: int, **quantity: str) -> Entry:
        return self.put(
            movement_entry(site=self.site, tank=self.site.tank(tank), now_us=now_us, **quantity)  # type: ignore[arg-type]
        )

    def sign(self, now_us: int, who: str, *, on: bool = True) -> Entry:
        return self.put(sign_entry(site=self.site, on=on, who=who, now_us=now_us))

    def answer(self, tank: str, key: str, now_us: int, **facts: Any) -> Entry:
        """Acknowledge an alert; with ``until_us`` and ``reason`` set it aside."""
        return self.put(
            acknowledgement_entry(
                site=self.site, of="alert", what=key, tank=self.site.tank(tank),
                who="B. Tern", now_us=now_us, **facts,
            )
        )  # fmt: skip

"""A log with entries in it, and steps of the console that several tests of the log take."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

from sites import make_site
from test_tui import Console, log_it

from tankcalc.profiles import Site, load_site
from tankcalc.shiftlog import Entry, Row, note_entry, now_us, open_store

HOSTILE = 'T\x1b[31m\x9b2J\u202e[bold]x[/] <script>alert(1)</script> =HYPERLINK("x")'
"""What nobody should type and somebody will."""


def site_of(tmp_path: Path) -> Site:
    folder = tmp_path / "site"
    return load_site(folder if folder.exists() else make_site(folder))


def rows_of(tmp_path: Path) -> list[Row]:
    store = open_store(str(tmp_path / "log.sqlite"))
    try:
        return store.tail(10_000)
    finally:
        store.close()


def put(tmp_path: Path, entries: Sequence[Entry]) -> None:
    """Log entries as another console would."""
    site = site_of(tmp_path)
    for name in site.tank_names():
        tank = site.tank(name)
        site.fluid_for(tank, None)
    store = open_store(str(tmp_path / "log.sqlite"))
    versions = {version for entry in entries for version in entry.versions.values()}
    texts = {version: site.text(version) for version in versions}
    store.append_many([(entry, texts) for entry in entries])
    store.close()


def notes(tmp_path: Path, count: int, first: int = 0, **facts: object) -> None:
    """Log notes of this shift, "note 0" and so on."""
    site = site_of(tmp_path)
    tank = site.tank("V-1")
    made = [
        note_entry(site=site, note=f"note {n}", now_us=now_us(), tank=tank, who="JD")
        for n in range(first, first + count)
    ]
    put(tmp_path, [replace(entry, **facts) for entry in made])  # type: ignore[arg-type]


async def to_log(console: Console) -> None:
    await console.press("f7")
    await console.wait(">LOG")


async def logged(console: Console, *typed: str) -> None:
    """Log readings and go to the log."""
    for text in typed:
        await log_it(console, text)
    await to_log(console)
    await console.wait(f"{len(typed)} entr")

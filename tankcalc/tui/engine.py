"""The heavy part of start-up: the calculation and the site, loaded after the first paint."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from threading import Thread
from typing import TYPE_CHECKING

from textual.message import Message

from tankcalc.errors import TankcalcError
from tankcalc.profiles.names import names_in
from tankcalc.tui.defects import note_defect
from tankcalc.tui.messages import EngineFailed, EngineReady, TanksRead

if TYPE_CHECKING:
    from tankcalc.profiles import Site
    from tankcalc.tank import Tank

TANKS = "tanks"


Post = Callable[[Message], object]


def start(folder: Path, is_demo: bool, state: Path, post: Post) -> None:
    """Load everything in a thread of its own and post what came of it."""
    work = (folder, is_demo, state, post)
    Thread(target=load, args=work, name="tankcalc-engine", daemon=True).start()


def tank_names(folder: Path) -> list[str]:
    """Return the names of the tanks, from the directory alone, so that they show at once."""
    return names_in(folder / TANKS)


def load(folder: Path, is_demo: bool, state: Path, post: Post) -> None:
    """Load the site, then every tank, and post each when it is there."""
    try:
        site = _site(folder, is_demo)
        post(EngineReady(site))
        post(TanksRead(*_tanks(site)))
    except TankcalcError as error:
        post(EngineFailed(str(error)))
    except Exception as error:  # noqa: BLE001 - a thread's traceback would wreck the screen
        post(EngineFailed(note_defect(state, error)))


def _site(folder: Path, is_demo: bool) -> Site:
    """Return the site, with all that a first answer needs imported."""
    import tankcalc.gauging
    import tankcalc.report
    import tankcalc.shiftlog
    import tankcalc.tui.actions
    import tankcalc.tui.log_front
    import tankcalc.tui.scene
    import tankcalc.typed  # noqa: F401
    from tankcalc.profiles import load_site

    return load_site(folder, is_demo=is_demo)


def _tanks(site: Site) -> tuple[dict[str, Tank], dict[str, str]]:
    """Return every tank whose file is sound, and why the others are not."""
    sound: dict[str, Tank] = {}
    broken: dict[str, str] = {}
    for name in site.tank_names():
        try:
            sound[name] = site.tank(name)
        except TankcalcError as error:
            broken[name] = str(error)
    return sound, broken

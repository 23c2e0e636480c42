"""Which site folder the program works on. Loads nothing heavy: the screen comes up before it."""

from __future__ import annotations

import os
from pathlib import Path

import tankcalc
from tankcalc.errors import InputError
from tankcalc.text import clean

SITE_FILE = "site.toml"
VARIABLE = "TANKCALC_PROFILES"


def find_site(option: str | None = None) -> tuple[Path, bool]:
    """Return the site's folder, and whether it is the demo site.

    First match wins: the option ``--profiles``; ``$TANKCALC_PROFILES``; the user's configuration
    folder, where it holds a site; the demo site.

    Raises
    ------
    InputError
        The option or the variable names no site folder.
    """
    demo = demo_folder()
    for given, source in ((option, "--profiles"), (os.environ.get(VARIABLE), f"${VARIABLE}")):
        if given is not None and (given.strip() or source == "--profiles"):
            folder = _named(given, source)
            return folder, folder.resolve() == demo.resolve()
    mine = user_folder()
    if (mine / SITE_FILE).is_file():
        return mine, False
    return demo, True


def user_folder() -> Path:
    """Return the user's configuration folder, which may hold a site."""
    from platformdirs import user_config_path

    return user_config_path("tankcalc")


def demo_folder() -> Path:
    """Return the demo site: inside the installed package, or beside it in a checkout."""
    package = Path(tankcalc.__file__).parent
    inside = package / "demo"
    return inside if inside.is_dir() else package.parent / "profiles"


def _named(given: str, source: str) -> Path:
    shown = f'{source} "{clean(given)}"'
    try:
        folder = Path(given).expanduser()
        is_folder, is_site = folder.is_dir(), (folder / SITE_FILE).is_file()
    except (RuntimeError, ValueError, OSError) as error:
        # No home folder to expand, a name no file can have, or a folder closed to this user.
        raise InputError(f"{shown}: cannot be read.") from error
    if not is_folder:
        raise InputError(f"{shown}: there is no such folder.")
    if not is_site:
        raise InputError(
            f"{shown}: the folder holds no {SITE_FILE}. "
            "A new site is begun with: tankcalc begin DIR"
        )
    return folder

"""Profile files: a site, its tanks and fluids, read from a folder of small TOML files.

where            which folder
documents        one file: read safely, parsed, its problems told with lines
findings, lines  what is wrong in a file, and on which line
leaves, tables   the words the files are described in
*_schema         what each kind of file may hold, and what is built from it
tank_checks      what must hold between the parts of a tank
site             the folder as an object: tanks and fluids by name
vetting, beginning  check a site, start a site

Names resolve on demand (PEP 562): finding the folder loads none of the rest.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from tankcalc.profiles.beginning import begin
    from tankcalc.profiles.site import Site, load_site
    from tankcalc.profiles.vetting import files_to_vet, vet
    from tankcalc.profiles.where import find_site

__all__ = ["Site", "begin", "files_to_vet", "find_site", "load_site", "vet"]

_HOMES = {
    "Site": "site",
    "begin": "beginning",
    "files_to_vet": "vetting",
    "find_site": "where",
    "load_site": "site",
    "vet": "vetting",
}


def __getattr__(name: str) -> object:
    """Return a public name, loading the module it lives in."""
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    value: object = getattr(import_module(f"{__name__}.{_HOMES[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    """Return the public names."""
    return list(__all__)

"""Who uses a fluid file: tanks that hold it, layered fluids that name it."""

from __future__ import annotations

from typing import NamedTuple

from tankcalc.profiles.documents import Document
from tankcalc.profiles.names import SUFFIX
from tankcalc.profiles.site import FLUIDS, TANKS, Site


class Users(NamedTuple):
    """Files that use a fluid, by their stems."""

    tanks: tuple[str, ...] = ()
    fluids: tuple[str, ...] = ()


def users_of(site: Site, stem: str) -> Users:
    """Return which tanks hold a fluid or layers of it; files that cannot be read hold nothing."""
    layered = tuple(
        name
        for name in site.fluid_names()
        if name != stem and _names_layer(_data(site, FLUIDS, name).get("layer"), stem)
    )
    tanks = tuple(
        name
        for name in site.tank_names()
        if _data(site, TANKS, name).get("contents") in (stem, *layered)
    )
    return Users(tanks, layered)


def _data(site: Site, folder: str, name: str) -> dict[str, object]:
    path = site.folder / folder / f"{name}{SUFFIX}"
    return Document(path, f"{folder}/{name}{SUFFIX}").data


def _names_layer(layers: object, stem: str) -> bool:
    entries = layers if isinstance(layers, list) else []
    return any(isinstance(entry, dict) and entry.get("fluid") == stem for entry in entries)

"""A site folder: what its site.toml says, and its tanks and fluids by name."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from types import MappingProxyType
from typing import TYPE_CHECKING, cast

from tankcalc.errors import Problem, ProfileError
from tankcalc.limits.settings import AlertSettings, RateSettings
from tankcalc.profiles.crews_schema import Roster
from tankcalc.profiles.documents import Document
from tankcalc.profiles.findings import did_you_mean, show
from tankcalc.profiles.names import SUFFIX, names_in
from tankcalc.profiles.site_schema import SITE, check_crews, read_surroundings
from tankcalc.profiles.where import SITE_FILE
from tankcalc.surroundings import Surroundings
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.tank import Tank
    from tankcalc.units import System

TANKS, FLUIDS = "tanks", "fluids"
DEFAULT_SHIFTS = MappingProxyType({"Day": "00:00"})
"""Where a site names no shifts: one, the calendar day."""


@dataclass(frozen=True)
class Site:
    """A site folder.

    Attributes
    ----------
    folder : Path
        Where it lies.
    is_demo : bool
        Whether it is the demo site, which is no real plant.
    name, place : str
        As the site calls itself.
    time_zone : str
        IANA name.
    units : {"metric", "us", "imperial"}
        What is shown, never what is stored.
    shifts : mapping of str to str
        Local start time ("HH:MM") by the shift's name, in the order of the file.
    log_store : str or None
        Where the log is kept, as the file states it.
    surroundings : Surroundings
        Gravity, outside air and its pressure.
    version : str
        SHA-256 of site.toml, in hex.
    crews : Roster or None
        Which crew works each shift, where the site states it.
    alerts : AlertSettings
        Dead bands, delays and ages.
    rates : RateSettings
        How readings are taken.
    """

    folder: Path
    is_demo: bool
    name: str
    place: str
    time_zone: str
    units: System
    shifts: Mapping[str, str]
    log_store: str | None
    surroundings: Surroundings
    version: str
    crews: Roster | None = None
    alerts: AlertSettings = field(default_factory=AlertSettings)
    rates: RateSettings = field(default_factory=RateSettings)
    _texts: dict[str, bytes] = field(default_factory=dict, repr=False, compare=False)

    def tank_names(self) -> list[str]:
        """Return the names of the tanks, sorted; no file is read."""
        return names_in(self.folder / TANKS)

    def fluid_names(self) -> list[str]:
        """Return the names of the fluids, sorted; no file is read."""
        return names_in(self.folder / FLUIDS)

    def tank(self, name: str) -> Tank:
        """Return a tank.

        Raises
        ------
        ProfileError
            There is none of that name, or its file has problems: all of them.
        """
        from tankcalc.profiles.tank_schema import read_tank

        document = self._document(TANKS, name, self.tank_names())
        tank = read_tank(document, self.surroundings)
        document.refuse()
        self._texts[document.version] = document.whole
        return cast("Tank", tank)

    def fluid(self, name: str) -> Fluid:
        """Return a fluid.

        Raises
        ------
        ProfileError
            There is none of that name, or its file has problems: all of them.
        """
        from tankcalc.profiles.fluid_schema import read_fluid

        document = self._document(FLUIDS, name, self.fluid_names())
        fluid = read_fluid(document)
        document.refuse()
        self._texts[document.version] = document.whole
        return cast("Fluid", fluid)

    def fluid_for(self, tank: Tank, chosen: str | None) -> Fluid:
        """Return the fluid chosen for a tank, or else its usual contents.

        Raises
        ------
        ProfileError
            Nothing is chosen and the tank names no contents; or as for `fluid`.
        """
        if chosen is None and not tank.contents:
            what = "the tank names no contents and no fluid was chosen."
            advice = did_you_mean("", self.fluid_names())
            raise ProfileError([Problem(f"{TANKS}/{tank.file}{SUFFIX}", "contents", what, advice)])
        return self.fluid(tank.contents if chosen is None else chosen)

    def text(self, version: str) -> bytes:
        """Return the bytes that a version of this site, a tank or a fluid read here stands for.

        Raises
        ------
        KeyError
            Nothing of that version has been read.
        """
        return self._texts[version]

    def _document(self, kind: str, name: str, known: list[str]) -> Document:
        """Return the file of that exact name; a name is looked up, never made into a path."""
        if name not in known:
            what = f"there is no {kind.removesuffix('s')} {show(name)}."
            raise ProfileError([Problem(kind, "", what, did_you_mean(name, known))])
        return Document(self.folder / kind / f"{name}{SUFFIX}", f"{kind}/{name}{SUFFIX}")


def load_site(folder: Path, *, is_demo: bool = False) -> Site:
    """Return the site of a folder.

    Raises
    ------
    ProfileError
        site.toml has problems: all of them.
    """
    document = Document(folder / SITE_FILE, SITE_FILE)
    site = read_site(document, is_demo=is_demo)
    document.refuse()
    return cast("Site", site)


def read_site(document: Document, *, is_demo: bool = False) -> Site | None:
    """Return the site of a file, or None; everything wrong goes to the document's findings."""
    if not document.readable:
        return None
    findings = document.findings
    values = SITE.values(document.data, (), findings)
    around = read_surroundings(values, findings)
    shifts = values["shifts"] or dict(DEFAULT_SHIFTS)
    check_crews(values, shifts, findings)
    if around is None or len(findings):
        return None
    folder = document.path.parent
    return Site(
        folder=folder,
        is_demo=is_demo,
        name=values["name"] or clean(folder.resolve().name, 60) or "Site",
        place=values["place"],
        time_zone=values["time_zone"],
        units=values["units"],
        shifts=MappingProxyType(shifts),
        log_store=(values["log"] or {}).get("store"),
        surroundings=around,
        version=document.version,
        crews=values["crews"],
        alerts=values["alerts"],
        rates=values["rates"],
        _texts={document.version: document.whole},
    )

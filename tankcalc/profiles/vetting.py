"""Checks profile files: every problem of every file, and what in them is worth a look."""

from __future__ import annotations

from collections.abc import Sequence
from os.path import isdir, isfile  # A name no file can have is no folder; pathlib raises.
from pathlib import Path

from tankcalc.errors import Problem
from tankcalc.profiles.documents import Document
from tankcalc.profiles.findings import did_you_mean, show
from tankcalc.profiles.fluid_checks import note_fluid_doubts
from tankcalc.profiles.fluid_schema import FLUID, read_fluid
from tankcalc.profiles.names import SUFFIX, files_in, is_clean, names_in
from tankcalc.profiles.site import FLUIDS, TANKS, Site, read_site
from tankcalc.profiles.site_schema import SITE
from tankcalc.profiles.source_schema import check_source, named_sources
from tankcalc.profiles.tables import Table
from tankcalc.profiles.tank_checks import note_doubts
from tankcalc.profiles.tank_schema import TANK, read_tank
from tankcalc.profiles.where import SITE_FILE
from tankcalc.surroundings import surroundings
from tankcalc.text import clean

KINDS: dict[str, Table] = {"site": SITE, "tank": TANK, "fluid": FLUID}


def vet(paths: Sequence[Path] | None, site: Site | Path) -> list[Problem]:
    """Return every problem of the files, and of those in the folders; None: of the whole site."""
    folder = site if isinstance(site, Path) else site.folder
    problems = []
    for path in files_to_vet(paths, folder):
        problems += vet_file(path, folder)
    return problems


def files_to_vet(paths: Sequence[Path] | None, folder: Path) -> list[Path]:
    """Return the profile files among the paths and in the folders among them, each once."""
    found: dict[Path, None] = {}
    for path in paths or [folder]:
        found.update(dict.fromkeys(_files_of(path) if isdir(path) else [path]))
    return list(found)


def _files_of(folder: Path) -> list[Path]:
    """Return the files of a site folder, or the profiles of any other."""
    parts = [folder / TANKS, folder / FLUIDS]
    if not (folder / SITE_FILE).exists() and not any(isdir(part) for part in parts):
        return files_in(folder)
    return [folder / SITE_FILE, *(path for part in parts for path in files_in(part))]


def vet_file(path: Path, folder: Path) -> list[Problem]:
    """Return every problem of one file; ``folder`` is the site where the path tells of none."""
    home = path.parent.parent if path.parent.name in (TANKS, FLUIDS) else path.parent
    if not isfile(home / SITE_FILE):
        home = folder
    if path.suffix != SUFFIX:
        what = f"a profile's name ends in {SUFFIX}."
        advice = "A capacity table is checked with the tank that names it."
        return [Problem(clean(_shown(path, home)), "", what, advice)]
    document = Document(path, _shown(path, home))
    if not is_clean(path.stem):
        what = "the file's name holds characters that cannot be shown."
        document.findings.add((), what, "Rename it.")
    if document.readable:
        _vet_document(document, home)
    return document.problems()


def _vet_document(document: Document, home: Path) -> None:
    match _kind(document.path, document.data):
        case "site":
            read_site(document)
        case "fluid":
            fluid = read_fluid(document)
            if fluid is not None:
                note_fluid_doubts(fluid, document.findings)
        case "tank":
            _vet_tank(document, home)
        case _:
            document.findings.add(
                (),
                "this is no site, tank or fluid file.",
                "A tank has [shape], a fluid [density] or [[layer]].",
            )


def _shown(path: Path, home: Path) -> str:
    """Return what to call a file: its place in its site, or the path as it was given."""
    try:
        return path.relative_to(home).as_posix()
    except ValueError:
        return str(path)


def _kind(path: Path, data: dict[str, object]) -> str | None:
    """Return what kind of profile a file is, by its place or else by what it holds."""
    if path.name == SITE_FILE:
        return "site"
    by_place = {TANKS: "tank", FLUIDS: "fluid"}.get(path.parent.name)
    if by_place is not None:
        return by_place
    held = {kind: len(data.keys() & table.keys.keys()) for kind, table in KINDS.items()}
    likeliest = max(held, key=lambda kind: held[kind])
    return likeliest if held[likeliest] else None


def _vet_tank(document: Document, home: Path) -> None:
    tank = read_tank(document, surroundings())
    _check_sources(document, home)
    if tank is None:
        return
    findings = document.findings
    fluids = names_in(home / FLUIDS)
    if tank.contents and tank.contents not in fluids:
        meant = did_you_mean(tank.contents, fluids)
        findings.add(("contents",), f"there is no fluid {show(tank.contents)}.", meant)
    if tank.name != tank.file and tank.name in names_in(document.path.parent):
        findings.add(("name",), f"{show(tank.name)} is the name of another tank's file.")
    note_doubts(tank, findings)


def _check_sources(document: Document, home: Path) -> None:
    """Note instruments whose source the site does not have; the site is vetted on its own."""
    named = list(named_sources(document.data))
    if not named:
        return
    sources = Document(home / SITE_FILE, SITE_FILE).data.get("sources", {})
    for at, source in named:
        check_source(source, sources if isinstance(sources, dict) else {}, at, document.findings)

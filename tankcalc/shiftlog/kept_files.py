"""The profile files behind an entry, laid out again from the texts that the log keeps.

A version stands for a file's bytes followed by those of the files beside it that it refers to: a
tank's capacity table, the liquids of a layered fluid. Nothing parts them, so they are parted here
by what they hold: a capacity table is no TOML, and a fluid says its name or density once.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from hashlib import sha256
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING, Any

from tankcalc.errors import InputError
from tankcalc.text import clean

if TYPE_CHECKING:
    from tankcalc.fluids.fluid import Fluid
    from tankcalc.profiles import Site
    from tankcalc.tank import Tank

Files = dict[str, bytes]

_MOST_TRIES = 40
_ERROR_AT = re.compile(r"\(at line (\d+), column (\d+)\)$")
_MAY_BEGIN = re.compile(rb"(?m)^[ \t]*(?=[\w\"'\[])|(?=\bname\s*=)|(?=\[(?:density|vapour)\])")


def tank_and_fluid(
    site: bytes, tank: tuple[str, bytes], fluid: tuple[str, bytes]
) -> tuple[Site, Tank, Fluid]:
    """Return site, tank and fluid as their texts describe them; tank and fluid with file names.

    Raises
    ------
    InputError
        A text is no sound profile for this version of the program, or cannot be parted into the
        files it was made of.
    """
    with TemporaryDirectory(prefix="tankcalc-") as name:
        folder = Path(name)
        (folder / "site.toml").write_bytes(site)
        from tankcalc.profiles import load_site

        loaded = load_site(folder)
        made = _first_sound(folder / "tanks", tank, loaded.tank)
        return loaded, made, _first_sound(folder / "fluids", fluid, loaded.fluid)


def files_of_tank(name: str, text: bytes) -> Iterator[Files]:
    """Yield the files that a tank's text may be made of: its own, or with a table beside it."""
    yield {f"{name}.toml": text}
    try:
        tomllib.loads(text.decode("utf-8-sig", "replace"))
    except tomllib.TOMLDecodeError as error:
        place = _ERROR_AT.search(str(error))
        if place is None:
            return
        lines = text.split(b"\n")
        start = sum(len(line) + 1 for line in lines[: int(place[1]) - 1])
        # Where the file did not end in a line break, the table begins within its last line.
        within = len(
            lines[int(place[1]) - 1].decode("utf-8", "replace")[: int(place[2]) - 1].encode()
        )
        for cut in (start + within, start):
            beside = (_toml(text[:cut]) or {}).get("shape", {})
            if isinstance(beside, Mapping) and isinstance(beside.get("file"), str):
                yield {f"{name}.toml": text[:cut], beside["file"]: text[cut:]}


def files_of_fluid(name: str, text: bytes) -> Iterator[Files]:
    """Yield the files that a fluid's text may be made of: its own, or with those of its layers."""
    yield {f"{name}.toml": text}
    for cut in _cuts(text):
        own = _toml(text[:cut])
        if own is None or not isinstance(own.get("layer"), list):
            continue
        named = [layer.get("fluid") for layer in own["layer"] if isinstance(layer, dict)]
        layers = list(dict.fromkeys(f"{layer}.toml" for layer in named))
        for pieces in _parted(text[cut:], len(layers)):
            yield {f"{name}.toml": text[:cut], **dict(zip(layers, pieces, strict=True))}


def _parted(text: bytes, count: int) -> Iterator[list[bytes]]:
    """Yield the ways in which a text is that many files of single liquids."""
    if count == 1:
        if _is_liquid(text):
            yield [text]
        return
    for cut in _cuts(text):
        if _is_liquid(text[:cut]):
            for rest in _parted(text[cut:], count - 1):
                yield [text[:cut], *rest]


def _cuts(text: bytes) -> Iterator[int]:
    return (match.start() for match in _MAY_BEGIN.finditer(text) if match.start())


def _is_liquid(text: bytes) -> bool:
    data = _toml(text)
    return data is not None and "density" in data and "layer" not in data


def _toml(text: bytes) -> dict[str, Any] | None:
    try:
        return tomllib.loads(text.decode("utf-8-sig"))
    except (ValueError, RecursionError):
        return None


def _first_sound(folder: Path, given: tuple[str, bytes], load: Any) -> Any:
    """Return what the first parting that the program reads, as the same version, describes."""
    name, text = given
    parted = files_of_tank if folder.name == "tanks" else files_of_fluid
    problem: InputError | None = None
    for tries, files in enumerate(parted(name, text)):
        if tries == _MOST_TRIES:
            break
        _write(folder, files)
        try:
            made = load(name)
        except InputError as error:
            problem = error
            continue
        if made.version == sha256(text).hexdigest():
            return made
    raise problem or InputError(f"the text of {clean(name)} cannot be parted into its files.")


def _write(folder: Path, files: Files) -> None:
    """Lay files out in an empty folder; their names come from a log, so they may be anything."""
    folder.mkdir(exist_ok=True)
    for old in folder.iterdir():
        old.unlink()
    for name, text in files.items():
        if clean(name) != name or "/" in name or name.startswith("."):
            raise InputError(f'"{clean(name)}" is no name for a profile.')
        try:
            (folder / name).write_bytes(text)
        except OSError as error:
            raise InputError(f'"{clean(name)}" is no name for a profile.') from error

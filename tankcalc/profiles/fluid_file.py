"""Writes a fluid file: a new one, or one changed in place, comments kept and the old file too."""

from __future__ import annotations

import errno
import os
import re
from collections.abc import Mapping
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from tankcalc.errors import InputError, TankcalcError
from tankcalc.profiles.documents import Document
from tankcalc.profiles.fluid_schema import read_fluid
from tankcalc.profiles.names import SUFFIX
from tankcalc.profiles.site import FLUIDS, Site
from tankcalc.text import clean

_STEM = re.compile(r"\w[\w .+-]{0,59}")
_WHY = {
    errno.ENOSPC: "the disk is full.",
    errno.EDQUOT: "your share of the disk is full.",
    errno.EROFS: "it lies on a read-only disk.",
    errno.EACCES: "you may not write in this folder.",
    errno.EPERM: "you may not write in this folder.",
}


@dataclass(frozen=True, slots=True)
class Origin:
    """The fluid file that an edit began from: its name, and its bytes at that time."""

    stem: str
    held: bytes


@dataclass(frozen=True, slots=True)
class Saved:
    """The file written, and where the old one was kept; None where there was none."""

    path: Path
    kept: Path | None = None


def save_fluid(
    site: Site, stem: str, name: str, density: Mapping[str, Any], origin: Origin | None = None
) -> Saved:
    """Write ``fluids/STEM.toml`` and return where it lies; on any error nothing has changed.

    Parameters
    ----------
    site : Site
        Its folder takes the file.
    stem : str
        Name of the file, without its suffix.
    name : str
        Name shown to the operator; empty: the file's.
    density : mapping of str to object
        What ``[density]`` is to hold, as a file states it ("845 kg/m3").
    origin : Origin or None
        The file this began from: its comments, its order and its other tables stay.

    Raises
    ------
    InputError
        A name that cannot be a file's or is taken, the demo site, a file that was changed by
        somebody else meanwhile.
    ProfileError
        What was to be written is no sound fluid.
    TankcalcError
        The folder does not take the file.
    """
    shown = f"{FLUIDS}/{clean(stem, 60)}{SUFFIX}"
    if site.is_demo:
        raise InputError(
            "The demo site is not written to. Begin a site of your own: tankcalc begin DIR"
        )
    _check_stem(stem, origin)
    base = None if origin is None else origin.held
    text = fluid_text(name, density, base)
    try:
        target = (site.folder / FLUIDS / f"{stem}{SUFFIX}").resolve()
        target.parent.mkdir(exist_ok=True)
        held = target.read_bytes() if target.exists() else None
        _check_taken(shown, stem, held, origin)
        return _replace(target, shown, text.encode(), held)
    except OSError as error:
        why = _WHY.get(error.errno or 0, f"{error.strerror or 'unknown reason'}.")
        raise TankcalcError(f"{shown}: not saved: {why} Nothing was changed.") from error


def fluid_text(name: str, density: Mapping[str, Any], base: bytes | None = None) -> str:
    r"""Return the text of a fluid file; of one that began from another, with what else that held.

    Raises
    ------
    InputError
        The file it began from describes layers or is no TOML.

    Examples
    --------
    >>> old = b'[density]\nmodel = "constant"\nvalue = "850 kg/m3"  # mud balance\n'
    >>> print(fluid_text("Slurry", {"model": "constant", "value": "900 kg/m3"}, old), end="")
    name = "Slurry"
    <BLANKLINE>
    [density]
    model = "constant"
    value = "900 kg/m3"  # mud balance
    """
    import tomlkit
    from tomlkit.exceptions import TOMLKitError

    try:
        document = tomlkit.parse("" if base is None else base.decode("utf-8-sig"))
        if name and "name" not in document:
            # A key can only stand before the first table.
            rest = document.as_string()
            document = tomlkit.parse(tomlkit.dumps({"name": name}) + ("\n" + rest if rest else ""))
    except (TOMLKitError, UnicodeDecodeError, RecursionError) as error:
        raise InputError("The file it began from is no TOML. Begin a new one.") from error
    if "layer" in document:
        raise InputError("The file it began from describes layers. Begin a new one.")
    if not name:
        document.pop("name", None)
    elif document["name"] != name:
        document["name"] = name
    if not isinstance(document.get("density"), dict):
        document["density"] = tomlkit.table()
    _update(document["density"], density)
    return tomlkit.dumps(document)


def _update(table: Any, wanted: Mapping[str, Any]) -> None:
    """Make a table hold what is wanted, touching nothing that is right already."""
    for key in [key for key in table if key not in wanted]:
        del table[key]
    for key, value in wanted.items():
        held = table.get(key)
        if _plain(held) == value and type(_plain(held)) is type(value):
            continue
        if isinstance(held, list) and isinstance(value, list) and held and value:
            _update_list(held, value)
        elif isinstance(held, dict) and isinstance(value, dict):
            _update(held, value)
        else:
            table[key] = _item(value)


def _update_list(held: Any, wanted: list[Any]) -> None:
    """Change the entries that differ, so that comments between the others stay."""
    for n, (old, new) in enumerate(zip(list(held), wanted, strict=False)):
        if _plain(old) != new:
            held[n] = _item(new, nested=True)
    for new in wanted[len(held) :]:
        held.append(_item(new, nested=True))
    while len(held) > len(wanted):
        del held[-1]


def _plain(value: Any) -> Any:
    return value.unwrap() if hasattr(value, "unwrap") else value


def _item(value: Any, *, nested: bool = False) -> Any:
    """Return a value as TOML; a list of lists a line each."""
    import tomlkit

    if isinstance(value, dict):
        table = tomlkit.inline_table()
        table.update({key: _item(held, nested=True) for key, held in value.items()})
        return table
    if not isinstance(value, list):
        return tomlkit.item(value)
    array = tomlkit.array()
    array.extend(_item(entry, nested=True) for entry in value)
    rows = any(isinstance(entry, (list, dict)) for entry in value)
    return array.multiline(rows and not nested)


def _check_stem(stem: str, origin: Origin | None) -> None:
    if origin is not None and stem == origin.stem:
        return
    if not _STEM.fullmatch(stem) or stem != stem.strip() or clean(stem) != stem:
        raise InputError(
            f'"{clean(stem, 40)}" cannot be the name of a file. '
            "Take up to 60 letters, digits, - and _, such as gas-oil-2."
        )


def _check_taken(shown: str, stem: str, held: bytes | None, origin: Origin | None) -> None:
    """Refuse to write over a file that this edit did not begin from."""
    own = origin is not None and stem == origin.stem
    if held is not None and not own:
        raise InputError(f"{shown} is there already. Take another name, or begin from that file.")
    if own and origin is not None and held != origin.held:
        raise InputError(
            f"{shown} was changed by somebody else meanwhile. Begin from it again, "
            "or take another name."
        )


def _replace(target: Path, shown: str, new: bytes, held: bytes | None) -> Saved:
    """Put the new bytes in the place of the held ones, which are kept beside."""
    if held == new:
        return Saved(target)
    staged = target.with_name(f".{target.stem[:60]}-{os.urandom(4).hex()}{SUFFIX}")
    kept = None
    try:
        _write(staged, new, 0o666 if held is None else target.stat().st_mode & 0o777)
        _check_sound(staged, shown)
        kept = None if held is None else _keep(target, held)
        staged.replace(target)
    except BaseException:
        for left in (staged, kept):
            if left is not None:
                with suppress(OSError):
                    left.unlink(missing_ok=True)
        raise
    _settle(target.parent)
    return Saved(target, kept)


def _check_sound(staged: Path, shown: str) -> None:
    """Refuse what a site could not read again."""
    document = Document(staged, shown)
    read_fluid(document)
    document.refuse()


def _keep(target: Path, held: bytes) -> Path:
    """Write the old bytes beside their file, under a name that nothing has yet."""
    number = 1
    while True:
        kept = target.with_name(f"{target.name}.old{'' if number == 1 else number}")
        try:
            _write(kept, held, target.stat().st_mode & 0o777)
        except FileExistsError:
            number += 1
        else:
            return kept


def _write(path: Path, data: bytes, mode: int) -> None:
    """Write a file that is not there yet and see it on disk; none is left where that fails."""
    fd = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC, mode)
    try:
        with os.fdopen(fd, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
    except BaseException:
        path.unlink(missing_ok=True)
        raise


def _settle(folder: Path) -> None:
    """Return once the new name is on disk as well."""
    fd = os.open(folder, os.O_RDONLY | os.O_DIRECTORY | os.O_CLOEXEC)
    try:
        os.fsync(fd)
    finally:
        os.close(fd)

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
from tankcalc.profiles.fluid_toml import fluid_text, new_text
from tankcalc.profiles.names import SUFFIX
from tankcalc.profiles.old_files import keep, settle, write_new
from tankcalc.profiles.site import FLUIDS, Site
from tankcalc.text import clean

_STEM = re.compile(r"\w[\w .+-]{0,59}")
DEMO = "The demo site is not written to. Begin a site of your own: tankcalc begin DIR"
_WHY = {
    errno.ENOSPC: "the disk is full.",
    errno.EDQUOT: "your share of the disk is full.",
    errno.EROFS: "it lies on a read-only disk.",
    errno.EACCES: "you may not write in this folder.",
    errno.EPERM: "you may not write in this folder.",
}


@dataclass(frozen=True, slots=True)
class Origin:
    """The fluid file that an edit began from: its name, its bytes, whether it states a vapour."""

    stem: str
    held: bytes
    has_vapour: bool = False


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
        Name shown to the operator; empty: the file's in its place, one made of a new file's name.
    density : mapping of str to object
        What ``[density]`` is to hold, as a file states it ("845 kg/m3").
    origin : Origin or None
        The file this began from. Under its own name its comments, its order and its other
        tables stay; to another name only its vapour goes along.

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
        raise InputError(DEMO)
    _check_stem(stem, origin)
    text = _text(stem, name, density, origin)
    try:
        target = (site.folder / FLUIDS / f"{stem}{SUFFIX}").resolve()
        target.parent.mkdir(exist_ok=True)
        held = target.read_bytes() if target.exists() else None
        _check_taken(shown, stem, held, origin)
        return _replace(target, shown, text.encode(), held)
    except OSError as error:
        why = _WHY.get(error.errno or 0, f"{error.strerror or 'unknown reason'}.")
        raise TankcalcError(f"{shown}: not saved: {why} Nothing was changed.") from error


def refuse_name(site: Site, stem: str, origin: Origin | None = None) -> None:
    """Refuse what cannot be the name of a new file, or is that of another fluid.

    Raises
    ------
    InputError
        Telling which of them, and what to do.
    """
    _check_stem(stem, origin)
    own = origin is not None and stem == origin.stem
    if not own and (site.folder / FLUIDS / f"{stem}{SUFFIX}").exists():
        raise InputError(_taken(stem))


def name_from(stem: str) -> str:
    """Return a shown name made of a file's.

    Examples
    --------
    >>> name_from("my-gasoline"), name_from("LPG_2")
    ('My gasoline', 'LPG 2')
    """
    words = " ".join(clean(stem, 40).replace("-", " ").replace("_", " ").split())
    return words[:1].upper() + words[1:]


def _text(stem: str, name: str, density: Mapping[str, Any], origin: Origin | None) -> str:
    if origin is not None and stem == origin.stem:
        return fluid_text(name, density, origin.held)
    held = None if origin is None else origin.held
    return new_text(name or name_from(stem), density, held)


def _taken(stem: str) -> str:
    shown = f"{FLUIDS}/{clean(stem, 60)}{SUFFIX}"
    return f"{shown} is there already. Take another name, or begin from that file."


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
        raise InputError(_taken(stem))
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
        write_new(staged, new, 0o666 if held is None else target.stat().st_mode & 0o777)
        _check_sound(staged, shown)
        kept = None if held is None else keep(target, held)
        staged.replace(target)
    except BaseException:
        with suppress(OSError):
            staged.unlink(missing_ok=True)
        if kept is not None:
            kept.undo()
        raise
    settle(target.parent)
    return Saved(target, None if kept is None else kept.path)


def _check_sound(staged: Path, shown: str) -> None:
    """Refuse what a site could not read again."""
    document = Document(staged, shown)
    read_fluid(document)
    document.refuse()

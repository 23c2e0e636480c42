"""Files put on disk for good, and what they replace kept beside them."""

from __future__ import annotations

import os
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True, slots=True)
class Keeping:
    """Where the old bytes of a file are, and which older ones made room for them."""

    path: Path
    moved: tuple[tuple[Path, Path], ...]

    def undo(self) -> None:
        """Take it back, as far as the disk lets it."""
        with suppress(OSError):
            self.path.unlink(missing_ok=True)
        _turn_back(self.moved)


def keep(target: Path, held: bytes) -> Keeping:
    """Write the old bytes beside their file as ``.old``; what was that becomes ``.old2``."""
    moved = _rotated(target)
    try:
        write_new(_old(target, 1), held, target.stat().st_mode & 0o777)
    except BaseException:
        _turn_back(moved)
        raise
    return Keeping(_old(target, 1), moved)


def _old(target: Path, number: int) -> Path:
    return target.with_name(f"{target.name}.old{'' if number == 1 else number}")


def _rotated(target: Path) -> tuple[tuple[Path, Path], ...]:
    """Give each older file the next number, and return which went where."""
    free = 1
    while _old(target, free).exists():
        free += 1
    moved: list[tuple[Path, Path]] = []
    try:
        for number in range(free - 1, 0, -1):
            step = _old(target, number), _old(target, number + 1)
            step[0].rename(step[1])
            moved.append(step)
    except BaseException:
        _turn_back(moved)
        raise
    return tuple(moved)


def _turn_back(moved: tuple[tuple[Path, Path], ...] | list[tuple[Path, Path]]) -> None:
    for before, after in reversed(moved):
        with suppress(OSError):
            after.rename(before)


def write_new(path: Path, data: bytes, mode: int) -> None:
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


def settle(folder: Path) -> None:
    """Return once the new name is on disk as well."""
    fd = os.open(folder, os.O_RDONLY | os.O_DIRECTORY | os.O_CLOEXEC)
    try:
        os.fsync(fd)
    finally:
        os.close(fd)

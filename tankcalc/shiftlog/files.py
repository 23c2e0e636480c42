"""The file a log lives in: made private and durably, and never on a network share."""

from __future__ import annotations

import os
import re
from pathlib import Path

from tankcalc.errors import StoreUnavailableError
from tankcalc.shiftlog.faults import from_os
from tankcalc.text import clean

_NETWORK = re.compile(
    r"nfs\d*|cifs|smb\w*|fuse\..*|9p|gpfs|lustre|ceph|afs|glusterfs|beegfs|pvfs2|ocfs2|gfs2"
)
_LOCAL = frozenset({"fuse.exfat", "fuse.ext2", "fuse.fuse-overlayfs", "fuse.ntfs-3g"})
"""Of those that a program serves: known to keep everything on a disk of this machine."""

_OCTAL = re.compile(r"\\([0-7]{3})")


def file_system(path: Path, mounts: Path = Path("/proc/mounts")) -> str:
    """Return the kind of file system a path lies on; empty where the system does not say."""
    try:
        table = mounts.read_text(encoding="utf-8", errors="surrogateescape")
    except FileNotFoundError:
        return ""
    real = Path(os.path.realpath(path))
    above = {str(real), *(str(parent) for parent in real.parents)}
    best, kind = "", ""
    for line in table.splitlines():
        words = line.split(" ")
        point = _OCTAL.sub(lambda m: chr(int(m[1], 8)), words[1]) if len(words) > 2 else ""
        # A later line mounts over an earlier one at the same place.
        if point in above and len(point) >= len(best):
            best, kind = point, words[2]
    return kind


def refuse_network(path: Path, mounts: Path = Path("/proc/mounts")) -> None:
    """Raise StoreUnavailableError where the path lies on a network file system."""
    kind = file_system(path, mounts)
    if kind not in _LOCAL and _NETWORK.fullmatch(kind):
        raise StoreUnavailableError(
            f"the log {clean(str(path))} lies on a network file system ({kind}), whose locks"
            " cannot be relied on. Keep the log on a disk of this machine, or, for consoles on"
            " several machines, in PostgreSQL (postgresql://…)."
        )


def make_file(path: Path) -> None:
    """Make an empty file that only its owner can read, and its folder, and see both on disk.

    What exists is left as it is, with the permissions it has.
    """
    try:
        new_folder = not path.parent.exists()
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        os.close(os.open(path, os.O_RDWR | os.O_CREAT | os.O_EXCL | os.O_CLOEXEC, 0o600))
        settle(path.parent)
        if new_folder:
            settle(path.parent.parent)
    except FileExistsError:
        return
    except OSError as error:
        raise from_os(error, clean(str(path))) from error


def settle(folder: Path) -> None:
    """See on disk what files a folder holds."""
    handle = os.open(folder, os.O_RDONLY | os.O_CLOEXEC)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)

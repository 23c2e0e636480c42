"""A program in a real pseudo-terminal, and what stands on its screen."""

from __future__ import annotations

import fcntl
import os
import pty
import select
import struct
import subprocess
import sys
import termios
import time
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path
from types import TracebackType

import pyte

PATIENCE_S = 20.0
"""A busy machine is slow, not wrong."""


class Terminal:
    """A terminal with a program in it; leaving the context ends the program."""

    def __init__(
        self, words: Sequence[str], env: Mapping[str, str], rows: int = 24, columns: int = 80
    ) -> None:
        self.raw = b""
        self.screen = pyte.Screen(columns, rows)
        self._stream = pyte.ByteStream(self.screen)
        self.fd, self._slave = pty.openpty()
        self._set_size(rows, columns)
        # A session leader without a terminal takes the first one it opens for its own, and so
        # is hung up with it.
        shell = ("sh", "-c", 'exec "$@" <>"$0" >&0 2>&1', os.ttyname(self._slave))
        self.started = time.perf_counter()
        self.process = subprocess.Popen(
            [*shell, *words], env=dict(env), stdin=subprocess.DEVNULL, start_new_session=True
        )

    def __enter__(self) -> Terminal:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.process.kill()
        self.process.wait()
        os.close(self._slave)
        if self.fd >= 0:
            os.close(self.fd)

    @property
    def text(self) -> str:
        """The screen as text, a line a row."""
        return "\n".join(self.row(number) for number in range(1, self.screen.lines + 1))

    def row(self, number: int) -> str:
        """One row, counted from 1."""
        # `screen.display` measures every character anew, which takes longer than all the rest.
        line = self.screen.buffer[number - 1]
        return "".join(line[column].data for column in range(self.screen.columns))

    def send(self, data: bytes | str) -> None:
        """Type."""
        os.write(self.fd, data.encode() if isinstance(data, str) else data)

    def wait(self, wanted: str | Callable[[str], bool], patience_s: float = PATIENCE_S) -> float:
        """Read until a text is on the screen; return the seconds since the start."""
        is_there = (lambda text: wanted in text) if isinstance(wanted, str) else wanted
        end = time.perf_counter() + patience_s
        while not is_there(self.text):
            left = end - time.perf_counter()
            assert left > 0, f"not on the screen: {wanted!r}\n{self.text}"
            self.read(min(left, 0.5))
        return time.perf_counter() - self.started

    def read(self, seconds: float) -> bytes:
        """Read what comes within so many seconds, at most one piece, onto the screen."""
        if not select.select([self.fd], [], [], seconds)[0]:
            return b""
        try:
            data = os.read(self.fd, 65536)
        except OSError:  # the program has left its terminal
            return b""
        self.raw += data
        self._stream.feed(data)
        return data

    def quiet(self, seconds: float) -> bytes:
        """Read for so many seconds, and return all that came."""
        end, came = time.perf_counter() + seconds, b""
        while (left := end - time.perf_counter()) > 0:
            came += self.read(left)
        return came

    def resize(self, rows: int, columns: int) -> None:
        """Give the terminal another size."""
        self.screen.resize(rows, columns)
        self._set_size(rows, columns)

    def hang_up(self) -> int:
        """Close the line, as a dropped link does, and return the program's exit status."""
        os.close(self.fd)
        self.fd = -1
        return self.process.wait(PATIENCE_S)

    def end(self) -> int:
        """Wait for the program to end by itself, reading what it says; return its exit status."""
        end = time.perf_counter() + PATIENCE_S
        while self.process.poll() is None:
            assert time.perf_counter() < end, f"still running\n{self.text}"
            self.read(0.1)
        while self.read(0.05):
            pass
        return self.process.returncode

    def _set_size(self, rows: int, columns: int) -> None:
        fcntl.ioctl(self._slave, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))


def console(home: Path, site: Path, *options: str, **env: str) -> Terminal:
    """Open the console on a site, for a user who has nothing yet."""
    kept = {k: v for k, v in os.environ.items() if not k.startswith(("TANKCALC", "XDG_", "LC_"))}
    for name in ("COLORTERM", "NO_COLOR", "LANG"):
        kept.pop(name, None)
    kept |= {"HOME": str(home), "TERM": "xterm", "LC_ALL": "C.UTF-8"} | env
    words = [sys.executable, "-m", "tankcalc", "console", "--profiles", str(site), *options]
    return Terminal(words, kept)

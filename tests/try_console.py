"""Runs a shell command that opens the console, uses it by keyboard, and leaves it again.

``python tests/try_console.py COMMAND``; the screen is printed, and anything amiss is an error.
"""

from __future__ import annotations

import os
import sys

from pty_helper import Terminal

SETTING_UP_S = 600.0
"""The command may have everything to install first."""


def main(command: str) -> None:
    """Open the console on the demo site, read one pressure, quit."""
    env = dict(os.environ) | {"TERM": "xterm"}
    with Terminal(["bash", "-euc", command], env) as terminal:
        terminal.wait("READINGS", SETTING_UP_S)
        terminal.wait("DEMO SITE")
        terminal.send("20 kPa")
        terminal.wait("mean density")
        print(terminal.text)
        terminal.send(b"\x11")
        terminal.wait("LEAVE THE CONSOLE?")
        terminal.send("\r")
        status = terminal.end()
    assert status == 0, f"the console left with status {status}"


if __name__ == "__main__":
    main(sys.argv[1])

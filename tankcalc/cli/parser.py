"""An argument parser with the options every command shares and messages safe to show."""

from __future__ import annotations

import argparse
import re
import sys
from collections.abc import Sequence
from typing import Any, NoReturn

from tankcalc.text import clean

SYSTEMS = ("metric", "us", "imperial")
SITE_OPTIONS = ("--profiles", "--log", "--units")
"""Options with a value that may stand before the command."""

_NEGATIVE = re.compile(r"-\s*[0-9.,]")


class CommandParser(argparse.ArgumentParser):
    """A parser that takes the site's options before or after the command."""

    def __init__(self, **kwargs: Any) -> None:
        super().__init__(allow_abbrev=False, **kwargs)
        shared = self.add_argument_group("site")
        hidden = argparse.SUPPRESS
        shared.add_argument(
            "--profiles", metavar="DIR", default=hidden, help="the site folder with its profiles"
        )
        shared.add_argument("--log", metavar="FILE", default=hidden, help="where the log is kept")
        shared.add_argument(
            "--units", choices=SYSTEMS, default=hidden, help="units to show (default: the site's)"
        )

    def error(self, message: str) -> NoReturn:
        """Say what is wrong, made safe to show, and leave with exit code 2."""
        print(f"{self.prog}: {clean(message, 400)}", file=sys.stderr)
        print(f'Try "{self.prog} --help".', file=sys.stderr)
        self.exit(2)


def joined_negatives(argv: Sequence[str]) -> list[str]:
    """Return the arguments with a negative value joined to its option.

    Without this "--dp -94kPa" would be taken for two options.
    """
    joined: list[str] = []
    for word in argv:
        takes_value = joined and joined[-1].startswith("--") and "=" not in joined[-1]
        if takes_value and len(joined[-1]) > 2 and _NEGATIVE.match(word):
            joined[-1] += f"={word}"
        else:
            joined.append(word)
    return joined

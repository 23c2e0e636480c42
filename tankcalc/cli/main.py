"""Finds the command, runs it, and turns every error into a message and an exit code."""

from __future__ import annotations

import argparse
import gc
import importlib
import os
import sys
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tankcalc.cli.parser import SITE_OPTIONS, CommandParser, joined_negatives
from tankcalc.errors import TankcalcError
from tankcalc.text import clean

if TYPE_CHECKING:
    from types import ModuleType

COMMANDS = {
    "console": "open the console (the default)",
    "convert": "readings of one tank to level, volume and mass",
    "strap": "print a capacity table",
    "span": "what each transmitter should read, empty to full",
    "plan": "room, time to a limit, when to call stop, what a receipt does",
    "vet": "check profile files: every problem, with file, line and key",
    "begin": "write a commented starter site",
    "shiftlog": "add to, list and verify the log",
    "balance": "opening, movements, closing, gain or loss",
    "handover": "the report from one shift to the next",
}
"""Every command with what it does, in the order of the help."""

MANY_VALUES = ("paths",)
"""Arguments that may hold no value at all."""

GARBAGE_THRESHOLD = 50_000
"""Objects made before the collector first looks: start-up makes no cycles worth a search."""


def main(argv: Sequence[str]) -> int:
    """Run one command and return its exit code.

    0 done; 2 bad input; 3 the readings contradict the tank; 4 a log that does not verify;
    1 anything else.
    """
    gc.set_threshold(GARBAGE_THRESHOLD)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="backslashreplace")
    try:
        words = _with_command(joined_negatives(argv))
        args = _parsed(words)
        code = _module(args.command).run(args)
        sys.stdout.flush()
    except TankcalcError as error:
        for line in str(error).splitlines():
            print(f"tankcalc: {clean(line, 1000)}", file=sys.stderr)
        return error.exit_code
    except BrokenPipeError:
        # The reader of our output has gone; what is left in the buffer has nowhere to go.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 1
    except OSError as error:
        why = error.strerror or str(error)
        where = f"{error.filename}: " if error.filename else "the output could not be written: "
        print(f"tankcalc: {clean(f'{where}{why}', 1000)}.", file=sys.stderr)
        return 1
    except KeyboardInterrupt:
        return 130
    except Exception as error:  # a user never sees a traceback
        if os.environ.get("TANKCALC_TRACEBACK"):
            raise
        what = clean(f"{type(error).__name__}: {error}", 500)
        print(
            f"tankcalc: a defect in this program stopped it ({what}). Nothing was saved by this "
            "command. Set TANKCALC_TRACEBACK=1 and repeat it to see where.",
            file=sys.stderr,
        )
        return 1
    else:
        return int(code)


def _parsed(words: Sequence[str]) -> argparse.Namespace:
    """Return the parsed arguments."""
    parser = _parser(words)
    args = parser.parse_args(words)
    for name, value in vars(args).items():
        # argparse makes an empty list of the value "--".
        if value == [] and name not in MANY_VALUES:
            parser.error(f"argument --{name.replace('_', '-')}: expected one argument")
    return args


def _parser(argv: Sequence[str]) -> argparse.ArgumentParser:
    """Return the parser; only the module of the command that is called gets imported."""
    parser = CommandParser(
        prog="tankcalc",
        description="What a storage tank holds, from the pressure its transmitters read.",
        epilog="Exit codes: 0 done; 2 bad input; 3 the readings contradict the tank; 4 a log "
        "that does not verify; 1 anything else.",
    )
    parser.set_defaults(profiles=None, log=None, units=None)
    parser.add_argument("--version", action=_Version, nargs=0, help="print the version")
    subparsers = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    called = _command_in(argv)
    if called in COMMANDS:
        _module(called).add_parser(subparsers)
    else:
        for name, summary in COMMANDS.items():
            subparsers.add_parser(name, help=summary)
    return parser


def _command_in(argv: Sequence[str]) -> str | None:
    """Return the command among the arguments: the first word that is no option nor its value."""
    skip = False
    for word in argv:
        if skip or word.startswith("-"):
            skip = not skip and word in SITE_OPTIONS
        else:
            return word
    return None


def _with_command(argv: Sequence[str]) -> list[str]:
    """Return the arguments with the default command where none is named."""
    if _command_in(argv) is not None or {"-h", "--help", "--version"} & set(argv):
        return list(argv)
    return ["console", *argv]


def _module(name: str) -> ModuleType:
    return importlib.import_module(f"tankcalc.cli.{name}")


class _Version(argparse.Action):
    """Print the version and stop."""

    def __call__(self, parser: argparse.ArgumentParser, *_: object) -> None:
        from tankcalc import __version__

        print(f"tankcalc {__version__}")
        parser.exit()

"""``tankcalc console``: the screen to type readings on, see the answer, and log it."""

from __future__ import annotations

import argparse
import gc
import os
import sys
from typing import TYPE_CHECKING

from tankcalc.errors import InputError

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "console",
        help="open the console (the default)",
        description="One screen to type readings on, see level, volume and mass, and log them. "
        "F1 in it tells every key.",
    )
    parser.add_argument(
        "--ascii", action="store_true", help="draw with ASCII only (default: as the locale says)"
    )
    parser.add_argument(
        "--mouse", action="store_true", help="take the mouse (the terminal then cannot select)"
    )


def run(args: argparse.Namespace) -> int:
    """Show the console until it is left; 128 and the signal's number when the link was lost."""
    from tankcalc.tui import terminal

    why = terminal.refusal(os.environ, (sys.stdin, sys.stdout, sys.stderr))
    if why is not None:
        raise InputError(why)
    terminal.harden(os.environ)
    # Nothing made while starting is garbage; the app turns the collector on again when it is up.
    gc.disable()
    from tankcalc.profiles import find_site
    from tankcalc.tui.app import ConsoleApp, Options
    from tankcalc.tui.draft import state_folder

    folder, is_demo = find_site(args.profiles)
    terminal.patch_input()
    options = Options(
        folder=folder,
        state=state_folder(os.environ),
        is_demo=is_demo,
        log=args.log,
        units=args.units,
        ascii=args.ascii or not terminal.speaks_utf8(os.environ, sys.stderr.encoding),
    )
    app = ConsoleApp(options)
    app.run(mouse=args.mouse)
    status = app.return_code or 0
    if status > 128:
        terminal.let_go()
    return status

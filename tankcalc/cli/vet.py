"""``tankcalc vet``: every problem of every profile file."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING

from tankcalc.errors import InputError

if TYPE_CHECKING:
    from tankcalc.cli.parser import CommandParser


def add_parser(subparsers: argparse._SubParsersAction[CommandParser]) -> None:
    """Declare the command."""
    parser = subparsers.add_parser(
        "vet",
        help="check profile files: every problem, with file, line and key",
        description="Checks profile files and prints every problem: file, line, key, what was "
        "found and what to do. Exit code 2 where there is any.",
    )
    parser.add_argument(
        "paths", metavar="PATH", nargs="*", help="files or folders (default: the whole site)"
    )


def run(args: argparse.Namespace) -> int:
    """Print the problems; exit code 2 when there are any."""
    from tankcalc.profiles import files_to_vet, vet

    if not all(args.paths):
        raise InputError("one of the paths is empty. Name a file or a folder.")
    paths = [Path(path) for path in args.paths]
    folder = _site_folder(args.profiles, paths)
    files = files_to_vet(paths, folder)
    if not files:
        raise InputError("there are no profile files to check in what was named.")
    problems = vet(files, folder)
    for problem in problems:
        print(problem)
    print(f"{_counted(len(files), 'file')}, {_counted(len(problems), 'problem')}", file=sys.stderr)
    return 2 if problems else 0


def _site_folder(option: str | None, paths: list[Path]) -> Path:
    """Return the site that files outside of any site are held against."""
    from tankcalc.profiles import find_site

    if option is None and len(paths) == 1 and os.path.isdir(paths[0]):
        return paths[0]
    return find_site(option)[0]


def _counted(count: int, noun: str) -> str:
    return f"{count or 'no'} {noun}{'' if count == 1 else 's'}"

"""``python -m tankcalc`` and the ``tankcalc`` command."""

from __future__ import annotations

import sys


def run() -> None:
    """Run the command line and leave with its exit code."""
    from tankcalc.cli.main import main

    sys.exit(main(sys.argv[1:]))


if __name__ == "__main__":
    run()

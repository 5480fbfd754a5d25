"""Entry point of the `specgate` command and of `python -m specgate`."""

from __future__ import annotations

import sys


def run() -> None:
    """Run the command line and leave with its exit status."""
    from specgate.cli.main import main

    sys.exit(main(sys.argv[1:]))


if __name__ == "__main__":
    run()

"""Baselines on the command line: where they are read, and the options that name them."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from specgate.terms.errors import UnusableProblem

if TYPE_CHECKING:
    from specgate.cli.judge import Since
    from specgate.review.types.baseline import Frozen


def add_options(parser: argparse.ArgumentParser) -> None:
    """Add `--baseline` and `--only-new`."""
    parser.add_argument(
        "--baseline",
        metavar="FILE",
        help="a baseline, as `freeze` writes it: a link whose parent was changed since, and the child not, is stale",
    )
    parser.add_argument(
        "--only-new",
        action="store_true",
        help="with --baseline: the gate holds on what got worse since, on nothing else",
    )


def chosen(options: argparse.Namespace) -> Since | None:
    """Return the baseline that the options name, and how it is used. Raises UnusableProblem where it is none."""
    from specgate.cli.judge import Since

    if options.baseline is None:
        if options.only_new:
            raise UnusableProblem("--only-new goes with --baseline FILE: new since when?")
        return None
    return Since(read(options.baseline), options.only_new)


def read(name: str) -> Frozen:
    """Return the baseline in a file. Raises UnusableProblem where it cannot be read as one."""
    from specgate.exchange import baseline

    try:
        return baseline.read(Path(name).read_text(encoding="utf-8"))
    except OSError as error:
        raise UnusableProblem(f"the baseline {name} cannot be read: {error.strerror or error}") from None
    except (ValueError, RecursionError) as problem:
        raise UnusableProblem(f"{name}: {problem}") from None

"""`specgate new`: a small project that passes, to start from."""

from __future__ import annotations

import argparse
import sys
from importlib.resources import files
from pathlib import Path

from specgate.cli import status


def configure(parser: argparse.ArgumentParser) -> None:
    """Add the arguments of `new`."""
    parser.add_argument("folder", metavar="FOLDER", help="a folder that does not exist yet, or is empty")


def run(options: argparse.Namespace) -> int:
    """Make the folder with specgate.yaml and the schema for editors beside it."""
    from specgate.cli import files as output
    from specgate.cli import schema
    from specgate.terms.errors import EnvironmentProblem

    folder = Path(options.folder)
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        print(f"specgate: {folder} exists and is not an empty folder; nothing was written", file=sys.stderr)
        return status.UNUSABLE
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise EnvironmentProblem(f"cannot make {folder}: {error.strerror or error}") from error
    starter = (files("specgate.templates") / "starter" / "specgate.yaml").read_bytes()
    output.write(str(folder / "specgate.schema.json"), schema.text("project").encode())
    output.write(str(folder / "specgate.yaml"), starter)
    print(f"{folder / 'specgate.yaml'}: a small project that passes. Next:\n  specgate check {folder}")
    return status.PASSES

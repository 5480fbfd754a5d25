"""Writing a result: whole or not at all."""

from __future__ import annotations

import os
import sys
import tempfile
from pathlib import Path

from specgate.terms.errors import EnvironmentProblem


def write(target: str, content: bytes) -> None:
    """Write `content` to the file `target` (`-`: standard output); a reader never sees half of it.

    Raises EnvironmentProblem if it cannot be written; an existing file is then left as it was.
    """
    if target == "-":
        sys.stdout.flush()
        sys.stdout.buffer.write(content)
        return
    path = Path(target)
    try:
        if path.exists() and not path.is_file():  # a device such as /dev/null cannot be replaced
            path.write_bytes(content)
            return
        _replace(path, content)
    except OSError as error:
        raise EnvironmentProblem(f"cannot write {target}: {error.strerror or error}") from error


def _replace(path: Path, content: bytes) -> None:
    handle, name = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
        mask = os.umask(0)
        os.umask(mask)
        os.chmod(name, 0o666 & ~mask)
        os.replace(name, path)
    except BaseException:
        os.unlink(name)
        raise

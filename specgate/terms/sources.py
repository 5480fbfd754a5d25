"""Where the files of a project are read from."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Mapping
from fnmatch import fnmatchcase
from itertools import takewhile
from pathlib import Path, PurePosixPath
from typing import Protocol

from specgate.terms.records import record

LARGEST_FILE = 16 * 1024 * 1024
"""Bytes."""
MOST_FILES = 10_000
"""Most files and folders that a pattern is compared with."""
LONGEST_PATTERN = 300
_WILD = frozenset("*?[")


class SourceError(Exception):
    """A file that cannot be read, or may not be; the message says which and why."""


class Source(Protocol):
    """A tree of files: a folder, a revision, the attachments of a report. Paths are relative, with `/`."""

    def read(self, path: str) -> bytes:
        """Return the bytes of a file. Raises SourceError."""

    def glob(self, pattern: str) -> list[str]:
        """Return the files that match, sorted; `*` stays inside a folder, `**` is any depth. Raises SourceError."""


@record
class FolderSource:
    """A folder on disk. Nothing outside it is read, by whatever path, pattern or symbolic link."""

    root: Path

    def read(self, path: str) -> bytes:
        """Return the bytes of a regular file inside the folder. Raises SourceError."""
        target = self.root.joinpath(*_parts(path))
        try:
            resolved, home = target.resolve(strict=True), self.root.resolve(strict=True)
            if not resolved.is_relative_to(home):
                raise SourceError(f"`{path}` leads out of the project folder")
            if not resolved.is_file():
                raise SourceError(f"`{path}` is not a file")
            if resolved.stat().st_size > LARGEST_FILE:
                raise SourceError(f"`{path}` is larger than {LARGEST_FILE // 1024**2} MB")
            return resolved.read_bytes()
        except FileNotFoundError:
            raise SourceError(f"there is no file `{path}`") from None
        except (OSError, RuntimeError) as problem:
            reason = getattr(problem, "strerror", None) or "the path cannot be followed"
            raise SourceError(f"`{path}` cannot be read: {reason}") from None

    def glob(self, pattern: str) -> list[str]:
        """Return the files inside the folder that match, sorted. Raises SourceError."""
        wanted = _parts(pattern)
        fixed = tuple(takewhile(lambda part: not set(part) & _WILD, wanted))
        if fixed == wanted:
            return ["/".join(wanted)] if self.root.joinpath(*wanted).is_file() else []
        if not self._inside(fixed):
            raise SourceError(f"`{pattern}` leads out of the project folder")
        return sorted(path for path in self._files(fixed) if _matches(tuple(path.split("/")), wanted))

    def _inside(self, below: tuple[str, ...]) -> bool:
        """Whether a folder is inside, wherever a link on the way to it leads."""
        return self.root.joinpath(*below).resolve().is_relative_to(self.root.resolve())

    def _files(self, below: tuple[str, ...]) -> Iterator[str]:
        """Give all files below a folder; hidden ones and links to folders are left out."""
        seen = 0
        for folder, folders, files in os.walk(self.root.joinpath(*below)):
            folders[:] = sorted(name for name in folders if not name.startswith("."))
            seen += len(folders) + len(files)
            if seen > MOST_FILES:
                raise SourceError(
                    f"the project folder holds more than {MOST_FILES} files: a pattern is not tried on them"
                )
            inside = PurePosixPath(Path(folder).relative_to(self.root).as_posix())
            yield from (str(inside / name) for name in sorted(files) if not name.startswith("."))


@record
class HeldSource:
    """Files that are held in memory, by their paths: attachments of a report, the files of a revision."""

    files: Mapping[str, bytes]

    def read(self, path: str) -> bytes:
        """Return the bytes of a file. Raises SourceError."""
        wanted = "/".join(_parts(path))
        if wanted not in self.files:
            raise SourceError(f"there is no file `{path}`")
        return self.files[wanted]

    def glob(self, pattern: str) -> list[str]:
        """Return the files that match, sorted; hidden ones only where they are named. Raises SourceError."""
        return matching(self.files, pattern)


def matching(paths: Iterable[str], pattern: str) -> list[str]:
    """Return the paths that a pattern matches, sorted, as a folder with these files would. Raises SourceError."""
    wanted = _parts(pattern)
    if not any(set(part) & _WILD for part in wanted):
        return ["/".join(wanted)] if "/".join(wanted) in set(paths) else []
    parts = ((path, tuple(path.split("/"))) for path in paths)
    return sorted(path for path, names in parts if not _hidden(names, wanted) and _matches(names, wanted))


def _hidden(names: tuple[str, ...], pattern: tuple[str, ...]) -> bool:
    """Tell whether a file is hidden, or lies in a hidden folder, below the part of the pattern without wild cards."""
    fixed = len(tuple(takewhile(lambda part: not set(part) & _WILD, pattern)))
    return any(name.startswith(".") for name in names[fixed:])


def _parts(path: str) -> tuple[str, ...]:
    """Split a relative path, `.` left out. Raises SourceError if it can lead out of the folder."""
    if not path or "\0" in path or len(path) > LONGEST_PATTERN:
        raise SourceError("a path is empty, too long or has a NUL character in it")
    if "\\" in path:
        raise SourceError(f"`{path}`: folders are separated by `/`")
    parts = tuple(part for part in path.split("/") if part != ".")
    if path.startswith("/") or ".." in parts:
        raise SourceError(f"`{path}` leads out of the project folder: paths are relative to a file and stay inside it")
    if not all(parts):
        raise SourceError(f"`{path}` is not a path of a file")
    return parts


def _matches(path: tuple[str, ...], pattern: tuple[str, ...]) -> bool:
    """Whether the names match the pattern, `**` standing for any number of folders."""
    reachable = {0}
    for wanted in pattern:
        if wanted == "**":
            reachable = set(range(min(reachable), len(path) + 1)) if reachable else set()
        else:
            reachable = {at + 1 for at in reachable if at < len(path) and fnmatchcase(path[at], wanted)}
    return len(path) in reachable

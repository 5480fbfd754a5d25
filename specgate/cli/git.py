"""The files of a project as they stand in a git revision, read from the repository: nothing is checked out.

Only plumbing that reads objects is called (`rev-parse`, `ls-tree`, `cat-file`): it runs no hooks and filters, takes no
lock, and touches neither the work tree nor the index.
"""

from __future__ import annotations

import os
import posixpath
import subprocess
from collections.abc import Mapping
from pathlib import Path
from typing import NamedTuple

from specgate.terms.errors import EnvironmentProblem, UnusableProblem
from specgate.terms.records import record
from specgate.terms.sources import LARGEST_FILE, SourceError, matching

_ENVIRONMENT = {"GIT_OPTIONAL_LOCKS": "0", "GIT_NO_LAZY_FETCH": "1", "GIT_TERMINAL_PROMPT": "0", "LC_ALL": "C"}
_LINK, _MODULE = "120000", "160000"


class Entry(NamedTuple):
    """A file of a revision: its mode, the name of its object, its size in bytes."""

    mode: str
    object: str
    size: int


@record
class GitSource:
    """The files below a folder of a revision, by their paths below that folder."""

    repository: Path
    entries: Mapping[str, Entry]

    def read(self, path: str) -> bytes:
        """Return the bytes of a file as it was committed. Raises SourceError."""
        entry = self.entries.get(posixpath.normpath(path))
        if entry is None:
            raise SourceError(f"there is no file `{path}` in that revision")
        if entry.mode in (_LINK, _MODULE):
            what = "a symbolic link" if entry.mode == _LINK else "another repository"
            raise SourceError(f"`{path}` is {what} in that revision: only files are read from git")
        if entry.size > LARGEST_FILE:
            raise SourceError(f"`{path}` is larger than {LARGEST_FILE // 1024**2} MB")
        return _git(self.repository, "cat-file", "blob", entry.object)

    def glob(self, pattern: str) -> list[str]:
        """Return the files that match, sorted. Raises SourceError."""
        return matching(self.entries, pattern)


@record
class Revision:
    """What `REV:path` names: the files, and the one that the project begins with (None: that of a folder)."""

    source: GitSource
    entry: str | None


def revision(text: str, here: Path) -> Revision:
    """Read what `REV:path` names; the path counts from the root of the repository, with `./` from the folder `here`.

    Raises UnusableProblem for a revision or a path that is unknown and where there is no repository,
    EnvironmentProblem without git.
    """
    name, _, path = text.partition(":")
    root = _root(here, text)
    commit = _commit(root, name)
    inside = _inside(path, here, root)
    whole = _listing(root, commit)
    if inside in whole:
        return Revision(_below(root, whole, posixpath.dirname(inside)), posixpath.basename(inside))
    source = _below(root, whole, inside)
    if not source.entries:
        raise UnusableProblem(
            f"{text}: the revision {name} has no `{inside}` (paths count from {root.name}/, or with ./)"
        )
    return Revision(source, None)


def _root(here: Path, text: str) -> Path:
    try:
        return Path(os.fsdecode(_git(here, "rev-parse", "--show-toplevel")).rstrip("\n"))
    except SourceError as problem:
        raise UnusableProblem(f"{text}: there is no such file, and no git repository here ({problem})") from None


def _commit(root: Path, name: str) -> str:
    try:
        found = _git(root, "rev-parse", "--verify", "--quiet", "--end-of-options", f"{name or 'HEAD'}^{{commit}}")
    except SourceError:
        raise UnusableProblem(f"`{name}` is no revision of the git repository {root.name}") from None
    return found.decode().strip()


def _inside(path: str, here: Path, root: Path) -> str:
    """Return a path from the root of the repository, empty for the root itself."""
    if path.startswith(("./", "../")) or path in (".", ".."):
        below = os.path.relpath(here.resolve(), root.resolve()).replace(os.sep, "/")
        path = posixpath.join(below, path)
    inside = posixpath.normpath(path or ".")
    if inside.startswith(("../", "/")) or inside == "..":
        raise UnusableProblem(f"`{path}` leads out of the git repository {root.name}")
    return "" if inside == "." else inside


def _listing(root: Path, commit: str) -> dict[str, Entry]:
    lines = _git(root, "ls-tree", "-r", "-z", "-l", "--full-tree", commit).split(b"\0")
    found: dict[str, Entry] = {}
    for line in filter(None, lines):
        about, _, name = line.partition(b"\t")
        mode, _, named, size = about.decode().split()
        found[os.fsdecode(name)] = Entry(mode, named, 0 if size == "-" else int(size))
    return found


def _below(root: Path, whole: Mapping[str, Entry], folder: str) -> GitSource:
    start = f"{folder}/" if folder else ""
    return GitSource(root, {path[len(start) :]: entry for path, entry in whole.items() if path.startswith(start)})


def _git(folder: Path, *arguments: str) -> bytes:
    """Run git in a folder. Raises SourceError where it refuses, EnvironmentProblem where there is none."""
    try:
        done = subprocess.run(
            ("git", "--no-pager", *arguments),
            cwd=folder,
            env=os.environ | _ENVIRONMENT,
            stdin=subprocess.DEVNULL,
            capture_output=True,
            check=False,
        )
    except FileNotFoundError:
        raise EnvironmentProblem("git is not installed, and REV:path is read by it") from None
    if done.returncode:
        said = done.stderr.decode(errors="replace").strip().splitlines()
        raise SourceError(said[0].removeprefix("fatal: ") if said else "git refuses")
    return done.stdout

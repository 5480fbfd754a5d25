"""All files of a project: the first one and what it includes, each read once."""

from __future__ import annotations

import hashlib
import posixpath
from dataclasses import dataclass, field

from specgate.intake.collect import Collector
from specgate.intake.nodes import Items, Node, Origin, Table, Text
from specgate.intake.reader import Allowance, read
from specgate.project.types import InputFile
from specgate.terms.places import Place
from specgate.terms.records import record
from specgate.terms.sources import Source, SourceError

MOST_BYTES = 32 * 1024 * 1024
"""Bytes of all files of a project together."""
MOST_FILES = 2000
"""Files of a project."""
DEEPEST = 20
"""Files that include one another in a chain."""
_WILD = frozenset("*?[")


@record
class File:
    """One file of the project, read."""

    path: str
    root: Node


@dataclass
class Gathered:
    """The files in the order in which they were included, and their digests by path."""

    files: list[File] = field(default_factory=list)
    digests: dict[str, str] = field(default_factory=dict)
    complete: bool = True
    """Whether every file that is named was found and read."""

    @property
    def inputs(self) -> tuple[InputFile, ...]:
        """Return the files that were read, sorted by path."""
        return tuple(InputFile(path, digest) for path, digest in sorted(self.digests.items()))


def gather(source: Source, entry: str, collector: Collector) -> Gathered:
    """Read the file `entry` and everything that is included from it."""
    gathering = _Gathering(source, collector)
    gathering.take(entry, None, ())
    return gathering.result


class _Gathering:
    def __init__(self, source: Source, collector: Collector) -> None:
        self.source, self.collector = source, collector
        self.result = Gathered()
        self.allowance = Allowance()
        self.bytes = 0

    def take(self, path: str, via: Place | None, above: tuple[str, ...]) -> None:
        """Read one file, then what it includes; `above` are the files that led here."""
        place = via or Place(path, 1, 1)
        if path in above:
            self._error(f"`{path}` includes itself, by way of {' > '.join((*above, path))}", place)
        elif len(above) >= DEEPEST:
            self._error(f"more than {DEEPEST} files include one another in a chain", place)
        elif path not in self.result.digests:
            self._read(path, via, above)

    def _read(self, path: str, via: Place | None, above: tuple[str, ...]) -> None:
        place = via or Place(path, 1, 1)
        data = self._bytes(path, place)
        if data is None:
            return
        self.result.digests[path] = hashlib.sha256(data).hexdigest()
        root = read(data, Origin(path, via), self.allowance, self.collector)
        self.result.files.append(File(path, root))
        for pattern in _patterns(root):
            for found in self._matches(path, pattern):
                self.take(found, pattern.spot.place, (*above, path))

    def _bytes(self, path: str, place: Place) -> bytes | None:
        if len(self.result.files) >= MOST_FILES:
            self._error(f"the project has more than {MOST_FILES} files", place)
            return None
        try:
            data = self.source.read(path)
        except SourceError as error:
            self._error(str(error), place)
            return None
        self.bytes += len(data)
        if self.bytes > MOST_BYTES:
            self._error(f"the project is larger than {MOST_BYTES // 1024**2} MB", place)
            return None
        return data

    def _matches(self, path: str, pattern: Text) -> list[str]:
        """Return the files that a pattern in the file `path` names."""
        place = pattern.spot.place
        if pattern.value.startswith("/") or "\\" in pattern.value:
            self._error("an included file is named relative to this one, with `/` between folders", place)
            return []
        joined = posixpath.normpath(posixpath.join(posixpath.dirname(path), pattern.value))
        if joined.split("/")[0] == "..":
            self._error(f"`{pattern.value[:80]}` leads out of the project folder", place)
            return []
        wild = bool(_WILD & set(pattern.value))
        try:
            found = self.source.glob(joined)
        except SourceError as error:
            self._error(str(error), place)
            return []
        if not found:
            words = "no file matches" if wild else "there is no file"
            self._error(f"{words} `{pattern.value[:80]}` (looked for `{joined[:80]}` in the project folder)", place)
        # a pattern that also matches the file it stands in means the others
        return [name for name in found if not (wild and name == path)]

    def _error(self, message: str, place: Place) -> None:
        self.result.complete = False
        self.collector.error("yaml-invalid", message, place)


def _patterns(root: Node) -> list[Text]:
    """Return the paths and patterns under `include`; their shape is the schema's business."""
    node = root.get("include") if isinstance(root, Table) else None
    if isinstance(node, Text):
        return [node]
    return [item for item in node.nodes if isinstance(item, Text)] if isinstance(node, Items) else []

"""Where something was written: file, line and column."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(frozen=True, order=True)
class Place:
    """A position in an input file, counted from 1; `path` is relative to the project folder.

    `via` is the place that brought this one in: the `include` that named the file, the use of a template.
    `template` is the name of the template that the text at this place belongs to.
    """

    path: str
    line: int
    column: int
    via: Place | None = None
    template: str | None = field(default=None, compare=False)

    def __str__(self) -> str:
        return f"{self.path}:{self.line}:{self.column}"

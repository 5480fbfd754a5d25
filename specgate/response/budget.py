"""Work limits: every search ends, and says so when it ends without an answer."""

from __future__ import annotations


class OutOfWork(Exception):
    """A search reached its work limit; `reason` is the text that the user reads."""

    def __init__(self, reason: str) -> None:
        super().__init__(reason)
        self.reason = reason


BALLS = 600
"""Cells that could be looked at in the time that settling one of them in balls takes, about."""

_LOOK = 200
"""Cells that could be looked at in the time that a look at none of them takes."""


class Exhausted(OutOfWork):
    """A search looked at as many cells as it may."""


class Budget:
    """Counts the work of one search in cells."""

    def __init__(self, cells: int) -> None:
        self._left = cells
        self._limit = cells

    def spend(self, cells: int) -> None:
        """Take one look at `cells` cells off. Raises Exhausted when there are none left."""
        self._left -= cells + _LOOK
        if self._left < 0:
            raise Exhausted(f"not decided within the work limit of {self._limit} cells")

"""Three-valued answers. None of them may be used as a truth value: "not proved greater" is not "less"."""

from __future__ import annotations

from enum import Enum
from typing import NoReturn


class _NoTruthValue(Enum):
    def __bool__(self) -> NoReturn:
        raise TypeError(f"{type(self).__name__} has three values: compare it with `is`")


class Trilean(_NoTruthValue):
    """Answer to a yes/no question that may stay undecided."""

    YES = "yes"
    NO = "no"
    UNKNOWN = "unknown"

    @staticmethod
    def of(truth: bool) -> Trilean:
        """Return YES or NO for a decided question."""
        return Trilean.YES if truth else Trilean.NO


class Verdict(_NoTruthValue):
    """Verdict on a requirement or on one of its criteria. OPEN: nothing decides it yet."""

    COMPLIANT = "compliant"
    NON_COMPLIANT = "non_compliant"
    OPEN = "open"


class Standing(_NoTruthValue):
    """Standing of the basis of a claim."""

    SOUND = "sound"
    INCONCLUSIVE = "inconclusive"
    OUT_OF_RANGE = "out_of_range"


class Level(Enum):
    """Weight of a finding."""

    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"


class Proof(Enum):
    """How firmly a result is known: exact; enclosed (proved bounds); estimated (numerical, without proof)."""

    EXACT = "exact"
    ENCLOSED = "enclosed"
    ESTIMATED = "estimated"

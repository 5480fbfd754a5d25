"""From a path to a Review: what `check` and `report` have in common."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from specgate.cli import status
from specgate.cli.terminal import progress

if TYPE_CHECKING:
    from specgate.review.types import Review, Unusable

_STATUS = {"pass": status.PASSES, "hold": status.HOLDS, "unusable": status.UNUSABLE}


@dataclass(frozen=True)
class Judged:
    """A Review (or why there is none) and the exit status that it means."""

    review: Review | Unusable
    status: int


def judge(project: str, *, drawn: bool = True, proof: bool = False, formulas: bool = False) -> Judged:
    """Read, compute and judge the project at the path `project` (a folder or one YAML file).

    drawn, proof, formulas: whether what drawings show, how bounded results were obtained, and what every formula of the
    catalogue gives, is computed too.
    """
    from specgate.intake.load import Problems, load
    from specgate.review.build import review, unusable
    from specgate.review.wanted import Wanted

    with progress("reading and computing"):
        loaded = load(Path(project))
        result = unusable(loaded) if isinstance(loaded, Problems) else review(loaded, Wanted(drawn, proof, formulas))
    return Judged(result, _STATUS[result.gate.outcome])

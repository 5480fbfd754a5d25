"""From a path to a Review: what `check` and `report` have in common."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from specgate.cli import status
from specgate.cli.terminal import progress

if TYPE_CHECKING:
    from collections.abc import Callable

    from specgate.intake.load import Problems
    from specgate.project.types import Project
    from specgate.review.types import Review, Unusable
    from specgate.review.wanted import Wanted
    from specgate.terms.sources import Source

_STATUS = {"pass": status.PASSES, "hold": status.HOLDS, "unusable": status.UNUSABLE}


@dataclass(frozen=True)
class Judged:
    """A Review (or why there is none) and the exit status that it means."""

    review: Review | Unusable
    status: int


def judge(
    project: str, *, drawn: bool = True, proof: bool = False, formulas: bool = False, today: str | None = None
) -> Judged:
    """Read, compute and judge the project at the path `project` (a folder or one YAML file).

    drawn, proof, formulas: whether what drawings show, how bounded results were obtained, and what every formula of the
    catalogue gives, is computed too. today: the day as which waivers are judged, else the date of the title block.
    """
    from specgate.intake.load import load
    from specgate.review.wanted import Wanted

    return _judged(lambda: load(Path(project)), Wanted(drawn, proof, formulas), today)


def judge_source(source: Source, entry: str) -> Judged:
    """Read, compute and judge the project that begins with the file `entry` of a source of files."""
    from specgate.intake.load import load_source
    from specgate.review.wanted import Wanted

    return _judged(lambda: load_source(source, entry), Wanted())


def _judged(read: Callable[[], Project | Problems], wanted: Wanted, today: str | None = None) -> Judged:
    from specgate.intake.load import Problems
    from specgate.review.build import review, unusable

    with progress("reading and computing"):
        loaded = read()
        if isinstance(loaded, Problems):
            result: Review | Unusable = unusable(loaded)
        else:
            result = review(loaded if today is None else replace(loaded, today=today), wanted)
    return Judged(result, _STATUS[result.gate.outcome])

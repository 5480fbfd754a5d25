"""From a path to a Review: what `check` and `report` have in common."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from specgate.cli import status
from specgate.cli.terminal import progress
from specgate.terms.errors import UnusableProblem

if TYPE_CHECKING:
    from collections.abc import Callable

    from specgate.intake.load import Problems
    from specgate.project.types import Project
    from specgate.review.types import Review, Unusable
    from specgate.review.types.baseline import Frozen
    from specgate.review.wanted import Wanted
    from specgate.terms.sources import Source

_STATUS = {"pass": status.PASSES, "hold": status.HOLDS}


@dataclass(frozen=True)
class Judged:
    """A Review (or why there is none) and the exit status that it means."""

    review: Review | Unusable
    status: int


@dataclass(frozen=True)
class Since:
    """A baseline, and whether the gate counts from it: it holds then on what got worse since, on nothing else."""

    frozen: Frozen
    only_new: bool


def judge(
    project: str,
    *,
    drawn: bool = True,
    proof: bool = False,
    formulas: bool = False,
    today: str | None = None,
    since: Since | None = None,
) -> Judged:
    """Read, compute and judge the project at the path `project` (a folder or one YAML file).

    drawn, proof, formulas: whether what drawings show, how bounded results were obtained, and what every formula of the
    catalogue gives, is computed too. today: the day as which waivers are judged, else the date of the title block.
    Raises UnusableProblem where the baseline is that of another project.
    """
    from specgate.intake.load import Problems, load
    from specgate.review.wanted import Wanted

    def read() -> Project | Problems:
        loaded = load(Path(project))
        return loaded if today is None or isinstance(loaded, Problems) else replace(loaded, today=today)

    return _judged(read, Wanted(drawn, proof, formulas), since)


def judge_source(source: Source, entry: str) -> Judged:
    """Read, compute and judge the project that begins with the file `entry` of a source of files."""
    from specgate.intake.load import load_source
    from specgate.review.wanted import Wanted

    return _judged(lambda: load_source(source, entry), Wanted(), None)


def _judged(read: Callable[[], Project | Problems], wanted: Wanted, since: Since | None) -> Judged:
    from specgate.intake.load import Problems
    from specgate.review.build import review, unusable

    with progress("reading and computing"):
        loaded = read()
        if isinstance(loaded, Problems):
            return Judged(unusable(loaded), status.UNUSABLE)
        result = review(loaded, wanted, None if since is None else since.frozen.links)
    if since is not None:
        result = _counted(result, since)
    return Judged(result, _STATUS[result.gate.outcome])


def _counted(result: Review, since: Since) -> Review:
    """Return a result with the gate that was asked for."""
    theirs, ours = since.frozen.result.project.id, result.project.id
    if theirs != ours:
        raise UnusableProblem(f"the baseline is one of the project {theirs}, not of {ours}")
    if not since.only_new:
        return result
    from specgate.revisions.since import only_new

    return replace(result, gate=only_new(result, since.frozen.result))

"""Waivers against what they are to excuse: whether they are in force, needed, and enough.

What does not comply stays so; a waiver only keeps it from holding the gate. Each limit that is missed, by the computed
value or by a record, must be inside what some waiver in force accepts.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from itertools import zip_longest

from specgate.compliance.assessment import CriterionAssessment, RecordAssessment, WaiverAssessment
from specgate.compliance.wording import limit_words, result, subject
from specgate.project.types import Aim, Limit, Project, Waiver
from specgate.terms.records import record
from specgate.terms.verdicts import Standing, Verdict

_RANK = (Standing.SOUND, Standing.INCONCLUSIVE, Standing.OUT_OF_RANGE)
_CHUNK = re.compile(r"[0-9]+|[A-Za-z]+")


@record
class Missed:
    """Something that does not comply: a criterion by its computed value, or a record."""

    what: CriterionAssessment | RecordAssessment
    under: Callable[[Sequence[Limit]], Verdict]
    """Its verdict by other limits."""

    def hit_by(self, waiver: Waiver, name: str) -> bool:
        """Whether a waiver is about it, of the requirement `name`."""
        criterion = self.what if isinstance(self.what, CriterionAssessment) else self.what.criterion
        return waiver.aim == Aim() if criterion is None else waiver.about(name, criterion.criterion)

    def accepted_by(self, waiver: Waiver) -> bool:
        """Whether it is inside what a waiver accepts."""
        if isinstance(self.what, RecordAssessment) and self.what.criterion is None:
            return waiver.outcome
        return bool(waiver.limits) and self.under(waiver.limits) is Verdict.COMPLIANT

    def words(self, waiver: Waiver) -> str:
        """Say what was found where it is not inside what a waiver accepts."""
        if isinstance(self.what, CriterionAssessment):
            accepted = " and ".join(limit_words(limit) for limit in waiver.limits) or "no other limit"
            return f"{subject(self.what)} is {result(self.what)}, and {accepted} is accepted"
        return f"{self.what.evidence.id} is not inside what is accepted"


@record
class Excused:
    """What waivers do for a requirement: whether they excuse that it is not met, and whether its standing."""

    waivers: tuple[WaiverAssessment, ...]
    verdict: bool
    standing: bool


def excuse(
    name: str,
    waivers: Sequence[Waiver],
    project: Project,
    missed: Sequence[Missed],
    criteria: Sequence[CriterionAssessment],
) -> Excused:
    """Judge the waivers of the requirement `name` by what it misses and by the standing of its criteria."""
    judged = tuple(_judge(name, waiver, project, missed, criteria) for waiver in waivers)
    in_force = [one.waiver for one in judged if one.lapsed is None]
    unsound = [one for one in criteria if one.standing is not Standing.SOUND]
    return Excused(
        judged,
        bool(missed) and all(any(one.hit_by(by, name) and one.accepted_by(by) for by in in_force) for one in missed),
        bool(unsound) and all(any(_accepts(by, one) for by in in_force) for one in unsound),
    )


def _judge(
    name: str, waiver: Waiver, project: Project, missed: Sequence[Missed], criteria: Sequence[CriterionAssessment]
) -> WaiverAssessment:
    limited = bool(waiver.limits) or waiver.outcome
    about = [one for one in missed if limited and one.hit_by(waiver, name)]
    outside = [one for one in about if not one.accepted_by(waiver)]
    standing = any(
        waiver.aim.hits(one.criterion) and one.standing is not Standing.SOUND for one in criteria if waiver.standing
    )
    beyond = [one for one in criteria if waiver.standing and waiver.aim.hits(one.criterion) and _beyond(waiver, one)]
    reason = next((one.words(waiver) for one in outside), None)
    if reason is None and beyond:
        reason = f"the basis of {subject(beyond[0])} is out of range, and inconclusive is accepted"
    return WaiverAssessment(waiver, lapsed(waiver, project), bool(about) or standing, reason is None, reason)


def _accepts(waiver: Waiver, criterion: CriterionAssessment) -> bool:
    return waiver.standing is not None and waiver.aim.hits(criterion.criterion) and not _beyond(waiver, criterion)


def _beyond(waiver: Waiver, criterion: CriterionAssessment) -> bool:
    """Whether the standing of a criterion is worse than the one that a waiver accepts."""
    assert waiver.standing is not None
    return _RANK.index(criterion.standing) > _RANK.index(Standing(waiver.standing))


def lapsed(waiver: Waiver, project: Project) -> str | None:
    """Say why a waiver is not in force, or return None. A waiver still holds on the day on which it expires."""
    today, revision = project.day, project.info.revision
    if today is not None and waiver.approved_on > today:
        return f"it was approved on {waiver.approved_on}, after {today}"
    if waiver.expires is None:
        return None
    last, until = waiver.expires.date, waiver.expires.revision
    if until is not None:
        return (
            None if earlier(revision, until) else f"it expired with revision {until}, and this is revision {revision}"
        )
    if today is None:
        return f"it expires on {last}, and what day it is is not known: give `project: date` or --date"
    return f"it expired on {last}, before {today}" if last is not None and last < today else None


def earlier(revision: str, other: str) -> bool:
    """Whether a revision comes before another: numbers by their value, letters as A to Z, then AA."""
    pairs = zip_longest(_chunks(revision), _chunks(other), fillvalue=(-1, 0, ""))
    return next((first < second for first, second in pairs if first != second), False)


def _chunks(revision: str) -> list[tuple[int, int, str]]:
    return [(1, int(one), "") if one.isdigit() else (0, len(one), one.upper()) for one in _CHUNK.findall(revision)]

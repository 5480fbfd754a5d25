"""The budget of one requirement, from the limits and results of those that take its shares."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from flint import fmpq

from specgate.analysis.analyses import Study
from specgate.compliance.assessment import Assessment, BudgetAssessment, Contribution, CriterionAssessment
from specgate.compliance.budgets import Entry, Sum, Undecided, added, found_within, kept, same_kind, scaled, tightened
from specgate.compliance.phases import phase_of
from specgate.compliance.readings import Reading
from specgate.compliance.scales import Bounds, bounds, on_scale
from specgate.compliance.units import limit_unit
from specgate.compliance.wording import figure, limit_words
from specgate.project.percent import relative_to_change
from specgate.project.types import BlockShare, Budget, Limit, Project, Requirement, Share
from specgate.response.answers import Answer
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Trilean, Verdict


@record
class Budgets:
    """Adds up the budgets of a project; `done` holds the requirements that are already judged."""

    project: Project
    study: Study
    done: Mapping[str, Assessment]

    def assess(self, requirement: Requirement, criteria: tuple[CriterionAssessment, ...]) -> BudgetAssessment | None:
        """Return the budget of a requirement, None where it has none."""
        budget = requirement.budget
        if budget is None:
            return None
        try:
            limit, unit, whole = self._limit(budget, criteria)
            return self._added(budget, unit, whole, limit)
        except Undecided as problem:
            return BudgetAssessment(budget, reason=str(problem))

    def _limit(self, budget: Budget, criteria: tuple[CriterionAssessment, ...]) -> tuple[Limit, Unit, Bounds]:
        """Return the limit that is shared, its unit, and its bounds."""
        if budget.limit is not None:
            unit = limit_unit(budget.limit, self.study.values) or ONE
            return budget.limit, unit, bounds(budget.limit, unit, self.study.values)
        if len(criteria) != 1 or criteria[0].criterion.limit.truth is not None:
            raise Undecided("it has no limit to be shared: give the budget an `at_most`, `at_least` or `between`")
        one, unit = criteria[0], criteria[0].unit or ONE
        return one.criterion.limit, unit, bounds(one.criterion.limit, unit, self.study.values, one.span)

    def _added(self, budget: Budget, unit: Unit, whole: Bounds, limit: Limit) -> BudgetAssessment:
        parts = list(self._blocks(budget, unit, whole) if budget.blocks else self._shares(budget, unit))
        given, given_reason = self._together(budget, [(one.share, one.given) for one in parts])
        used, used_reason = self._together(budget, [(one.share, one.found) for one in parts])
        back = budget.reserve
        fraction = None if back is None else relative_to_change(back)
        held = None if back is None or fraction is not None else on_scale(back, unit, self.study.values)
        inner = tightened(whole, held, fraction)
        allotted, left_over, unlimited = _kept(given, whole)
        result, left, _ = _kept(used, whole)
        return BudgetAssessment(
            budget,
            limit,
            whole,
            unit,
            tuple(parts),
            given,
            used,
            allotted,
            result,
            left_over,
            left,
            _kept(given, inner)[0],
            given_reason or used_reason or unlimited,
        )

    def _together(self, budget: Budget, parts: list[tuple[Share, Bounds | None]]) -> tuple[Sum | None, str | None]:
        missing = [share.id for share, found in parts if found is None]
        if missing:
            return None, f"{', '.join(missing)} {'have' if len(missing) > 1 else 'has'} nothing that could be added"
        entries = [Entry(share, scaled(found, share.factor)) for share, found in parts if found is not None]
        try:
            return added(budget, entries), None
        except Undecided as problem:
            return None, str(problem)

    def _shares(self, budget: Budget, unit: Unit) -> Iterator[Contribution]:
        for share in budget.shares:
            child = self.done.get(share.id)
            if child is None:
                circle = share.id in self.project.requirements
                why = "shares its own budget with this one" if circle else "is no requirement of this project"
                raise Undecided(f"{share.id} {why}")
            if child.verdict is None:
                continue
            yield self._share(budget, share, child, unit)

    def _share(self, budget: Budget, share: Share, child: Assessment, unit: Unit) -> Contribution:
        criterion = _meant(share, child, unit)
        if criterion is not None:
            limit = bounds(criterion.criterion.limit, unit, self.study.values, criterion.span)
            value = _found(criterion, child, unit)
            deviation = budget.combine == "root_sum_square"
            return Contribution(share, limit, None if value is None else found_within(value, limit, deviation))
        nested = child.budget
        if nested is not None and nested.reason is not None:
            raise Undecided(f"the budget of {share.id} cannot be added up either")
        if nested is not None and nested.limit is not None and nested.unit is not None and same_kind(nested.unit, unit):
            limit = bounds(nested.limit, unit, self.study.values)
            return Contribution(
                share, limit, None if nested.used is None else _in(nested.used.bounds, nested.unit, unit)
            )
        raise Undecided(
            f"{share.id} has no limit in {unit.symbol}, which is what is shared: say `measure` for which one"
        )

    def _blocks(self, budget: Budget, unit: Unit, whole: Bounds) -> Iterator[Contribution]:
        """Give the phase of each block at the frequency: on the side on which the whole is limited."""
        for block in budget.blocks:
            share = Share(block.subsystem, block.place)
            phase = phase_of(self.project, block.subsystem, budget, self.study.values)
            if phase.absent is not None:
                raise Undecided(f"{block.subsystem} has no phase there: {phase.absent.reason}")
            value = Reading.once(phase).in_unit(unit)
            yield Contribution(share, self._allotted(block, unit, value, whole), Bounds(value, value))

    def _allotted(self, block: BlockShare, unit: Unit, value: Answer, whole: Bounds) -> Bounds:
        """Return what a block may take: what is said, else what it takes."""
        given = value if block.share is None else on_scale(block.share, unit, self.study.values)
        return Bounds(None if whole.least is None else given, None if whole.most is None else given)


def _kept(whole: Sum | None, limit: Bounds) -> tuple[Trilean, Answer | None, str | None]:
    """Return whether shares keep a limit, what is left of it, and why that is not known."""
    if whole is None:
        return Trilean.UNKNOWN, None, None
    try:
        return *kept(whole.bounds, limit), None
    except Undecided as problem:
        return Trilean.UNKNOWN, None, str(problem)


def _meant(share: Share, child: Assessment, unit: Unit) -> CriterionAssessment | None:
    """Return the criterion of a share: the one that is named, or the only one in a unit that can be added."""
    hit = [one for one in child.criteria if share.aim.hits(one.criterion) and one.criterion.limit.truth is None]
    fitting = [one for one in hit if same_kind(one.unit or ONE, unit)]
    if len(fitting) > 1:
        measures = ", ".join(one.measure.name for one in fitting)
        raise Undecided(f"{share.id} has several criteria in {unit.symbol}: say `measure` for which one ({measures})")
    return fitting[0] if fitting else None


def _found(criterion: CriterionAssessment, child: Assessment, unit: Unit) -> Answer | None:
    """Return what was computed; where nothing was, the worst that was measured."""
    computed = criterion.reading.settled
    if computed.absent is None and computed.truth is None:
        return criterion.reading.in_unit(unit)
    measured = [one for one in child.records if one.criterion is criterion and one.worst is not None and not one.stale]
    return measured[0].worst if len(measured) == 1 and measured[0].unit == unit else None


def _in(whole: Bounds, unit: Unit, other: Unit) -> Bounds:
    """Return an interval in another unit of the same kind."""
    factor = fmpq(1) if unit.kind == "decibel" else unit.si_factor / other.si_factor
    return scaled(whole, factor)


def used_words(budget: BudgetAssessment, *, given: bool = False) -> str:
    """Say what shares make together against the limit."""
    whole = budget.given if given else budget.used
    assert whole is not None
    assert budget.unit is not None
    assert budget.limit is not None
    ends = [
        (end, name) for end, name in ((whole.bounds.most, "up to"), (whole.bounds.least, "down to")) if end is not None
    ]
    limited = {"at_most": 1, "at_least": 1}.get(budget.limit.kind, 2)
    if budget.limit.kind == "at_least":
        ends = ends[::-1]
    shown = " and ".join(f"{name} {figure(end, budget.unit, digits=6)}" for end, name in ends[:limited])
    return f"{shown}, and {limit_words(budget.limit)} is required"


def decides(budget: BudgetAssessment, children: list[Assessment]) -> tuple[Verdict, str | None]:
    """Return the verdict of a budget: by what was found, else by the limits of shares that all comply."""
    if budget.result is Trilean.YES:
        return Verdict.COMPLIANT, None
    if budget.result is Trilean.NO:
        return Verdict.NON_COMPLIANT, f"what its shares use together is {used_words(budget)}"
    if budget.allotted is Trilean.YES and all(one.verdict is Verdict.COMPLIANT for one in children):
        return Verdict.COMPLIANT, None
    return Verdict.OPEN, budget.reason or "what its shares use is not known, and not all of them comply"

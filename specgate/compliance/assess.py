"""A project's requirements, judged from the bottom of the trace upwards."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from functools import partial

from specgate.analysis.analyses import Analyses
from specgate.approximations.table import APPROXIMATIONS
from specgate.compliance.assessment import (
    Assessment,
    BudgetAssessment,
    CriterionAssessment,
    RecordAssessment,
    Unanswered,
    worst_standing,
)
from specgate.compliance.assumptions import Assumptions
from specgate.compliance.budgeting import Budgets, decides
from specgate.compliance.criteria import Criteria
from specgate.compliance.methods import conclude
from specgate.compliance.records import Records, resting
from specgate.compliance.ruling import Ruling, listed, of_criteria, of_records, with_methods, worse
from specgate.compliance.thresholds import policy
from specgate.compliance.waivers import Excused, Missed, excuse
from specgate.compliance.wording import subject
from specgate.project.types import Basis, Criterion, Evidence, Project, Requirement, Waiver
from specgate.terms.records import record
from specgate.terms.verdicts import Standing, Verdict
from specgate.traceability.graph import Graph


def assess(
    project: Project, analyses: Analyses, graph: Graph, assumptions: Assumptions | None = None
) -> Mapping[str, Assessment]:
    """Judge every requirement; the result is in the order of the files.

    assumptions: what responses rest on, where the caller looks at it too.
    """
    assumed = assumptions or Assumptions(project, analyses)
    criteria = Criteria(project, analyses, policy(project, analyses.nominal.values), assumed)
    done: dict[str, Assessment] = {}
    judging = _Judging(
        project,
        criteria,
        Records(project, analyses.nominal, analyses.again),
        Budgets(project, analyses.nominal, done),
        Named.of(project),
        graph,
        done,
    )
    for name in graph.order:
        done[name] = judging.requirement(project.requirements[name])
    return {name: done[name] for name in project.requirements}


@record
class _Judging:
    """What judging one requirement needs: the project, and all requirements below it already judged."""

    project: Project
    judge: Criteria
    records: Records
    budgets: Budgets
    named: Named
    graph: Graph
    done: Mapping[str, Assessment]

    def requirement(self, requirement: Requirement) -> Assessment:
        if requirement.not_applicable is not None:
            return Assessment(requirement, None, reason=requirement.not_applicable.reason)
        computed = tuple(
            self.judge.assess(criterion, basis)
            for criterion, basis in zip(requirement.criteria, bases(requirement), strict=True)
        )
        evidence = self.named.evidence.get(requirement.id, ())
        records = tuple(self.records.assess(requirement.id, one, computed) for one in evidence)
        criteria = tuple(resting(one, records) for one in computed)
        budget = self.budgets.assess(requirement, criteria)
        analysed = self._analysed(requirement, criteria, records, budget)
        methods = conclude(requirement, self.project.info, analysed.verdict, records)
        ruling = with_methods(analysed, methods, records)
        excused = self._excused(requirement, criteria, records)
        return Assessment(
            requirement,
            ruling.verdict,
            _standing(criteria),
            criteria,
            methods,
            ruling.due,
            ruling.reason,
            tuple(self._unanswered(requirement, criteria)),
            records,
            excused.waivers,
            ruling.verdict is Verdict.NON_COMPLIANT and (excused.verdict or ruling.waived),
            excused.standing,
            budget,
        )

    def _excused(
        self,
        requirement: Requirement,
        criteria: tuple[CriterionAssessment, ...],
        records: tuple[RecordAssessment, ...],
    ) -> Excused:
        """Judge the waivers by what the requirement misses: limits by their computed values, and records."""
        limits = [Missed(one, partial(self.judge.under, one)) for one in criteria if _missed(one.verdict)]
        shown = [
            Missed(one, partial(self.records.under, one)) for one in records if _missed(one.verdict) and not one.stale
        ]
        waivers = self.named.waivers.get(requirement.id, ())
        return excuse(requirement.id, waivers, self.project, [*limits, *shown], criteria)

    def _analysed(
        self,
        requirement: Requirement,
        criteria: tuple[CriterionAssessment, ...],
        records: tuple[RecordAssessment, ...],
        budget: BudgetAssessment | None,
    ) -> Ruling:
        """Return what the criteria, the records, the budget, or the requirements below, say."""
        cycle = self.graph.cyclic(requirement.id)
        if cycle:
            return Ruling(Verdict.OPEN, f"it is derived in a circle ({', '.join(cycle)})")
        if requirement.decided_by == "derived":
            derived = self._derived(requirement)
            return derived if budget is None else worse(derived, self._budgeted(budget))
        if requirement.decided_by == "evidence":
            return of_records(records)
        if requirement.criteria:
            return of_criteria(criteria)
        if budget is not None:
            return self._budgeted(budget)
        return Ruling(Verdict.OPEN, "it has no criterion: add one, or say `decided_by: derived` or `evidence`")

    def _budgeted(self, budget: BudgetAssessment) -> Ruling:
        sharing = [self.done[share.id] for share in budget.budget.shares if share.id in self.done]
        verdict, reason = decides(budget, [one for one in sharing if one.verdict is not None])
        due = verdict is not Verdict.OPEN or not sharing or any(one.due for one in sharing)
        return Ruling(verdict, reason, due)

    def _derived(self, requirement: Requirement) -> Ruling:
        children = {name: self.done[name] for name in self.graph.children[requirement.id]}
        applicable = {name: child for name, child in children.items() if child.verdict is not None}
        if not applicable:
            return Ruling(Verdict.OPEN, "nothing that applies is derived from it")
        for verdict, words in ((Verdict.NON_COMPLIANT, "not met"), (Verdict.OPEN, "open")):
            deciding = {name: child for name, child in applicable.items() if child.verdict is verdict}
            if deciding:
                are = "are" if len(deciding) > 1 else "is"
                due = any(child.due for child in deciding.values())
                waived = all(child.waived for child in deciding.values())
                return Ruling(verdict, f"{listed(deciding)}, derived from it, {are} {words}", due, waived)
        if not requirement.coverage_complete:
            reason = "nobody has confirmed that what is derived from it covers it (`coverage: {complete: true}`)"
            return Ruling(Verdict.OPEN, reason)
        return Ruling(Verdict.COMPLIANT)

    def _unanswered(self, requirement: Requirement, criteria: tuple[CriterionAssessment, ...]) -> Iterator[Unanswered]:
        for criterion in criteria:
            for one in criterion.unanswered:
                yield Unanswered(one.place, f"{subject(criterion)}: {one.what}", one.decides)


def _missed(verdict: Verdict) -> bool:
    return verdict is Verdict.NON_COMPLIANT


@record
class Named:
    """Records and waivers by the requirements that they name."""

    evidence: Mapping[str, tuple[Evidence, ...]]
    waivers: Mapping[str, tuple[Waiver, ...]]

    @staticmethod
    def of(project: Project) -> Named:
        """Return those of a project."""
        evidence: dict[str, tuple[Evidence, ...]] = {}
        waivers: dict[str, tuple[Waiver, ...]] = {}
        for one in project.evidence.values():
            for name in dict.fromkeys(one.requirements):
                evidence[name] = (*evidence.get(name, ()), one)
        for waiver in project.waivers.values():
            for name in dict.fromkeys(waiver.requirements):
                waivers[name] = (*waivers.get(name, ()), waiver)
        return Named(evidence, waivers)


def bases(requirement: Requirement) -> tuple[Basis | None, ...]:
    """Return the basis of each criterion, its own or the requirement's; None means computed.

    An approximation on a requirement belongs to the criterion whose measure it estimates; one that this version does
    not audit might belong to any of them.
    """
    shared = requirement.basis
    if shared is None or shared.kind != "approximation":
        return tuple(criterion.basis or shared for criterion in requirement.criteria)
    fitting = [criterion for criterion in requirement.criteria if _estimates(shared, criterion)]
    chosen = fitting or requirement.criteria
    return tuple(criterion.basis or (shared if criterion in chosen else None) for criterion in requirement.criteria)


def _estimates(basis: Basis, criterion: Criterion) -> bool:
    row = APPROXIMATIONS.get(basis.chain[-1]) if basis.chain else None
    return row is not None and criterion.measure in row.estimates


def _standing(criteria: Iterable[CriterionAssessment]) -> Standing | None:
    standings = [one.standing for one in criteria]
    return worst_standing(standings) if standings else None

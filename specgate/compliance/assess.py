"""A project's requirements, judged from the bottom of the trace upwards."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

from specgate.analysis.analyses import Analyses
from specgate.approximations.table import APPROXIMATIONS
from specgate.compliance.assessment import (
    Assessment,
    CriterionAssessment,
    MethodAssessment,
    Unanswered,
    worst_standing,
)
from specgate.compliance.assumptions import Assumptions
from specgate.compliance.compare import worst
from specgate.compliance.criteria import Criteria
from specgate.compliance.methods import conclude
from specgate.compliance.thresholds import policy
from specgate.compliance.wording import criterion_words, subject
from specgate.project.types import Basis, Criterion, Kept, Project, Requirement
from specgate.terms.records import record
from specgate.terms.verdicts import Standing, Verdict
from specgate.traceability.graph import Graph


@record
class Ruling:
    """A verdict, why it is not compliant, and whether it counts at this stage."""

    verdict: Verdict
    reason: str | None = None
    due: bool = True


def assess(
    project: Project, analyses: Analyses, graph: Graph, assumptions: Assumptions | None = None
) -> Mapping[str, Assessment]:
    """Judge every requirement; the result is in the order of the files.

    assumptions: what responses rest on, where the caller looks at it too.
    """
    assumed = assumptions or Assumptions(project, analyses)
    criteria = Criteria(project, analyses, policy(project, analyses.nominal.values), assumed)
    done: dict[str, Assessment] = {}
    for name in graph.order:
        done[name] = _Judging(project, criteria, graph, done).requirement(project.requirements[name])
    return {name: done[name] for name in project.requirements}


@record
class _Judging:
    """What judging one requirement needs: the project, and all requirements below it already judged."""

    project: Project
    judge: Criteria
    graph: Graph
    done: Mapping[str, Assessment]

    def requirement(self, requirement: Requirement) -> Assessment:
        if requirement.not_applicable is not None:
            return Assessment(requirement, None, reason=requirement.not_applicable.reason)
        criteria = tuple(
            self.judge.assess(criterion, basis)
            for criterion, basis in zip(requirement.criteria, bases(requirement), strict=True)
        )
        recorded = self._naming(requirement, self.project.evidence)
        analysed = self._analysed(requirement, criteria)
        methods = conclude(requirement, self.project.info, analysed.verdict, recorded=bool(recorded))
        ruling = _with_methods(analysed, methods)
        return Assessment(
            requirement,
            ruling.verdict,
            _standing(criteria),
            criteria,
            methods,
            ruling.due,
            ruling.reason,
            tuple(self._unanswered(requirement, criteria, recorded)),
        )

    def _analysed(self, requirement: Requirement, criteria: tuple[CriterionAssessment, ...]) -> Ruling:
        """Return what the criteria, or the requirements below, say."""
        cycle = self.graph.cyclic(requirement.id)
        if cycle:
            return Ruling(Verdict.OPEN, f"it is derived in a circle ({', '.join(cycle)})")
        if requirement.decided_by == "derived":
            return self._derived(requirement)
        if requirement.decided_by == "evidence":
            return Ruling(Verdict.OPEN, "it is decided by evidence, which this version keeps and does not judge")
        if requirement.criteria:
            return _of_criteria(criteria)
        if requirement.budget is not None:
            return Ruling(Verdict.OPEN, "it is decided by a budget, which this version keeps and does not add up")
        return Ruling(Verdict.OPEN, "it has no criterion: add one, or say `decided_by: derived` or `evidence`")

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
                return Ruling(verdict, f"{_listed(deciding)}, derived from it, {are} {words}", due)
        if not requirement.coverage_complete:
            reason = "nobody has confirmed that what is derived from it covers it (`coverage: {complete: true}`)"
            return Ruling(Verdict.OPEN, reason)
        return Ruling(Verdict.COMPLIANT)

    def _naming(self, requirement: Requirement, section: Mapping[str, Kept]) -> tuple[Kept, ...]:
        return tuple(kept for kept in section.values() if requirement.id in kept.requirements)

    def _unanswered(
        self, requirement: Requirement, criteria: tuple[CriterionAssessment, ...], recorded: tuple[Kept, ...]
    ) -> Iterator[Unanswered]:
        for criterion in criteria:
            for one in criterion.unanswered:
                yield Unanswered(one.place, f"{subject(criterion)}: {one.what}", one.decides)
        if requirement.decided_by == "evidence" and not recorded:
            yield Unanswered(requirement.place, "evidence is not judged by this version")
        if requirement.budget is not None:
            yield Unanswered(requirement.place, "its budget is kept and not added up by this version")
        for kept in recorded:
            yield Unanswered(kept.place, f"the evidence {kept.id} is kept and not judged by this version")
        for kept in self._naming(requirement, self.project.waivers):
            yield Unanswered(kept.place, f"the waiver {kept.id} is kept and not applied by this version", decides=False)


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


def _of_criteria(criteria: tuple[CriterionAssessment, ...]) -> Ruling:
    verdict = worst(one.verdict for one in criteria)
    if verdict is Verdict.COMPLIANT:
        return Ruling(verdict)
    return Ruling(verdict, "; ".join(criterion_words(one) for one in criteria if one.verdict is verdict))


def _with_methods(analysed: Ruling, methods: tuple[MethodAssessment, ...]) -> Ruling:
    """Put together what is due: every method that is due must conclude."""
    due = [one for one in methods if one.outcome != "due_later"]
    if not methods:
        return analysed
    if not due:
        return _later(analysed, methods)
    if _violated_unasked(analysed, methods):
        return analysed
    verdict = worst(one.outcome if isinstance(one.outcome, Verdict) else Verdict.OPEN for one in due)
    if verdict is Verdict.COMPLIANT:
        return Ruling(verdict)
    by_analysis = any(one.method.method == "analysis" for one in due)
    reasons = [analysed.reason] if by_analysis and analysed.verdict is verdict and analysed.reason else []
    others = [one for one in due if one.method.method != "analysis"] if verdict is Verdict.OPEN else []
    reasons += [_unrecorded(one) for one in others]
    return Ruling(verdict, "; ".join(reasons), True if others else analysed.due)


def _violated_unasked(analysed: Ruling, methods: tuple[MethodAssessment, ...]) -> bool:
    """Whether a limit is violated that no analysis is to show: what the loop does not do, no test will find."""
    return analysed.verdict is Verdict.NON_COMPLIANT and all(one.method.method != "analysis" for one in methods)


def _unrecorded(one: MethodAssessment) -> str:
    name = one.method.method.replace("_", " ")
    if one.outcome == "no_record":
        return f"{name} is due and has no record"
    return f"{name} is due and its evidence is not judged by this version"


def _later(analysed: Ruling, methods: tuple[MethodAssessment, ...]) -> Ruling:
    """Return what stands while no method is due: it does not hold this review, unless a limit is violated already."""
    if _violated_unasked(analysed, methods):
        return analysed
    when = _listed(dict.fromkeys(f"{one.method.method} at {one.method.stage}" for one in methods))
    later = f"nothing is due yet ({when})"
    if analysed.verdict is Verdict.COMPLIANT:
        return Ruling(Verdict.COMPLIANT, None, due=False)
    waiting = analysed.verdict is Verdict.OPEN
    return Ruling(analysed.verdict, later if waiting else f"{analysed.reason}; {later}", due=False)


def _standing(criteria: Iterable[CriterionAssessment]) -> Standing | None:
    standings = [one.standing for one in criteria]
    return worst_standing(standings) if standings else None


def _listed(names: Iterable[str]) -> str:
    every = list(names)
    return every[0] if len(every) == 1 else f"{', '.join(every[:-1])} and {every[-1]}"

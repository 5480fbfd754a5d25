"""A project to its Review: everything computed, judged and said, in plain values."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from specgate import __version__
from specgate.analysis.analyse import analyse
from specgate.compliance.assess import assess
from specgate.compliance.assumptions import Assumptions
from specgate.compliance.thresholds import policy
from specgate.compliance.uninvited import Uninvited
from specgate.project.types import InputFile, Project
from specgate.review.definitions import definitions
from specgate.review.formulas import with_formulas
from specgate.review.gate import gate
from specgate.review.loops import loop
from specgate.review.masks import frequencies_asked
from specgate.review.printing import location, short
from specgate.review.requirements import requirement
from specgate.review.resting import resting
from specgate.review.specification import specification
from specgate.review.types import (
    FindingReview,
    GateReview,
    InputReview,
    PolicyReview,
    ProjectReview,
    Review,
    ToolReview,
    Unusable,
)
from specgate.review.wanted import Wanted
from specgate.rules.rule import Facts
from specgate.rules.table import findings
from specgate.terms.enclosed import printed_exact
from specgate.terms.findings import Finding, in_order
from specgate.traceability.baseline import Baseline
from specgate.traceability.graph import trace

if TYPE_CHECKING:
    from specgate.intake.load import Problems

FORMAT = 1
"""Version of the results format."""


def review(project: Project, wanted: Wanted | None = None, baseline: Baseline | None = None) -> Review:
    """Compute and judge a project. Raises Fault for a project that its checks refuse.

    wanted: what to compute beside the verdicts; what drawings show unless told otherwise. baseline: what the links
    of the project stood on when they were frozen.
    """
    asked = wanted or Wanted()
    analyses, graph = analyse(project), trace(project)
    assumptions = Assumptions(project, analyses)
    assessments = assess(project, analyses, graph, assumptions)
    warned = (one for one in project.warnings if isinstance(one, Finding))
    said = in_order((*warned, *findings(Facts(project, analyses, graph, assessments, assumptions, baseline))))
    again = analyses.again.loops
    named = frequencies_asked(assessments.values())
    loops = {name: loop(one, again[name], asked, named.get(name, {})) for name, one in analyses.loops.items()}
    thresholds = policy(project, analyses.nominal.values)
    if asked.formulas:
        loops = with_formulas(loops, analyses.loops, Uninvited(project, analyses, thresholds))
    rests = resting(project, analyses)
    requirements = {name: requirement(name, one, project, rests, graph, asked) for name, one in assessments.items()}
    shown = tuple(_finding(one) for one in said)
    info = project.info
    return Review(
        format=FORMAT,
        tool=_tool(),
        project=ProjectReview(info.id, info.title, info.revision, info.date, info.stage, info.stages, info.sign_off),
        inputs=_inputs(project.inputs),
        policy=PolicyReview(
            hold_on=project.gate.hold_on,
            evaluate=project.evaluate,
            changed_thresholds=tuple(
                {
                    "approximation": one.approximation,
                    "condition": one.key,
                    "catalogue": short(one.catalogue),
                    "project": one.as_written,
                    "change": "looser" if one.looser else "tighter",
                }
                for one in thresholds.stated
            ),
            guard=_guard(project),
            model_agreement=None if project.model_agreement is None else project.model_agreement.at_most.as_written,
            today=project.today,
        ),
        units=project.units_read,
        specification=specification(project, analyses),
        loops=loops,
        requirements=requirements,
        trace={name: one.derived_from for name, one in requirements.items() if one.derived_from},
        definitions=definitions(loops, requirements, shown),
        findings=shown,
        gate=gate(project.gate, assessments, said),
    )


def _guard(project: Project) -> float | None:
    rule = project.decision_rule
    return printed_exact(rule.guard).value if rule.kind == "guarded_acceptance" else None


def unusable(problems: Problems) -> Unusable:
    """Say why a project could not be built."""
    found = in_order(problems.findings)
    count = len(found)
    reason = f"the project could not be built: {count} problem{'s' if count > 1 else ''} in its files"
    return Unusable(
        format=FORMAT,
        tool=_tool(),
        inputs=_inputs(problems.inputs),
        findings=tuple(_finding(one) for one in found),
        gate=GateReview("unusable", (reason,)),
    )


def _tool() -> ToolReview:
    return ToolReview("specgate", __version__)


def _inputs(files: Iterable[InputFile]) -> tuple[InputReview, ...]:
    return tuple(InputReview(one.path, one.sha256) for one in files)


def _finding(finding: Finding) -> FindingReview:
    return FindingReview(
        rule=finding.rule,
        level=finding.level.value,
        message=finding.message,
        location=location(finding.place),
        requirement=finding.requirement,
        loop=finding.loop,
        response=finding.response,
        subsystem=finding.subsystem,
        related=tuple(location(one.place, one.message) for one in finding.related),
    )

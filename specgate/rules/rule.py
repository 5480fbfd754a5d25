"""The shape of a row of the rule table, and what every rule may look at."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping

from specgate.analysis.analyses import Analyses
from specgate.compliance.assessment import Assessment
from specgate.compliance.assumptions import Assumptions
from specgate.project.types import Project, Requirement
from specgate.terms.findings import Finding
from specgate.terms.records import record
from specgate.terms.verdicts import Level, Standing, Verdict
from specgate.traceability.baseline import Baseline
from specgate.traceability.graph import Graph


@record
class Facts:
    """A project and everything that was found about it."""

    project: Project
    analyses: Analyses
    graph: Graph
    assessments: Mapping[str, Assessment]
    assumptions: Assumptions
    baseline: Baseline | None = None
    """What the links stood on when they were frozen; None where the run knows no baseline."""

    def leaves(self) -> Iterator[Requirement]:
        """Give the requirements at the end of the trace: nothing is derived from them, and nothing has to be."""
        for name, requirement in self.project.requirements.items():
            waits = requirement.decided_by == "derived" or requirement.not_applicable is not None
            if not waits and not self.graph.children[name]:
                yield requirement

    def restating(self, what: Verdict | Standing, assessment: Assessment) -> Level:
        """Return the level of a finding that only restates a verdict or a standing.

        A note where nothing is due yet, and where a waiver accepts it.
        """
        waived = assessment.standing_waived if isinstance(what, Standing) else assessment.waived
        if not assessment.due or (waived and what is not Verdict.OPEN):
            return Level.NOTE
        return Level.ERROR if what.value in self.project.gate.hold_on else Level.WARNING


@record
class Rule:
    """One row: the slug, a title, the levels in words, the check, and the user's text (the module's docstring)."""

    name: str
    title: str
    level: str
    check: Callable[[Facts], Iterator[Finding]]
    text: str

"""A criterion put to one study: its subject, arguments and limits, evaluated."""

from __future__ import annotations

from flint import fmpq

from specgate.analysis.analyses import Missing, Study
from specgate.analysis.arguments import arguments, number
from specgate.approximations.viewed import Viewed
from specgate.compliance.compare import Limits, Sign
from specgate.measures.measure import Arguments, Measure, Reader
from specgate.measures.subjects import Subject
from specgate.project.types import Criterion, Limit
from specgate.response.answers import Answer
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit


@record
class Asked:
    """What a criterion asks, with the values of one study. signal: unit of the signal a response looks at, else 1.

    span: of that signal.
    """

    study: Study
    criterion: Criterion
    measure: Measure
    subject: Subject | Missing
    signal: Unit
    arguments: Arguments
    limits: Limits
    span: fmpq | None = None

    def same_as(self, other: Asked) -> bool:
        """Whether both ask the very same of the very same subject, so that one answer serves for both."""
        return self.subject is other.subject and self.arguments == other.arguments and self.limits == other.limits

    def read(self, read: Reader) -> Answer:
        """Read the subject, or return why there is none."""
        return self.subject.answer() if isinstance(self.subject, Missing) else read(self.subject, self.arguments)

    def at_limit(self, limit: fmpq) -> Sign | None:
        """Return the exact sign of measure minus limit where the measure can tell."""
        if self.measure.at_limit is None or isinstance(self.subject, Missing):
            return None
        return self.measure.at_limit(self.subject, self.arguments, limit)

    @property
    def viewed(self) -> Viewed | None:
        """What approximations look at; None of what is missing."""
        about = self.criterion.subject
        return self.study.loops[about.loop].viewed(about)


def ask(study: Study, criterion: Criterion, measure: Measure) -> Asked:
    """Evaluate a criterion with the values of a study. Raises Fault."""
    about = criterion.subject
    signal, spanned = ONE, None
    if about.kind == "response" and about.name is not None:
        loop = study.loops[about.loop]
        response = loop.responses[about.name]
        signal, spanned = response.unit, loop.signals.span(response.response.to)
    return Asked(
        study,
        criterion,
        measure,
        study.subject(about),
        signal,
        arguments(criterion, measure, study.values, spanned),
        _limits(criterion.limit, study, spanned),
        spanned,
    )


def _limits(limit: Limit, study: Study, spanned: fmpq | None) -> Limits:
    if limit.truth is not None:
        return Limits(truth=limit.truth)
    numbers = [number(value, study.values, spanned) for value in limit.values]
    first = numbers[0]
    if limit.kind == "at_most":
        return Limits(most=first)
    if limit.kind == "at_least":
        return Limits(least=first)
    if limit.kind == "equals":
        return Limits(least=first, most=first)
    if limit.kind == "within":
        return Limits(least=numbers[1] - first, most=numbers[1] + first)
    return Limits(least=first, most=numbers[1])

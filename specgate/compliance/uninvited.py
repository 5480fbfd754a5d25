"""The audit that nobody asked for: every formula of the catalogue against proved values of responses, breaks and loops.

Each formula is put to the questions that the requirements ask there, else to those of every report. Nothing is claimed
and nothing rests on it: it is told which formulas would hold here, which would not and why, and how far each is off.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import replace

from flint import fmpq

from specgate.analysis.analyses import Analyses, Missing
from specgate.analysis.arguments import ALWAYS, ALWAYS_SAID, said
from specgate.approximations.approximation import Approximation
from specgate.approximations.late import derived_for
from specgate.approximations.table import APPROXIMATIONS
from specgate.approximations.viewed import Viewed
from specgate.compliance.asking import ask
from specgate.compliance.assessment import AuditedCondition, FormulaError
from specgate.compliance.audit import audited_conditions
from specgate.compliance.chains import Link
from specgate.compliance.compare import Limits
from specgate.compliance.readings import Reading
from specgate.compliance.sides import formula_error
from specgate.compliance.thresholds import Policy
from specgate.compliance.units import default_unit, limit_unit
from specgate.measures import subjects
from specgate.measures.measure import Arguments, Measure
from specgate.measures.table import MEASURES
from specgate.project.types import Project, Subject
from specgate.response.answers import Absent, Answer
from specgate.terms.records import record
from specgate.terms.unit import ONE, Unit
from specgate.terms.verdicts import Trilean

OF_THE_QUESTION = ("band", "counting")
"""Conditions on what is asked: a formula that fails one of them answers another question, and is left out."""

_WHOLE = {"from": "0 % of the change", "to": "100 % of the change"}
_TOLD_WITHOUT_A_VALUE = ("final_value",)
"""Measures of which a formula may give a number that there is none of."""
_MORE_IS_BETTER = (
    "bandwidth",
    "gain_margin",
    "gain_margin_up",
    "gain_margin_down",
    "phase_margin",
    "phase_margin_lag",
    "phase_margin_lead",
    "delay_margin",
    "least_distance",
    "damping_ratio",
    "decay_rate",
)
"""Measures of which a promise above the truth is the unsafe one."""


@record
class Question:
    """A measure with its arguments, how they are said, and the unit of the answer."""

    measure: Measure
    arguments: Arguments
    said: Mapping[str, str] | None
    unit: Unit | None


@record
class Asked:
    """A question with the proved answer, and the conditions that formulas for it have been held to so far.

    conditions: by identity; rows that share a premise share what was found.
    """

    question: Question
    truth: Reading
    conditions: dict[int, AuditedCondition]

    @property
    def absent(self) -> Absent | None:
        """Why there is no answer."""
        return self.truth.settled.absent


@record
class Formula:
    """A formula against what it was put to; values in coherent SI.

    conditions: all of them, those of premises first. value: of the formula. truth: the proved value.
    error: None where there is no value on one of both sides.
    """

    row: Approximation
    viewed: Viewed
    question: Question
    conditions: tuple[AuditedCondition, ...]
    value: Answer
    truth: Reading
    error: FormulaError | None
    accuracy: str | None

    @property
    def applies(self) -> Trilean:
        """Whether every condition holds and the formula has a value."""
        found = [one.found.holds for one in self.conditions]
        if self.value.absent is not None or any(one is Trilean.NO for one in found):
            return Trilean.NO
        if any(one is Trilean.UNKNOWN for one in found) or any(one.beyond for one in self.conditions):
            return Trilean.UNKNOWN
        return Trilean.YES

    @property
    def failing(self) -> tuple[AuditedCondition, ...]:
        """The conditions that do not hold, then those of which it is not decided."""
        broken = (one for one in self.conditions if one.found.holds is Trilean.NO)
        return (*broken, *(one for one in self.conditions if one.found.holds is Trilean.UNKNOWN))


@record
class Formulas:
    """What there is to say of one response, break or loop.

    rows: every formula for one of its questions, in the order of the catalogue. absent: measures without a value, and
    why. reason: why no formula is for it; None where some are.
    """

    rows: tuple[Formula, ...] = ()
    absent: tuple[tuple[str, str], ...] = ()
    reason: str | None = None


class Uninvited:
    """Audits what nobody has claimed anything of, for one project."""

    def __init__(self, project: Project, analyses: Analyses, policy: Policy) -> None:
        self._project, self._analyses, self._policy = project, analyses, policy

    def of(self, about: Subject) -> Formulas:
        """Put every formula of the catalogue to a response, a break or a loop."""
        subject = self._analyses.nominal.subject(about)
        nominal, again = (
            study.loops[about.loop].viewed(about) for study in (self._analyses.nominal, self._analyses.again)
        )
        if isinstance(subject, Missing):
            return Formulas(reason=subject.reason)
        beyond = subject.beyond if isinstance(subject, subjects.ResponseSubject) else None
        rows = [row for row in _rows() if _derived_for(row, subject)]
        if nominal is None or again is None or not rows:
            return Formulas(reason=beyond)
        again = nominal if again.subject is nominal.subject else again
        asked = [Asked(one, _truth(one, nominal, again), {}) for one in self._questions(about, rows)]
        found = tuple(
            formula for row in rows for one in asked for formula in self._against(Link(row, nominal, again), one)
        )
        absent = {one.question.measure.name: one.absent.reason for one in asked if one.absent is not None}
        return Formulas(found, tuple(absent.items()), beyond if not found else None)

    def _against(self, link: Link, asked: Asked) -> Iterator[Formula]:
        """Yield a formula against a question, if it is one for this formula and has an answer to compare with."""
        question = asked.question
        name = question.measure.name
        if name not in link.row.estimates or (asked.absent is not None and name not in _TOLD_WITHOUT_A_VALUE):
            return
        conditions = tuple(audited_conditions(link, question.arguments, self._policy, asked.conditions))
        keys = [one.condition.key for one in conditions]
        if any(map(_of_another_question, conditions)) or (question.said is _WHOLE and "counting" not in keys):
            return
        yield _formula(link, question, conditions, asked.truth)

    def _questions(self, about: Subject, rows: Iterable[Approximation]) -> Iterator[Question]:
        """Yield what the requirements ask, and the usual of each measure that none of them asks for."""
        loop = self._analyses.nominal.loops[about.loop]
        signal = loop.responses[about.name].unit if about.kind == "response" and about.name is not None else ONE
        own = list(self._asked(about))
        for name in dict.fromkeys(name for row in rows for name in row.estimates):
            measure = MEASURES[name]
            if measure.read is not None and about.kind in measure.subjects:
                yield from [one for one in own if one.measure is measure] or _usual(measure, signal)

    def _asked(self, about: Subject) -> Iterator[Question]:
        seen: list[Arguments] = []
        for requirement in self._project.requirements.values():
            for criterion in requirement.criteria:
                other = criterion.subject
                if (other.kind, other.loop, other.name) != (about.kind, about.loop, about.name):
                    continue
                asked = ask(self._analyses.nominal, criterion, MEASURES[criterion.measure])
                if asked.arguments not in seen:
                    seen.append(asked.arguments)
                    unit = default_unit(asked.measure, asked.arguments, asked.signal)
                    if unit is not None and unit.kind != "decibel":
                        unit = limit_unit(criterion.limit, self._analyses.nominal.values) or unit
                    yield Question(asked.measure, asked.arguments, said(criterion) or None, unit)


def _rows() -> Iterator[Approximation]:
    """Yield every formula of the catalogue, each variant by itself."""
    for row in APPROXIMATIONS.values():
        yield from (row.taken_as(one.name) for one in row.variants) if row.variants else (row,)


def _derived_for(row: Approximation, subject: subjects.Subject) -> bool:
    return not isinstance(subject, subjects.ResponseSubject) or derived_for(subject, row.inputs, late=row.late)


def _usual(measure: Measure, signal: Unit) -> Iterable[Question]:
    arguments = replace(ALWAYS, measure=measure.name)
    unit = default_unit(measure, arguments, signal)
    yield Question(measure, arguments, ALWAYS_SAID.get(measure.name), unit)
    if measure.name == "rise_time":
        yield Question(measure, replace(arguments, lower=fmpq(0), upper=fmpq(1)), _WHOLE, unit)


def _of_another_question(one: AuditedCondition) -> bool:
    return one.condition.key in OF_THE_QUESTION and one.found.holds is Trilean.NO


def _truth(question: Question, nominal: Viewed, again: Viewed) -> Reading:
    read = question.measure.read
    assert read is not None
    answer = read(nominal.subject, question.arguments)
    return Reading.once(answer) if again is nominal else Reading(answer, read(again.subject, question.arguments))


def _formula(link: Link, question: Question, conditions: tuple[AuditedCondition, ...], truth: Reading) -> Formula:
    value = link.row.evaluate(link.viewed, question.arguments)
    known = truth.settled
    found = Formula(link.row, link.viewed, question, conditions, value, truth, None, None)
    if value.absent is None and known.absent is None and known.truth is None:
        zero = fmpq(0)
        better = Limits(least=zero) if question.measure.name in _MORE_IS_BETTER else Limits(most=zero)
        found = replace(found, error=formula_error(value, known, better))
    if found.applies is not Trilean.YES:
        return found
    accuracy = link.row.accuracy(link.viewed, question.arguments)
    return found if accuracy is None else replace(found, accuracy=accuracy.text)

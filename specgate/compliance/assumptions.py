"""What a verdict on a response rests on: that the signals it moves stay inside the ranges of the linear model.

A response and its mirror image (the other sign of its input) take a signal from rest by the same amount either way, so
that |y| against the nearer end of the range decides both. No verdict is sound beyond it.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import cached_property

from flint import arb

from specgate.analysis.analyses import Analyses, LoopAnalysis, Missing, ResponseAnalysis, Study
from specgate.analysis.ranges import Ranged, Ranges
from specgate.analysis.responses import same
from specgate.approximations.figures import product, quotient
from specgate.compliance.compare import sign
from specgate.compliance.readings import PI_DECIDES, Reading
from specgate.compliance.units import written_unit
from specgate.project.parameters import Values, evaluate
from specgate.project.types import Project, Response, Subject, Value
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.terms.precision import HIGHEST
from specgate.terms.records import record
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Standing, Trilean

_SCALED = ("size", "slope", "curvature", "area", "amplitude")
"""Quantities of an input to which its response is proportional."""


@record
class Decision:
    """Whether a signal stays inside its range, and the reason where there is no peak that tells."""

    holds: Trilean
    reason: str | None = None


class Excursion:
    """How far one response takes the signal of one port, for one set of values; searched only when asked."""

    def __init__(self, ranged: Ranged, analysis: ResponseAnalysis) -> None:
        self.ranged, self.analysis = ranged, analysis

    @property
    def moved(self) -> bool:
        """Whether the response moves the signal at all, as far as that is known."""
        channels = self.analysis.channels
        return any(channel.transfer.numerator for channel in channels) if channels else self.peak.exact != 0

    @cached_property
    def peak(self) -> Answer:
        """The greatest distance from rest, or the greatest rate; coherent SI."""
        subject = self.analysis.subject
        if isinstance(subject, Missing):
            return Answer.undecided(subject.reason)
        absent = subject.void or (subject.response if isinstance(subject.response, Absent) else None)
        if absent is not None:
            return Answer.undecided(absent.reason)
        assert not isinstance(subject.response, Absent)
        if self.ranged.kind == "rate_range":
            return subject.response.peak_rate().value
        return subject.response.peak_deviation().value

    @cached_property
    def ceiling(self) -> arb | None:
        """A bound of the peak that costs no search, None where there is none."""
        subject = self.analysis.subject
        if isinstance(subject, Missing) or subject.void is not None or self.ranged.kind == "rate_range":
            return None
        return subject.response.ceiling() if isinstance(subject.response, StepResponse) else None

    @cached_property
    def decision(self) -> Decision:
        """Whether the range holds. Touching its end is inside."""
        allowed = self.ranged.allowed
        if allowed < 0:
            return Decision(Trilean.NO, "its value at rest is outside the range")
        if self.ceiling is not None and self.ceiling <= arb(allowed):
            return Decision(Trilean.YES)
        if self.peak.absent is not None:
            return Decision(Trilean.NO if self.peak.absent.proved else Trilean.UNKNOWN, self.peak.absent.reason)
        found = sign(self.peak, allowed)
        if found is None:
            return Decision(Trilean.UNKNOWN, f"the peak cannot be told from the end of the range at {HIGHEST} bits")
        return Decision(Trilean.of(found <= 0))


class Assumption:
    """One range that a response rests on; `again` is the same with more digits of pi (the same object without pi)."""

    def __init__(
        self, loop: LoopAnalysis, response: Response, first: Excursion, again: Excursion, known: Values
    ) -> None:
        self.loop, self.response, self.ranged = loop.loop.name, response, first.ranged
        self._source = loop.signals.unit(response.excitations[0].source)
        self._first, self._again, self._known = first, again, known

    @property
    def on(self) -> str:
        """The response, with its loop."""
        return f"{self.loop}.{self.response.name}"

    @cached_property
    def decision(self) -> Decision:
        """Whether the range holds, decided again with more digits of pi where it comes into it."""
        first = self._first.decision
        if self._again is self._first or self._again.decision.holds is first.holds:
            return first
        return Decision(Trilean.UNKNOWN, PI_DECIDES)

    @property
    def standing(self) -> Standing:
        """The standing that it leaves to whatever rests on it."""
        return _STANDINGS[self.decision.holds.value]

    @property
    def at_rest(self) -> bool:
        """Whether it is the value at rest that is outside the range."""
        return self.ranged.allowed < 0

    @property
    def peak(self) -> Reading:
        """The greatest distance from rest (or rate); coherent SI."""
        if self._again is self._first:
            return Reading.once(self._first.peak)
        return Reading(self._first.peak, self._again.peak)

    @property
    def allowed(self) -> Reading:
        """The distance from rest to the nearer end of the range; coherent SI."""
        return Reading(Answer.of_exact(self._first.ranged.allowed), Answer.of_exact(self._again.ranged.allowed))

    @cached_property
    def factor(self) -> Reading | None:
        """By how much the input may grow, or has to shrink; None where there is no peak."""
        if self.at_rest or self._first.peak.absent is not None or self._again.peak.absent is not None:
            return None
        first = quotient(Answer.of_exact(self._first.ranged.allowed), self._first.peak)
        if self._again is self._first:
            return Reading.once(first)
        return Reading(first, quotient(Answer.of_exact(self._again.ranged.allowed), self._again.peak))

    @property
    def size(self) -> Value | None:
        """The one quantity of the input that the peak is proportional to; None where several are."""
        quantities = [
            value for one in self.response.excitations for key, value in one.quantities.items() if key in _SCALED
        ]
        return quantities[0] if len(quantities) == 1 else None

    @cached_property
    def asked(self) -> tuple[Answer, Unit] | None:
        """The size of the input as declared, without its sign, in the unit it is written in (else the input's)."""
        size = self.size
        if size is None:
            return None
        unit = written_unit(size.expression, self._known) or self._source
        return Answer.of_exact(abs(evaluate(size, self._known)) / unit.si_factor), unit

    @cached_property
    def largest_size(self) -> tuple[Answer, Unit] | None:
        """The largest size of the input that keeps the range, in the same unit; None where there is no such size."""
        if self.asked is None or self.factor is None:
            return None
        stated, unit = self.asked
        return product(self.factor.settled, stated), unit


_STANDINGS = {
    Trilean.YES.value: Standing.SOUND,
    Trilean.NO.value: Standing.OUT_OF_RANGE,
    Trilean.UNKNOWN.value: Standing.INCONCLUSIVE,
}


class Assumptions:
    """What the responses of a project rest on, each looked into once."""

    def __init__(self, project: Project, analyses: Analyses) -> None:
        self._project, self._analyses = project, analyses
        self._ranges: dict[int, Ranges] = {}
        self._found: dict[tuple[str, str], tuple[Assumption, ...]] = {}

    def of(self, about: Subject) -> tuple[Assumption, ...]:
        """Return what a criterion on a response rests on; nothing where it is about a break or a loop."""
        if about.kind != "response" or about.name is None:
            return ()
        return self.of_response(about.loop, about.name)

    def of_response(self, loop: str, name: str) -> tuple[Assumption, ...]:
        """Return the ranges of the signals that a response moves; none where there is no response."""
        if (loop, name) not in self._found:
            self._found[loop, name] = tuple(self._of_response(loop, name))
        return self._found[loop, name]

    def _of_response(self, loop: str, name: str) -> Iterator[Assumption]:
        nominal, again = self._analyses.nominal, self._analyses.again
        declared, known = nominal.loops[loop].responses[name], nominal.values
        if isinstance(declared.subject, Missing):
            return
        ranges, precise = self._ranges_of(nominal, loop), self._ranges_of(again, loop)
        for ranged, precisely in zip(ranges.all, precise.all, strict=True):
            first = Excursion(ranged, ranges.response(declared.response, ranged))
            second = (
                first if precise is ranges else _again(first, precisely, precise.response(declared.response, ranged))
            )
            if first.moved or second.moved:
                yield Assumption(nominal.loops[loop], declared.response, first, second, known)

    def _ranges_of(self, study: Study, loop: str) -> Ranges:
        """Return the ranges of a loop for the values of a study; those of a loop without pi are the same in both."""
        key = id(study.loops[loop])
        if key not in self._ranges:
            self._ranges[key] = Ranges(self._project, study.loops[loop], study.values)
        return self._ranges[key]


def _again(first: Excursion, ranged: Ranged, analysis: ResponseAnalysis) -> Excursion:
    """Return an excursion with more digits of pi, which may be the very same one."""
    shared = same(first.analysis, analysis)
    numbers = [(one.rest, one.low, one.high) for one in (first.ranged, ranged)]
    if shared and numbers[0] == numbers[1]:
        return first
    return Excursion(ranged, first.analysis if shared else analysis)

"""What is computed of a project: loops solved, and the subjects from which measures are read."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property

from flint import fmpq

from specgate.analysis.held import held_gain
from specgate.approximations.features import Features
from specgate.approximations.late import LateResponse, Reference
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.viewed import Viewed
from specgate.approximations.whole import WholeLoop
from specgate.measures.measure import Arguments, Measure
from specgate.measures.subjects import BreakSubject, LoopSubject, ResponseSubject
from specgate.project import types as project_types
from specgate.project.instantiate import InstantiatedLoop
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.response.answers import Absent, Answer
from specgate.sampled.opened import SampledOpening
from specgate.sampled.solution import SampledSolution
from specgate.systems.delayed import DelayedChannel, DelayedOpenLoop, DelayedSolution
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.solution import Channel, LoopSolution, OpenLoop
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Proof


@record
class Missing:
    """Why there is nothing to read from.

    reason: a sentence. proved: that there is nothing is a fact of the loop. later: it is only this version that does
    not answer it.
    """

    reason: str
    proved: bool = False
    later: bool = False

    def answer(self) -> Answer:
        """Return it as the answer to every question."""
        return Answer(Proof.EXACT if self.proved else Proof.ESTIMATED, absent=Absent(self.reason, self.proved))


@record
class ResponseAnalysis:
    """A declared response. unit: of the signal that is looked at.

    channels: from each input that is driven. origin: what the response is computed from, to be compared; None where
    nothing is. improper: it would hold an impulse, so that there is none.
    """

    response: project_types.Response
    unit: Unit
    subject: ResponseSubject | Missing
    channels: tuple[Channel | DelayedChannel, ...] = ()
    origin: object = None
    improper: bool = False

    @property
    def channel(self) -> Channel | DelayedChannel | None:
        """The channel, where there is a single one."""
        return self.channels[0] if len(self.channels) == 1 else None

    @cached_property
    def features(self) -> Features | None:
        """What approximations look at; None where there is no response to look at, or no single rational channel."""
        subject = self.subject
        rational = isinstance(subject, ResponseSubject) and isinstance(subject.channel, TransferFunction)
        return Features(subject) if isinstance(subject, ResponseSubject) and rational else None

    @property
    def late(self) -> ResponseSubject | None:
        """The subject, where a dead time is on the way of a single channel."""
        subject = self.subject
        delayed = isinstance(subject, ResponseSubject) and isinstance(subject.channel, DelayedTransfer)
        return subject if isinstance(subject, ResponseSubject) and delayed else None


@record
class BreakAnalysis:
    """A declared break."""

    declared: project_types.Break
    subject: BreakSubject | Missing
    opened: OpenLoop | DelayedOpenLoop | SampledOpening | None = None


@record
class LoopAnalysis:
    """A loop, solved once.

    built: it with values. subsystems: names of those it is wired from, in the order of the files. signals: the unit and
    span of each.
    solution: where the subject is missing, that of what is left without the blocks that this version does not answer.
    """

    loop: project_types.Loop
    built: InstantiatedLoop
    subsystems: tuple[str, ...]
    signals: LoopSignals
    solution: LoopSolution | DelayedSolution | SampledSolution
    subject: LoopSubject | Missing
    responses: Mapping[str, ResponseAnalysis]
    breaks: Mapping[str, BreakAnalysis]

    @cached_property
    def opened(self) -> Mapping[str, OpenedLoop]:
        """What approximations look at in the loop opened at each break that has an L."""
        subjects = {name: one.subject for name, one in self.breaks.items()}
        held = held_gain(self.solution) if subjects else None
        return {name: OpenedLoop(name, one, held) for name, one in subjects.items() if isinstance(one, BreakSubject)}

    @cached_property
    def whole(self) -> WholeLoop | None:
        """What approximations look at in the loop itself; None where there is none to look at."""
        return None if isinstance(self.subject, Missing) else WholeLoop(self.subject, self.opened)

    def viewed(self, about: project_types.Subject) -> Viewed | None:
        """Return what approximations look at in the subject of a criterion; None where it is missing."""
        if about.kind == "loop" or about.name is None:
            return self.whole
        if about.kind == "break":
            return self.opened.get(about.name)
        response = self.responses[about.name]
        if response.late is not None:
            return LateResponse(response.late, self.opened, _reference(response.response))
        return None if response.features is None else response.features.beside(lambda: self.opened)


def _reference(response: project_types.Response) -> Reference:
    """Return what the error of a response to a single input is measured from."""
    if response.reference in (None, response.excitations[0].source):
        return "input"
    return "zero" if response.reference == "0" else "other"


@record
class Study:
    """Every loop for one set of parameter values and one decimal for pi."""

    values: Values
    loops: Mapping[str, LoopAnalysis]

    @property
    def pi(self) -> fmpq:
        """The decimal that stands for pi."""
        return self.values.pi

    def subject(self, about: project_types.Subject) -> ResponseSubject | BreakSubject | LoopSubject | Missing:
        """Return what a criterion is about."""
        loop = self.loops[about.loop]
        if about.kind == "loop" or about.name is None:
            return loop.subject
        return (loop.responses if about.kind == "response" else loop.breaks)[about.name].subject

    def read(self, about: project_types.Subject, measure: Measure, arguments: Arguments) -> Answer:
        """Read a measure; `measure.read` must not be None."""
        subject = self.subject(about)
        if isinstance(subject, Missing):
            return subject.answer()
        assert measure.read is not None
        return measure.read(subject, arguments)


@record
class Analyses:
    """A project computed with nominal values.

    again: the same with more digits of pi; loops that pi has no part in are the same objects as in `nominal`.
    """

    nominal: Study
    again: Study

    @property
    def loops(self) -> Mapping[str, LoopAnalysis]:
        """The loops with nominal values."""
        return self.nominal.loops

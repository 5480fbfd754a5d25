"""Sampled loops for tests, and an independent simulation of them in 50 digits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import mpmath
from flint import fmpq, fmpq_poly

from specgate.sampled.blocks import SampledBlock, SampledInstance, SampledWiring
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring

mpmath.mp.dps = 50


def exact(value: Fraction | int | str) -> fmpq:
    fraction = Fraction(value)
    return fmpq(fraction.numerator, fraction.denominator)


def form(**terms: int) -> LinearForm:
    return LinearForm(tuple((fmpq(factor), SignalRef(name)) for name, factor in terms.items()))


def polynomial(highest_first: Sequence[Fraction | int | str]) -> fmpq_poly:
    return fmpq_poly([exact(c) for c in reversed(highest_first)])


@dataclass(frozen=True)
class Case:
    """Unity feedback of a controller in z and a plant in s; `load` acts at the plant's input."""

    plant: tuple[Sequence[Fraction | int | str], Sequence[Fraction | int | str]]
    controller: tuple[Sequence[Fraction | int | str], Sequence[Fraction | int | str]]
    period: Fraction | int | str
    delay: Fraction | int | str = 0

    def wiring(self) -> SampledWiring:
        plant = Block("plant", ("u",), ("y",), {("y", "u"): polynomial(self.plant[0])}, polynomial(self.plant[1]))
        numerators = {("y", "u"): polynomial(self.controller[0])}
        control = SampledBlock("law", ("u",), ("y",), numerators, polynomial(self.controller[1]), exact(self.delay))
        continuous = Wiring(
            ("ask", "load", "law.y"),
            (Instance("plant", plant, {"u": form(drive=1)}),),
            {
                "error": form(ask=1, place=-1),
                "sent": LinearForm(((fmpq(1), SignalRef("law.y")),)),
                "drive": form(sent=1, load=1),
                "place": LinearForm(((fmpq(1), OutputRef("plant", "y")),)),
            },
        )
        return SampledWiring(exact(self.period), continuous, (SampledInstance("law", control, {"u": form(error=1)}),))

    def simulated(self, times: Sequence[Fraction], source: str = "ask") -> list[mpmath.mpf]:
        """Return `place` after a unit step, by matrix exponentials from event to event."""
        return _Simulation(self, source).run(times)


def mpf(value: Fraction | int | str) -> mpmath.mpf:
    fraction = Fraction(value)
    return mpmath.mpf(fraction.numerator) / fraction.denominator


class _Simulation:
    """The plant in companion form; the controller as its difference equation; events in exact times."""

    def __init__(self, case: Case, source: str) -> None:
        numerator, denominator = ([mpf(c) for c in part] for part in case.plant)
        self.order = len(denominator) - 1
        self.direct = mpmath.mpf(0)
        padded = [mpmath.mpf(0)] * (self.order + 1 - len(numerator)) + numerator
        if padded[0] != 0:
            self.direct = padded[0] / denominator[0]
        self.output = [(p - self.direct * d) / denominator[0] for p, d in zip(padded, denominator, strict=True)][:0:-1]
        self.motion = mpmath.zeros(self.order + 1)
        for i in range(self.order - 1):
            self.motion[i, i + 1] = 1
        for j in range(self.order):
            self.motion[self.order - 1, j] = -denominator[self.order - j] / denominator[0]
        if self.order:
            self.motion[self.order - 1, self.order] = 1
        self.case, self.ask, self.load = case, int(source == "ask"), int(source == "load")
        self.state, self.held, self.now = mpmath.zeros(self.order + 1, 1), mpmath.mpf(0), Fraction(0)
        self.motions: dict[Fraction, mpmath.matrix] = {}
        self.errors: list[mpmath.mpf] = []
        self.answers: list[mpmath.mpf] = []

    def run(self, times: Sequence[Fraction]) -> list[mpmath.mpf]:
        period, delay = Fraction(self.case.period), Fraction(self.case.delay)
        found, waiting, sample, left = [], [], 0, list(times)
        while left:
            event = min([sample * period, *(time for time, _ in waiting)])
            while left and left[0] < event:
                found.append(self.value(self.moved(left.pop(0) - self.now)))
            self.state, self.now = self.moved(event - self.now), event
            if event == sample * period:
                # what arrives at this very moment is seen by the sample
                arrived = [value for time, value in waiting if time == event]
                self.held = arrived[-1] if arrived else self.held
                waiting = [one for one in waiting if one[0] != event]
                answer = self.answer()
                waiting.append((event + delay, answer))
                sample += 1
            for time, value in list(waiting):
                if time <= event:
                    self.held = value
                    waiting.remove((time, value))
        return found

    def moved(self, length: Fraction) -> mpmath.matrix:
        state = self.state.copy()
        state[self.order] = self.held + self.load
        if length not in self.motions:
            self.motions[length] = mpmath.expm(self.motion * mpf(length))
        return self.motions[length] * state

    def value(self, state: mpmath.matrix) -> mpmath.mpf:
        return mpmath.fsum(c * state[j] for j, c in enumerate(self.output)) + self.direct * (self.held + self.load)

    def answer(self) -> mpmath.mpf:
        above, below = ([mpf(c) for c in part] for part in self.case.controller)
        above = [mpmath.mpf(0)] * (len(below) - len(above)) + above
        self.errors.insert(0, self.ask - self.value(self.state))
        total = mpmath.fsum(c * e for c, e in zip(above, self.errors, strict=False))
        total -= mpmath.fsum(c * v for c, v in zip(below[1:], self.answers, strict=False))
        self.answers.insert(0, total / below[0])
        return self.answers[0]

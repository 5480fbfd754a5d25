"""Where a criterion looks: the blocks that it rests on, and the frequencies that decide it."""

from __future__ import annotations

from collections.abc import Callable, Iterator

from flint import arb, fmpq

from specgate.analysis.analyses import LoopAnalysis, Missing, Study
from specgate.approximations.opened import OpenedLoop
from specgate.approximations.spots import Spot, spots
from specgate.compliance.model.fact import greatest
from specgate.frequency.questions import Gain
from specgate.measures.measure import Arguments
from specgate.project.types import Subject
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.response.modes import Expansion, Mode, expand
from specgate.sampled.solution import SampledSolution
from specgate.systems.delayed import DelayedSolution
from specgate.systems.solution import Channel, LoopSolution
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record

COUNTS = fmpq(1, 50)
"""Part of the change from which on a mode counts."""
_BITS = 128
_AT_A_CROSSOVER = ("phase_margin", "phase_margin_lag", "phase_margin_lead", "delay_margin", "resonance_peak")
"""Measures that are read where another place is named for itself."""


@record
class Place:
    """A frequency that decides a criterion (rad/s), and what is there."""

    what: str
    frequency: Answer


def blocks(loop: LoopAnalysis, about: Subject) -> tuple[str, ...]:
    """Return the subsystems that a criterion rests on, in the order of the files: on its paths, or around its break."""
    solution = loop.solution
    if isinstance(solution, SampledSolution) or solution.algebraic_loop is not None:
        return loop.subsystems
    instances = set(_instances(loop, solution, about))
    named = {one.block.name for one in solution.wiring.instances if one.name in instances}
    return tuple(name for name in loop.subsystems if name in named)


def _instances(loop: LoopAnalysis, solution: LoopSolution | DelayedSolution, about: Subject) -> Iterator[str]:
    if about.kind == "response" and about.name is not None:
        for channel in loop.responses[about.name].channels:
            for component in channel.components:
                yield from component.instances
        return
    at = loop.loop.breaks[about.name].at if about.kind == "break" and about.name is not None else None
    for component in solution.components:
        if at is None or at in component.signals:
            yield from component.instances


def places(study: Study, about: Subject, arguments: Arguments, answer: Answer) -> Iterator[Place]:
    """Yield the frequencies that decide a criterion, where there are any. answer: what was read."""
    loop = study.loops[about.loop]
    if arguments.frequency is not None:
        yield Place("the frequency that is asked about", Answer.of_exact(arguments.frequency))
    at = (answer.at or {}).get("frequency")
    if arguments.measure not in _AT_A_CROSSOVER and isinstance(at, Answer) and at.absent is None:
        yield Place(f"what decides {arguments.measure}", at)
    if about.kind == "response" and about.name is not None:
        yield from _of_response(loop, about.name)
        return
    for name, opened in loop.opened.items():
        for crossover in crossovers(opened) if about.name in (None, name) else ():
            yield Place(f"a gain crossover at {name}", crossover)
    if about.kind == "loop":
        yield from _of_loop(loop, arguments, answer)


def crossovers(opened: OpenedLoop) -> tuple[Answer, ...]:
    """Return the gain crossovers of an opened loop; one that is not decided where the search ends without an answer."""
    try:
        return tuple(one.frequency for one in opened.gain_crossings)
    except OutOfWork as limit:
        return (Answer.undecided(limit.reason),)


def _of_loop(loop: LoopAnalysis, arguments: Arguments, answer: Answer) -> Iterator[Place]:
    """Yield the distance from the origin of the pole that a measure of all modes is read off."""
    solution = loop.solution
    if arguments.measure == "natural_frequency" and answer.absent is None:
        yield Place("the slowest oscillating mode", answer)
    if arguments.measure == "damping_ratio" and isinstance(solution, LoopSolution) and not solution.algebraic_loop:
        for one in _least_damped([one for one in spots(solution.determinant) if one.upper]):
            yield Place("the least damped mode", one.distance)


def _least_damped(found: list[Spot]) -> list[Spot]:
    with working_precision(_BITS):
        ratios = [one.decay.enclose(_BITS) / one.distance.enclose(_BITS) for one in found]
        return [one for one, own in zip(found, ratios, strict=True) if not any(other < own for other in ratios)]


def _of_response(loop: LoopAnalysis, name: str) -> Iterator[Place]:
    response = loop.responses[name]
    subject = response.subject
    if isinstance(subject, Missing):
        return
    if subject.gain is not None:
        yield from _of_gain(subject.gain, name)
    for channel in response.channels:
        if isinstance(channel, Channel):
            yield from _modes(channel.transfer.reduced())


def _of_gain(gain: Gain, name: str) -> Iterator[Place]:
    bandwidth, resonance = _asked(gain.bandwidth), _asked(gain.resonance_peak)
    if _may_be(bandwidth):
        yield Place(f"the bandwidth of {name}", bandwidth)
    at = resonance if resonance.absent is not None else (resonance.at or {}).get("frequency")
    if isinstance(at, Answer) and _may_be(at) and at.exact != 0:
        yield Place(f"the resonance peak of {name}", at)


def _asked(ask: Callable[[], Answer]) -> Answer:
    try:
        return ask()
    except OutOfWork as limit:
        return Answer.undecided(limit.reason)


def _may_be(answer: Answer) -> bool:
    """Whether there is a value, or nobody has shown that there is none."""
    return answer.absent is None or not answer.absent.proved


def _modes(channel: TransferFunction) -> Iterator[Place]:
    """Yield the distance from the origin of the fastest mode that counts in the response to a step."""
    if not channel.proper or not is_hurwitz(channel.denominator) or channel.denominator.degree() < 1:
        return
    expansion = expand(channel.numerator, channel.denominator, fmpq(1), _BITS)
    counting = [one.pole for one in expansion.modes if _counts(one, expansion)]
    found = [one.distance for one in spots(channel.denominator) if any(p.overlaps(one.at(_BITS)) for p in counting)]
    if found:
        yield Place("the fastest mode that counts", greatest(found))


def _counts(mode: Mode, expansion: Expansion) -> bool:
    """Whether a mode may have a part of the change that counts (of all modes together where there is no change)."""
    with working_precision(_BITS):
        own = _crest(mode)
        whole = abs(arb(expansion.offset)) if expansion.offset != 0 else sum(map(_crest, expansion.modes), arb(0))
        return not own < whole * arb(COUNTS)


def _crest(mode: Mode) -> arb:
    """Return a bound of a decaying mode at any time: t^j e^(-s t) is greatest at t = j/s."""
    decay = -mode.pole.real
    first, *higher = mode.coefficients
    total: arb = abs(first)
    for power, coefficient in enumerate(higher, start=1):
        total += abs(coefficient) * (power / (arb(1).exp() * decay)) ** power
    return total

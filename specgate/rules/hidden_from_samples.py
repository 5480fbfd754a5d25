"""A sampled loop has modes or movements that its samples do not show.

Between two samples nobody looks. An oscillation that makes whole half turns in a period looks the same at every sample:
it is not fed back, and what the sampler cannot see the controller cannot damp. A mode that cancels between the held
output and the sampler is out of reach as well. And a signal may be settled at its samples while it still swings
between them, as under a controller that cancels a zero of the sampled plant near z = -1. Put it right by another
sampling period, by damping the mode where it arises, or by a controller that leaves that zero alone.
"""

from __future__ import annotations

from collections.abc import Iterator

from flint import arb

from specgate.analysis.analyses import LoopAnalysis, ResponseAnalysis
from specgate.compliance.wording import modes, number
from specgate.measures.subjects import ResponseSubject
from specgate.response.piecewise import PiecewiseResponse
from specgate.rules.rule import Facts, Rule
from specgate.sampled.components import Component
from specgate.sampled.solution import SampledSolution
from specgate.systems.stability import is_hurwitz
from specgate.terms.enclosed import printed_short
from specgate.terms.findings import Finding
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Level

NAME = "hidden-from-samples"


def check(facts: Facts) -> Iterator[Finding]:
    """Report modes that samples do not see, and signals that settle between the samples much later than at them."""
    for loop in facts.analyses.loops.values():
        solution = loop.solution
        if not isinstance(solution, SampledSolution) or solution.algebraic_loop is not None:
            continue
        for component in solution.components:
            if component.cycle is not None:
                yield from _of_component(loop, component)
        for response in loop.responses.values():
            yield from _of_response(loop, response, solution)


def _of_component(loop: LoopAnalysis, component: Component) -> Iterator[Finding]:
    where = ", ".join(component.signals)
    if component.free.degree() > 0:
        decays = is_hurwitz(component.free)
        message = (
            f"{loop.loop.name}: {modes(component.free)} cancels between what is held and what is sampled in {where}: "
            f"the samples neither drive it nor see it, and it {'decays' if decays else 'does not decay'}"
        )
        yield _finding(loop, Level.NOTE if decays else Level.ERROR, message)
    for decay, half_turns in component.unseen:
        with working_precision(64):
            frequency = printed_short(arb.pi() * half_turns / component.period)
        turns = "half a turn" if half_turns == 1 else f"{half_turns} half turns"
        message = (
            f"{loop.loop.name}: an oscillation at {number(frequency)} rad/s makes {turns} in a period in {where}: the "
            "samples cannot see it, so that it is not fed back, and it "
            + ("decays by itself" if decay < 0 else "does not decay")
            + "; choose another period, or damp it where it arises"
        )
        yield _finding(loop, Level.WARNING if decay < 0 else Level.ERROR, message)


def _of_response(loop: LoopAnalysis, response: ResponseAnalysis, solution: SampledSolution) -> Iterator[Finding]:
    from specgate.sampled.between import settled_late
    from specgate.sampled.pieces import SampledPieces

    subject = response.subject
    if not isinstance(subject, ResponseSubject) or subject.void is not None or subject.kind != "step":
        return
    found = subject.response
    if not isinstance(found, PiecewiseResponse) or not isinstance(found.pieces, SampledPieces) or not found.settles:
        return
    late = settled_late(found, found.pieces, solution.period)
    if late is not None:
        sample, settled = (printed_short(arb(late[0])), printed_short(late[1]))
        message = (
            f"{loop.loop.name}.{response.response.name} is within 2 % of its change at all samples after "
            f"{number(sample)} s, but between them only from {number(settled)} s on: it oscillates unseen"
        )
        yield _finding(loop, Level.WARNING, message, response)


def _finding(loop: LoopAnalysis, level: Level, message: str, response: ResponseAnalysis | None = None) -> Finding:
    if response is None:
        return Finding(NAME, level, message, loop.loop.place, loop=loop.loop.name)
    declared = response.response
    return Finding(NAME, level, message, declared.place, loop=loop.loop.name, response=declared.name)


RULE = Rule(NAME, "Hidden from the samples", "error where it does not decay, else warning or note", check, __doc__)

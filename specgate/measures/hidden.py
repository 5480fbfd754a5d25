"""Modes of a loop that none of its channels shows."""

from __future__ import annotations

from specgate.measures.measure import Arguments, Measure, UnitRule
from specgate.measures.subjects import LoopSubject
from specgate.response.answers import Answer
from specgate.sampled.hidden import hidden_modes
from specgate.sampled.solution import SampledSolution
from specgate.systems.delayed import DelayedSolution


def _hidden_modes(subject: LoopSubject, _: Arguments) -> Answer:
    solution = subject.solution
    if solution.algebraic_loop is not None:
        return Answer.undecided(solution.algebraic_loop.reason)
    if isinstance(solution, SampledSolution):
        return hidden_modes(solution)
    if isinstance(solution, DelayedSolution):
        concealed = [component.hidden for component in solution.components]
        if not all(hidden.is_rational for hidden in concealed):
            return Answer.nothing("a loop with a dead time is hidden as a whole, with endlessly many modes")
        return Answer.of_exact(sum(hidden.degree for hidden in concealed))
    return Answer.of_exact(sum(component.hidden.degree() for component in solution.components))


ROWS = (
    Measure(
        name="hidden_modes",
        title="Hidden modes",
        subjects=("loop",),
        unit=UnitRule.COUNT,
        definition=(
            "Number of modes of the loop, with multiplicity, that no channel from an input to a signal shows: they "
            "cancel inside the loop and still live in the hardware. A response may hide more of them; each is listed."
        ),
        absent_when="the loop has an algebraic loop: its signals are not determined",
        source="modes that are not controllable or not observable (IEC 60050-351:2013, 351-42-22, 351-42-23)",
        method=(
            "exact: det P(s) against the reduced channels in rational arithmetic; of a sampled loop counted from both "
            "sides"
        ),
        read=_hidden_modes,
        always=True,
    ),
)

"""A project to its analyses: each loop instantiated and solved once, each declared response and break a subject.

What only loops with dead time or samplers need is imported where one is met: that is a thirtieth of another run.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from specgate.analysis.analyses import Analyses, BreakAnalysis, LoopAnalysis, Missing, ResponseAnalysis, Study
from specgate.analysis.responses import response_analysis, same
from specgate.analysis.wiring import subsystems_of
from specgate.frequency.questions import OpenLoop
from specgate.frequency.rational_loop import UNSTABLE, RationalLoop
from specgate.measures.reading import decided
from specgate.measures.subjects import BreakSubject, LoopSubject
from specgate.project.instantiate import InstantiatedLoop, instantiate
from specgate.project.parameters import Values, depends_on_pi, values
from specgate.project.types import Break, Loop, Project
from specgate.sampled.blocks import SampledWiring
from specgate.systems.delayed import DelayedOpenLoop, DelayedSolution, solved
from specgate.systems.solution import Cut, LoopSolution
from specgate.terms.unit import PRECISE_PI


def analyse(project: Project) -> Analyses:
    """Compute a project with its nominal values, and what rests on pi or on a ratio in dB a second time.

    Raises Fault for a project that its checks refuse.
    """
    nominal_values, precise_values = values(project), values(project, PRECISE_PI)
    built = instantiate(project, nominal_values)
    nominal = {name: loop_analysis(project, project.loops[name], one, nominal_values) for name, one in built.items()}
    rounded = [name for name, one in built.items() if _rests_on_pi(project.loops[name], one, nominal_values)]
    precise = instantiate(project, precise_values) if rounded else {}
    again = {
        name: _sharing(nominal[name], loop_analysis(project, project.loops[name], precise[name], precise_values))
        for name in rounded
    }
    return Analyses(Study(nominal_values, nominal), Study(precise_values, {**nominal, **again}))


def _sharing(nominal: LoopAnalysis, again: LoopAnalysis) -> LoopAnalysis:
    """Return `again` with the responses that more digits of pi do not change taken from `nominal`: searched once."""
    pairs = {name: (nominal.responses[name], response) for name, response in again.responses.items()}
    return replace(again, responses={name: one if same(one, other) else other for name, (one, other) in pairs.items()})


def _rests_on_pi(loop: Loop, built: InstantiatedLoop, known: Values) -> bool:
    return built.depends_on_pi or any(
        depends_on_pi(value.expression, known)
        for response in loop.responses.values()
        for excitation in response.excitations
        for value in excitation.quantities.values()
    )


def loop_analysis(project: Project, loop: Loop, built: InstantiatedLoop, known: Values) -> LoopAnalysis:
    """Solve a loop and return it with its responses and breaks as subjects."""
    if built.sampled is not None:
        return _sampled(project, loop, built, known, built.sampled)
    solution = solved(built.wiring)
    return LoopAnalysis(
        loop=loop,
        built=built,
        subsystems=subsystems_of(project, loop),
        signals=built.signals,
        solution=solution,
        subject=LoopSubject(solution) if built.unsupported is None else Missing(built.unsupported, later=True),
        responses={
            name: response_analysis(built.signals, response, solution, built.responses.get(name), known)
            for name, response in loop.responses.items()
        },
        breaks=_breaks(loop, solution, built),
    )


def _sampled(
    project: Project, loop: Loop, built: InstantiatedLoop, known: Values, wiring: SampledWiring
) -> LoopAnalysis:
    from specgate.analysis.sampled import sampled_breaks, sampled_responses
    from specgate.sampled.solution import solve_sampled

    try:
        solution = solve_sampled(wiring)
    except ValueError as reason:
        return _unanswered(project, loop, built, str(reason))
    return LoopAnalysis(
        loop=loop,
        built=built,
        subsystems=subsystems_of(project, loop),
        signals=built.signals,
        solution=solution,
        subject=LoopSubject(solution) if built.unsupported is None else Missing(built.unsupported, later=True),
        responses=sampled_responses(loop, built.signals, solution, built.responses, known),
        breaks=sampled_breaks(loop, solution, built.breaks),
    )


def _unanswered(project: Project, loop: Loop, built: InstantiatedLoop, reason: str) -> LoopAnalysis:
    missing = Missing(reason, later=True)
    return LoopAnalysis(
        loop=loop,
        built=built,
        subsystems=subsystems_of(project, loop),
        signals=built.signals,
        solution=solved(built.wiring),
        subject=missing,
        responses={
            name: ResponseAnalysis(one, built.signals.unit(one.to), missing) for name, one in loop.responses.items()
        },
        breaks={name: BreakAnalysis(one, missing) for name, one in loop.breaks.items()},
    )


def _breaks(
    loop: Loop, solution: LoopSolution | DelayedSolution, built: InstantiatedLoop
) -> Mapping[str, BreakAnalysis]:
    return {
        name: break_analysis(one, built.cuts[name], solution, built.breaks.get(name))
        for name, one in loop.breaks.items()
    }


def break_analysis(
    declared: Break, cut: Cut, solution: LoopSolution | DelayedSolution, unsupported: str | None
) -> BreakAnalysis:
    """Return the loop opened at a break, or why it is not. unsupported: why this version does not answer it."""
    if unsupported is not None:
        return BreakAnalysis(declared, Missing(unsupported, later=True))
    if solution.algebraic_loop is not None:
        return BreakAnalysis(declared, Missing(solution.algebraic_loop.reason))
    opened = solution.open_at(declared.at, cut)
    if opened.algebraic_loop is not None:
        return BreakAnalysis(declared, Missing(opened.algebraic_loop.reason), opened)
    if isinstance(opened, DelayedOpenLoop):
        subject = BreakSubject(opened.transfer, decided(opened.stable), _late(opened, _unstable(cut)))
    else:
        loop = RationalLoop(opened.transfer, opened.stable, unstable=_unstable(cut))
        subject = BreakSubject(opened.transfer, decided(opened.stable), loop)
    return BreakAnalysis(declared, subject, opened)


def _late(opened: DelayedOpenLoop, unstable: str) -> OpenLoop:
    """Return an open loop over frequency: with the dead time in it, or without where none is left in L."""
    rational = opened.reduced.rational
    if rational is not None and opened.stable is not None:
        return RationalLoop(rational, opened.stable, unstable=unstable)
    from specgate.delays.open_loop import DelayedLoop

    return DelayedLoop(opened.reduced, opened.stable, unstable)


def _unstable(cut: Cut) -> str:
    return f"with {' and '.join(cut.held)} held open, {UNSTABLE}" if cut.held else UNSTABLE

"""A loop with a sampled block: its responses and breaks as the subjects that measures are read from."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from flint import fmpq

from specgate.analysis.analyses import BreakAnalysis, Missing, ResponseAnalysis
from specgate.analysis.driven import ERROR_JUMPS, NOISE, SEVERAL, improper, plain, reference_of, void
from specgate.frequency.questions import Gain
from specgate.frequency.rational_gain import RationalGain
from specgate.measures.reading import decided
from specgate.measures.subjects import BreakSubject, ResponseSubject
from specgate.project.excitations import evaluated
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.project.types import Break, Loop, Response
from specgate.response.answers import Absent
from specgate.response.counted import Counted
from specgate.response.inputs import Input, respond
from specgate.response.piecewise import PiecewiseResponse
from specgate.response.questions import TimeResponse
from specgate.sampled.channel import SampledChannel, channel, delayed, pieces
from specgate.sampled.drive import drive
from specgate.sampled.following import lasting_error
from specgate.sampled.gain import SampledGain
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import SampledSolution, SlowTransfer
from specgate.systems.blocks import LinearForm, SignalRef

BEYOND = "a sampled block is in the loop"
_ONE_USE = "a break of one use, or with other loops open, is not answered in a sampled loop by this version"
_ONE = fmpq(1)


def sampled_responses(
    loop: Loop, signals: LoopSignals, solution: SampledSolution, unsupported: Mapping[str, str], known: Values
) -> Mapping[str, ResponseAnalysis]:
    """Return the responses of a sampled loop, by name."""
    return {
        name: _response(signals, one, solution, unsupported.get(name), known) for name, one in loop.responses.items()
    }


def sampled_breaks(
    loop: Loop, solution: SampledSolution, unsupported: Mapping[str, str]
) -> Mapping[str, BreakAnalysis]:
    """Return the breaks of a sampled loop, by name."""
    return {name: _break(one, solution, unsupported.get(name)) for name, one in loop.breaks.items()}


def _response(
    signals: LoopSignals, response: Response, solution: SampledSolution, unsupported: str | None, known: Values
) -> ResponseAnalysis:
    unit = signals.unit(response.to)
    if unsupported is not None:
        return ResponseAnalysis(response, unit, Missing(unsupported, later=True))
    if solution.algebraic_loop is not None:
        return ResponseAnalysis(response, unit, Missing(solution.algebraic_loop.reason))
    inputs = tuple(evaluated(one, known) for one in response.excitations)
    sources = tuple(dict.fromkeys(one.source for one in response.excitations))
    form = LinearForm(((_ONE, SignalRef(response.to)),))
    single = {source: channel(solution, [source], form) for source in sources}
    slow = {source: one.slow(source) for source, one in single.items()}
    steep = next((source for source, one in slow.items() if not one.proper), None)
    if steep is not None:
        reason = improper(steep, response.to, slow[steep].numerator.degree(), slow[steep].denominator.degree())
        return ResponseAnalysis(response, unit, Missing(reason), improper=True)
    driven = tuple(zip((one.source for one in response.excitations), inputs, strict=True))
    only = slow[sources[0]]
    error = _error(signals, response, solution, sources)
    try:
        over_time = _in_time(channel(solution, sources, form), driven)
        error_over_time = error if isinstance(error, Absent) else _in_time(error, driven)
    except ValueError as reason:
        return ResponseAnalysis(response, unit, Missing(str(reason), later=True))
    subject = ResponseSubject(
        SlowTransfer(only) if len(sources) == 1 else SEVERAL,
        inputs[0].quantities["size"] if plain(inputs) else fmpq(1),
        over_time,
        error_over_time,
        next((void(source, response.to) for source, one in single.items() if one.hides_instability), None),
        _gain(single[sources[0]]) if len(sources) == 1 else None,
        inputs,
        BEYOND,
        None if isinstance(error, Absent) or len(inputs) > 1 or not error.sampled else lasting_error(error, inputs[0]),
    )
    return ResponseAnalysis(response, unit, subject)


def _in_time(one: SampledChannel, driven: Sequence[tuple[str, Input]]) -> TimeResponse | Absent:
    """Return the response; without a sampled block on the way it is that of the blocks in s."""
    if any(given.kind == "white_noise" for _, given in driven):
        return NOISE
    late = delayed(one.solution, driven)
    if not one.sampled:
        return respond([(one.continuous(source), given) for source, given in late])
    found = pieces(one, drive(late))
    if found.undefined is not None:
        return found.undefined
    response = PiecewiseResponse(found)
    since = max(given.since for _, given in driven)
    return response if since == 0 else Counted(response, since)


def _gain(one: SampledChannel) -> Gain | None:
    """Return the channel over frequency; without a sampled block on the way it is that of the blocks in s."""
    if one.sampled:
        return SampledGain(one)
    return None if one.solution.wiring.late else RationalGain(one.continuous(one.sources[0]))


def _error(
    signals: LoopSignals, response: Response, solution: SampledSolution, sources: Sequence[str]
) -> SampledChannel | Absent:
    name = reference_of(response.reference, list(sources), response.to, signals)
    if isinstance(name, Absent):
        return name
    reference = () if name == "0" else ((_ONE, SignalRef(name)),)
    one = channel(solution, sources, LinearForm((*reference, (-_ONE, SignalRef(response.to)))))
    return one if all(one.slow(source).proper for source in sources) else ERROR_JUMPS


def _break(declared: Break, solution: SampledSolution, unsupported: str | None) -> BreakAnalysis:
    if unsupported is not None:
        return BreakAnalysis(declared, Missing(unsupported, later=True))
    if solution.algebraic_loop is not None:
        return BreakAnalysis(declared, Missing(solution.algebraic_loop.reason))
    if declared.into is not None or declared.with_open:
        return BreakAnalysis(declared, Missing(_ONE_USE, later=True))
    found = opened(solution, declared.at)
    if found.algebraic_loop is not None:
        return BreakAnalysis(declared, Missing(found.algebraic_loop.reason), found)
    if found.slow is None or found.reason is not None:
        return BreakAnalysis(declared, Missing(found.reason or "", later=True))
    loop = over_frequency(found)
    subject = BreakSubject(SlowTransfer(found.slow), decided(found.stable), loop, on_request=("delay_margin",))
    return BreakAnalysis(declared, subject, found)

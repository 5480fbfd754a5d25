"""A declared response of a solved loop as the subject that measures are read from."""

from __future__ import annotations

from flint import fmpq_poly

from specgate.analysis.analyses import Missing, ResponseAnalysis
from specgate.frequency.rational_gain import RationalGain
from specgate.measures.subjects import ResponseSubject
from specgate.project.parameters import Values, evaluate
from specgate.project.signals import LoopSignals
from specgate.project.types import Response
from specgate.response.answers import Absent
from specgate.response.step import StepResponse
from specgate.systems.solution import Channel, LoopSolution
from specgate.systems.transfer import TransferFunction
from specgate.terms.unit import Unit

_NOTHING = TransferFunction(fmpq_poly([0]), fmpq_poly([1]))
_ITSELF = TransferFunction(fmpq_poly([1]), fmpq_poly([1]))


def response_analysis(
    signals: LoopSignals, response: Response, solution: LoopSolution, unsupported: str | None, known: Values
) -> ResponseAnalysis:
    """Return a response with its subject, or why there is none.

    unsupported: why this version does not answer it (dead time, a sampled block or another input on the way).
    """
    unit = signals.unit(response.to)
    if unsupported is not None:
        return ResponseAnalysis(response, unit, Missing(unsupported, later=True))
    if solution.algebraic_loop is not None:
        return ResponseAnalysis(response, unit, Missing(solution.algebraic_loop.reason))
    driven = response.excitations[0]
    channel = solution.channel(driven.source, response.to)
    if not channel.transfer.proper:
        return ResponseAnalysis(response, unit, Missing(_improper(channel)), channel)
    size = evaluate(driven.quantities["size"], known)
    error = _error(response, solution, channel, signals.unit(driven.source), unit)
    subject = ResponseSubject(
        channel.transfer,
        size,
        StepResponse(channel.transfer.numerator, channel.transfer.denominator, size),
        error if isinstance(error, Absent) else StepResponse(error.numerator, error.denominator, size),
        _void(channel),
        RationalGain(channel.transfer),
    )
    return ResponseAnalysis(response, unit, subject, channel)


def same(one: ResponseAnalysis, other: ResponseAnalysis) -> bool:
    """Whether two studies look at the same response, so that what is found of one holds for the other."""
    first, second = one.subject, other.subject
    if isinstance(first, Missing) or isinstance(second, Missing):
        return False
    parts = zip((first.response, first.error), (second.response, second.error), strict=True)
    return (first.channel, first.size, first.void) == (second.channel, second.size, second.void) and all(
        _origin(part) == _origin(again) for part, again in parts
    )


def _origin(response: StepResponse | Absent) -> object:
    """Return what a response is computed from."""
    return response if isinstance(response, Absent) else (response.numerator, response.denominator, response.size)


def _improper(channel: Channel) -> str:
    reduced = channel.transfer.reduced()
    return (
        f"from {channel.source} to {channel.target} the numerator's degree {reduced.numerator.degree()} exceeds the "
        f"denominator's {reduced.denominator.degree()}: a step has no response through an ideal derivative; give the "
        "derivative a lag"
    )


def _void(channel: Channel) -> Absent | None:
    if not channel.hides_instability:
        return None
    return Absent(f"a mode that does not decay is hidden on the way from {channel.source} to {channel.target}")


def _error(
    response: Response, solution: LoopSolution, channel: Channel, driven: Unit, unit: Unit
) -> TransferFunction | Absent:
    """Return the channel from the input to reference minus signal, or why there is none."""
    if response.reference is None and driven.dimension != unit.dimension:
        return Absent(
            f"{channel.source} ({driven.symbol}) and {channel.target} ({unit.symbol}) are not of one dimension: "
            "name the signal that the error is measured from as `reference`",
            proved=False,
        )
    reference = _reference(response.reference or channel.source, solution, channel)
    error = TransferFunction(
        reference.numerator * channel.transfer.denominator - channel.transfer.numerator * reference.denominator,
        reference.denominator * channel.transfer.denominator,
    )
    if not error.reduced().proper:
        return Absent("the error jumps without limit: the reference is differentiated", proved=False)
    return error


def _reference(name: str, solution: LoopSolution, channel: Channel) -> TransferFunction:
    """Return the channel from the driven input to the reference: an input, a signal, or `0`."""
    if name == channel.source:
        return _ITSELF
    if name == "0" or name in solution.wiring.inputs:
        return _NOTHING
    return solution.channel(channel.source, name).transfer

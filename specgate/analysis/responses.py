"""A declared response of a solved loop as the subject that measures are read from."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from flint import fmpq, fmpq_poly

from specgate.analysis.analyses import Missing, ResponseAnalysis
from specgate.analysis.driven import ERROR_JUMPS, NOISE, SEVERAL, UNASKED, beyond, improper, plain, reference_of, void
from specgate.frequency.rational_gain import RationalGain
from specgate.measures.subjects import ResponseSubject
from specgate.project.excitations import evaluated
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.project.types import Response
from specgate.response.answers import Absent
from specgate.response.inputs import Input, respond
from specgate.response.questions import TimeResponse
from specgate.systems.blocks import LinearForm
from specgate.systems.delayed import DelayedSolution
from specgate.systems.solution import Channel, LoopSolution
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record
from specgate.terms.unit import Unit

_NOTHING = TransferFunction(fmpq_poly([0]), fmpq_poly([1]))
_ITSELF = TransferFunction(fmpq_poly([1]), fmpq_poly([1]))

Errors = tuple[TransferFunction, ...] | Absent


@record
class Unnamed:
    """A signal that a loop does not declare: what it is made of, and its unit."""

    form: LinearForm
    unit: Unit


def response_analysis(
    signals: LoopSignals,
    response: Response,
    solution: LoopSolution | DelayedSolution,
    unsupported: str | None,
    known: Values,
) -> ResponseAnalysis:
    """Return a response with its subject, or why there is none.

    unsupported: why this version does not answer it (a sampled block on the way).
    """
    unit = signals.unit(response.to)
    if unsupported is not None:
        return ResponseAnalysis(response, unit, Missing(unsupported, later=True))
    if solution.algebraic_loop is not None:
        return ResponseAnalysis(response, unit, Missing(solution.algebraic_loop.reason))
    if isinstance(solution, DelayedSolution):
        from specgate.analysis.delayed import delayed_response

        return delayed_response(signals, response, solution, known)
    channels = {one.source: solution.channel(one.source, response.to) for one in response.excitations}
    return _driven(signals, response, unit, solution, channels, known)


def response_at(
    signals: LoopSignals, response: Response, at: Unnamed, solution: LoopSolution, known: Values
) -> ResponseAnalysis:
    """Return the same of a signal that the loop does not declare, which `response.to` names; no error is measured."""
    if solution.algebraic_loop is not None:
        return ResponseAnalysis(response, at.unit, Missing(solution.algebraic_loop.reason))
    sources = [one.source for one in response.excitations]
    channels = {source: solution.channel_to(source, response.to, at.form) for source in sources}
    return _driven(signals, replace(response, reference=UNASKED), at.unit, solution, channels, known)


def _driven(
    signals: LoopSignals,
    response: Response,
    unit: Unit,
    solution: LoopSolution,
    channels: Mapping[str, Channel],
    known: Values,
) -> ResponseAnalysis:
    inputs = tuple(evaluated(excitation, known) for excitation in response.excitations)
    driven = [channels[one.source] for one in response.excitations]
    distinct = tuple(channels.values())
    over_time = _response([channel.transfer for channel in driven], inputs)
    jumping = [channel for channel in driven if not channel.transfer.proper]
    if isinstance(over_time, Absent) and over_time is not NOISE:
        lost = not over_time.proved
        reason = over_time.reason if lost else _improper((jumping or driven)[0])
        return ResponseAnalysis(response, unit, Missing(reason), distinct, improper=not lost)
    errors = _errors(response, solution, driven, signals)
    subject = ResponseSubject(
        driven[0].transfer if len(driven) == 1 else SEVERAL,
        inputs[0].quantities["size"] if plain(inputs) else fmpq(1),
        over_time,
        errors if isinstance(errors, Absent) else _error(errors, inputs),
        next((void for channel in distinct if (void := _void(channel)) is not None), None),
        RationalGain(driven[0].transfer) if len(driven) == 1 else None,
        inputs,
        None if plain(inputs) else beyond(inputs),
    )
    origin = (tuple(channel.transfer for channel in driven), inputs, errors)
    return ResponseAnalysis(response, unit, subject, distinct, origin)


def same(one: ResponseAnalysis, other: ResponseAnalysis) -> bool:
    """Whether two studies look at the same response, so that what is found of one holds for the other."""
    first, second = one.subject, other.subject
    if isinstance(first, Missing) or isinstance(second, Missing) or one.origin is None:
        return False
    return one.origin == other.origin and first.void == second.void


def _response(channels: Sequence[TransferFunction], inputs: Sequence[Input]) -> TimeResponse | Absent:
    if any(given.kind == "white_noise" for given in inputs):
        return NOISE
    return respond(list(zip(channels, inputs, strict=True)))


def _improper(channel: Channel) -> str:
    reduced = channel.transfer.reduced()
    return improper(channel.source, channel.target, reduced.numerator.degree(), reduced.denominator.degree())


def _void(channel: Channel) -> Absent | None:
    return void(channel.source, channel.target) if channel.hides_instability else None


# --- the error ------------------------------------------------------------------------------------------------


def _error(errors: Sequence[TransferFunction], inputs: Sequence[Input]) -> TimeResponse | Absent:
    found = _response(errors, inputs)
    if isinstance(found, Absent) and found.proved:
        return ERROR_JUMPS
    return found


def _errors(response: Response, solution: LoopSolution, driven: Sequence[Channel], signals: LoopSignals) -> Errors:
    """Return the channels from the inputs to reference minus signal, or why there are none."""
    name = reference_of(
        response.reference, list(dict.fromkeys(channel.source for channel in driven)), response.to, signals
    )
    if isinstance(name, Absent):
        return name
    errors = []
    for channel in driven:
        reference = _reference(name, solution, channel)
        error = TransferFunction(
            reference.numerator * channel.transfer.denominator - channel.transfer.numerator * reference.denominator,
            reference.denominator * channel.transfer.denominator,
        )
        if not error.reduced().proper:
            return ERROR_JUMPS
        errors.append(error)
    return tuple(errors)


def _reference(name: str, solution: LoopSolution, channel: Channel) -> TransferFunction:
    """Return the channel from the driven input to the reference: an input, a signal, or `0`."""
    if name == channel.source:
        return _ITSELF
    if name == "0" or name in solution.wiring.inputs:
        return _NOTHING
    return solution.channel(channel.source, name).transfer

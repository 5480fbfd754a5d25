"""A declared response of a solved loop as the subject that measures are read from."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq, fmpq_poly

from specgate.analysis.analyses import Missing, ResponseAnalysis
from specgate.frequency.rational_gain import RationalGain
from specgate.measures.subjects import ResponseSubject
from specgate.project.excitations import evaluated
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.project.types import Response
from specgate.response.answers import Absent
from specgate.response.inputs import Input, respond
from specgate.response.questions import TimeResponse
from specgate.systems.solution import Channel, LoopSolution
from specgate.systems.transfer import TransferFunction

_NOTHING = TransferFunction(fmpq_poly([0]), fmpq_poly([1]))
_ITSELF = TransferFunction(fmpq_poly([1]), fmpq_poly([1]))
_NOISE = Absent("white noise has no course in time: only its standard deviation is known", proved=False)
_SEVERAL = Absent("several inputs are driven at once: there is no single channel", proved=False)

Errors = tuple[TransferFunction, ...] | Absent


def response_analysis(
    signals: LoopSignals, response: Response, solution: LoopSolution, unsupported: str | None, known: Values
) -> ResponseAnalysis:
    """Return a response with its subject, or why there is none.

    unsupported: why this version does not answer it (dead time or a sampled block on the way).
    """
    unit = signals.unit(response.to)
    if unsupported is not None:
        return ResponseAnalysis(response, unit, Missing(unsupported, later=True))
    if solution.algebraic_loop is not None:
        return ResponseAnalysis(response, unit, Missing(solution.algebraic_loop.reason))
    inputs = tuple(evaluated(excitation, known) for excitation in response.excitations)
    channels = {one.source: solution.channel(one.source, response.to) for one in response.excitations}
    driven = [channels[one.source] for one in response.excitations]
    distinct = tuple(channels.values())
    over_time = _response([channel.transfer for channel in driven], inputs)
    improper = [channel for channel in driven if not channel.transfer.proper]
    if isinstance(over_time, Absent) and over_time is not _NOISE:
        lost = not over_time.proved
        reason = over_time.reason if lost else _improper((improper or driven)[0], inputs)
        return ResponseAnalysis(response, unit, Missing(reason), distinct, improper=not lost)
    errors = _errors(response, solution, driven, signals)
    subject = ResponseSubject(
        driven[0].transfer if len(driven) == 1 else _SEVERAL,
        inputs[0].quantities["size"] if _plain(inputs) else fmpq(1),
        over_time,
        errors if isinstance(errors, Absent) else _error(errors, inputs),
        next((void for channel in distinct if (void := _void(channel)) is not None), None),
        RationalGain(driven[0].transfer) if len(driven) == 1 else None,
        inputs,
        None if _plain(inputs) else _beyond(inputs),
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
        return _NOISE
    return respond(list(zip(channels, inputs, strict=True)))


def _plain(inputs: Sequence[Input]) -> bool:
    """Whether a response is to a single step."""
    return [given.kind for given in inputs] == ["step"] and inputs[0].begin == 0


def _beyond(inputs: Sequence[Input]) -> str:
    """Say why formulas for a step do not apply."""
    if len(inputs) > 1:
        return "several inputs are driven at once"
    return f"the input is {inputs[0].kind.replace('_', ' ')}" if inputs[0].kind != "step" else "the step is delayed"


def _improper(channel: Channel, inputs: Sequence[Input]) -> str:
    reduced = channel.transfer.reduced()
    above, below = reduced.numerator.degree(), reduced.denominator.degree()
    way = f"from {channel.source} to {channel.target} the numerator's degree {above} "
    if above > below:
        return (
            f"{way}exceeds the denominator's {below}: a step has no response through an ideal derivative; give the "
            "derivative a lag"
        )
    return f"{way}is the denominator's: an impulse would pass straight through; give the channel a lag"


def _void(channel: Channel) -> Absent | None:
    if not channel.hides_instability:
        return None
    return Absent(f"a mode that does not decay is hidden on the way from {channel.source} to {channel.target}")


# --- the error ------------------------------------------------------------------------------------------------


def _error(errors: Sequence[TransferFunction], inputs: Sequence[Input]) -> TimeResponse | Absent:
    found = _response(errors, inputs)
    if isinstance(found, Absent) and found.proved:
        return Absent("the error jumps without limit: the reference is differentiated", proved=False)
    return found


def _errors(response: Response, solution: LoopSolution, driven: Sequence[Channel], signals: LoopSignals) -> Errors:
    """Return the channels from the inputs to reference minus signal, or why there are none.

    Without a `reference` it is the input that is driven, of several the one of the signal's dimension.
    """
    unit = signals.unit(response.to)
    name = response.reference
    if name is None:
        sources = dict.fromkeys(channel.source for channel in driven)
        fitting = [source for source in sources if signals.unit(source).dimension == unit.dimension]
        if len(fitting) != 1:
            return Absent(_no_reference(list(sources), response.to, signals, many=len(fitting) > 1), proved=False)
        name = fitting[0]
    errors = []
    for channel in driven:
        reference = _reference(name, solution, channel)
        error = TransferFunction(
            reference.numerator * channel.transfer.denominator - channel.transfer.numerator * reference.denominator,
            reference.denominator * channel.transfer.denominator,
        )
        if not error.reduced().proper:
            return Absent("the error jumps without limit: the reference is differentiated", proved=False)
        errors.append(error)
    return tuple(errors)


def _no_reference(sources: Sequence[str], to: str, signals: LoopSignals, *, many: bool) -> str:
    named = " and ".join(f"{source} ({signals.unit(source).symbol})" for source in sources)
    if many:
        return f"the error may be measured from {named}: name one, or a signal, as `reference`"
    which = "are not of one dimension" if len(sources) == 1 else "have no dimension in common"
    return (
        f"{named} and {to} ({signals.unit(to).symbol}) {which}: "
        "name the signal that the error is measured from as `reference`"
    )


def _reference(name: str, solution: LoopSolution, channel: Channel) -> TransferFunction:
    """Return the channel from the driven input to the reference: an input, a signal, or `0`."""
    if name == channel.source:
        return _ITSELF
    if name == "0" or name in solution.wiring.inputs:
        return _NOTHING
    return solution.channel(channel.source, name).transfer

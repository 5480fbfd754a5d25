"""A declared response of a loop with dead times as the subject that measures are read from."""

from __future__ import annotations

from collections.abc import Sequence

from flint import fmpq

from specgate.analysis.analyses import Missing, ResponseAnalysis
from specgate.analysis.driven import ERROR_JUMPS, NOISE, SEVERAL, beyond, improper, plain, reference_of, void
from specgate.delays.gain import DelayedGain
from specgate.delays.inputs import respond_late
from specgate.frequency.questions import Gain
from specgate.frequency.rational_gain import RationalGain
from specgate.measures.subjects import ResponseSubject
from specgate.project.excitations import evaluated
from specgate.project.parameters import Values
from specgate.project.signals import LoopSignals
from specgate.project.types import Response
from specgate.response.answers import Absent
from specgate.response.inputs import Input
from specgate.response.questions import TimeResponse
from specgate.systems.delayed import DelayedChannel, DelayedSolution
from specgate.systems.delayed_network import DelayedTransfer

Errors = tuple[DelayedTransfer, ...] | Absent


def delayed_response(
    signals: LoopSignals, response: Response, solution: DelayedSolution, known: Values
) -> ResponseAnalysis:
    """Return a response of a well-posed loop with its subject, or why there is none."""
    unit = signals.unit(response.to)
    inputs = tuple(evaluated(excitation, known) for excitation in response.excitations)
    sources = [one.source for one in response.excitations]
    distinct = tuple(solution.channel(source, response.to) for source in dict.fromkeys(sources))
    shared = solution.together([({response.to: fmpq(1)}, source) for source in sources])
    over_time = _in_time(shared, inputs)
    if isinstance(over_time, Absent) and over_time is not NOISE:
        lost = not over_time.proved
        reason = over_time.reason if lost else _improper(distinct)
        return ResponseAnalysis(response, unit, Missing(reason), distinct, improper=not lost)
    errors = _errors(response, solution, sources, signals)
    single = distinct[0].transfer if len(sources) == 1 else None
    rational = None if single is None else single.rational
    subject = ResponseSubject(
        (rational or single) if single is not None else SEVERAL,
        inputs[0].quantities["size"] if plain(inputs) else fmpq(1),
        over_time,
        errors if isinstance(errors, Absent) else _error(errors, inputs),
        next((hidden for channel in distinct if (hidden := _void(channel)) is not None), None),
        _gain(single),
        inputs,
        _beyond(inputs, single, rational is not None),
    )
    return ResponseAnalysis(response, unit, subject, distinct, (shared, inputs, errors))


def _in_time(channels: Sequence[DelayedTransfer], inputs: Sequence[Input]) -> TimeResponse | Absent:
    if any(given.kind == "white_noise" for given in inputs):
        return NOISE
    return respond_late(list(zip(channels, inputs, strict=True)))


def _gain(single: DelayedTransfer | None) -> Gain | None:
    """Return the channel over frequency."""
    if single is None:
        return None
    return DelayedGain(single) if single.rational is None else RationalGain(single.rational)


def _beyond(inputs: Sequence[Input], single: DelayedTransfer | None, rational: bool) -> str | None:
    """Say why formulas for step responses of rational channels do not apply; None where they may."""
    if not plain(inputs) or single is None:
        return beyond(inputs)
    return None if rational else "there is a dead time on the way, in the loop or before it"


def _improper(channels: Sequence[DelayedChannel]) -> str:
    worst = next((one for one in channels if not one.transfer.proper), channels[0])
    above, below = worst.transfer.numerator.degree, worst.transfer.denominator.undelayed.degree()
    return improper(worst.source, worst.target, above, below)


def _void(channel: DelayedChannel) -> Absent | None:
    hides = channel.hides_instability
    if hides is None:
        return Absent(f"whether a mode on the way to {channel.target} grows unseen was not decided", proved=False)
    return void(channel.source, channel.target) if hides else None


def _error(errors: Sequence[DelayedTransfer], inputs: Sequence[Input]) -> TimeResponse | Absent:
    found = _in_time(errors, inputs)
    return ERROR_JUMPS if isinstance(found, Absent) and found.proved else found


def _errors(response: Response, solution: DelayedSolution, sources: Sequence[str], signals: LoopSignals) -> Errors:
    """Return the channels from the inputs to reference minus signal, or why there are none."""
    reference = reference_of(response.reference, list(dict.fromkeys(sources)), response.to, signals)
    if isinstance(reference, Absent):
        return reference
    combination = {response.to: fmpq(-1)}
    if reference != "0":
        combination[reference] = combination.get(reference, fmpq(0)) + 1
    errors = solution.together([(combination, source) for source in sources])
    return errors if all(error.proper for error in errors) else ERROR_JUMPS

"""Loops, responses and breaks as they stand in a Review."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace
from types import MappingProxyType

from flint import arb, fmpq, fmpq_poly

from specgate.analysis.analyses import BreakAnalysis, LoopAnalysis, Missing, ResponseAnalysis
from specgate.analysis.arguments import ALWAYS, ALWAYS_SAID
from specgate.compliance.readings import Reading
from specgate.compliance.units import default_unit, smallness
from specgate.compliance.wording import hides
from specgate.frequency.questions import OpenLoop
from specgate.measures.inputs import REPORTED
from specgate.measures.measure import Arguments, Measure, Reader, SubjectKind
from specgate.measures.subjects import BreakSubject, ResponseSubject, Subject
from specgate.measures.table import MEASURES
from specgate.project.types import Response
from specgate.response.answers import Absent
from specgate.review import sampled
from specgate.review.frequency_curve import frequency_curve
from specgate.review.printing import RADIAN_PER_SECOND, coefficients, place_of, poles, result, terms
from specgate.review.types import (
    BreakReview,
    CrossingReview,
    Curve,
    DelayedTerm,
    HiddenMode,
    LoopReview,
    MeasureResult,
    ResponseReview,
)
from specgate.review.wanted import Wanted
from specgate.sampled.opened import SampledOpening
from specgate.sampled.solution import SampledSolution, SlowTransfer
from specgate.systems.delayed import DelayedChannel
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.quasi import Quasi
from specgate.systems.roots import certified_roots
from specgate.systems.solution import Channel
from specgate.systems.transfer import TransferFunction
from specgate.terms.enclosed import printed_short
from specgate.terms.unit import ONE, Unit
from specgate.terms.units import UnitTable

_SHOWN = 128
"""Bits at which poles are certified for printing."""

CROSSED = {"gain": UnitTable.standard().parse("deg"), "phase": UnitTable.standard().parse("dB")}
"""What is left at a crossing is a phase where the gain is one, and a gain where the phase is -180 deg."""

_POINTS = 256
"""Points of a curve: two pixels each in the widest plot; the format allows 400."""


def loop(
    found: LoopAnalysis, again: LoopAnalysis, wanted: Wanted, asked: Mapping[str, Sequence[fmpq]] = MappingProxyType({})
) -> LoopReview:
    """Print one loop with everything that is reported on it, asked for or not.

    again: the same loop with more digits of pi. asked: frequencies that requirements name, by break.
    """
    declared = found.loop
    reason = _reason(found)
    in_z = found.solution if isinstance(found.solution, SampledSolution) and not reason else None
    modes = None if reason or isinstance(found.solution, SampledSolution) else found.solution.determinant
    modes = modes.polynomial or modes if isinstance(modes, Quasi) else modes
    rational = modes if isinstance(modes, fmpq_poly) else in_z.exact if in_z else None
    return LoopReview(
        title=declared.title,
        wiring={key: signal.as_written for key, signal in declared.signals.items()},
        inputs={key: one.unit.symbol for key, one in declared.inputs.items()},
        signal_units={key: found.signals.unit(key).symbol for key in declared.signals},
        rest={key: value.as_written for key, value in declared.rest.items()},
        subsystems=found.subsystems,
        characteristic_polynomial=() if rational is None else coefficients(rational),
        poles=poles(sampled.roots(in_z) if in_z else () if rational is None else certified_roots(rational, _SHOWN)),
        hidden_modes=tuple(_hidden(found)),
        measures=() if reason else _measures("loop", found.subject, again.subject, ONE, wanted),
        responses={key: _response(one, again.responses[key], wanted) for key, one in found.responses.items()},
        breaks={key: _break(one, again.breaks[key], wanted, asked.get(key, ())) for key, one in found.breaks.items()},
        in_z=None if in_z is None else sampled.loop_in_z(in_z),
        characteristic_terms=terms(modes) if isinstance(modes, Quasi) else None,
        reason=reason,
    )


def _break(found: BreakAnalysis, again: BreakAnalysis, wanted: Wanted, asked: Sequence[fmpq]) -> BreakReview:
    if isinstance(found.subject, Missing):
        return BreakReview(found.declared.at, (), reason=found.subject.reason)
    loop = found.subject.loop
    others = None if isinstance(again.subject, Missing) else again.subject.loop
    opened = found.opened if isinstance(found.opened, SampledOpening) else None
    transfer = found.subject.open_loop
    above, below = _parts(sampled.exact_opening(opened) if isinstance(transfer, SlowTransfer) else transfer)
    return BreakReview(
        at=found.declared.at,
        measures=_measures("break", found.subject, again.subject, ONE, wanted),
        numerator=above[0],
        denominator=below[0],
        in_z=None if opened is None else sampled.opening_in_z(opened),
        crossings=() if loop is None or others is None else tuple(_crossings(loop, others)),
        numerator_terms=above[1],
        denominator_terms=below[1],
        frequency_response=frequency_curve(found.subject, asked) if wanted.drawn else None,
    )


def _crossings(loop: OpenLoop, again: OpenLoop) -> Iterator[CrossingReview]:
    """Print all crossings of a break; where more digits of pi change how many there are, none is told for certain."""
    first = loop.crossings()
    second = first if again is loop else again.crossings()
    for one, other in zip(first, second, strict=True) if len(first) == len(second) else ():
        unit = CROSSED[one.kind]
        yield CrossingReview(
            one.kind,
            place_of(Reading(one.frequency, other.frequency), RADIAN_PER_SECOND),
            place_of(Reading(one.margin, other.margin), unit),
            one.direction,
        )


_Part = tuple[tuple[str, ...], tuple[DelayedTerm, ...] | None]
"""A polynomial, or none and the terms of a quasi-polynomial."""


def _parts(transfer: TransferFunction | DelayedTransfer | None) -> tuple[_Part, _Part]:
    """Print numerator and denominator."""
    if transfer is None:
        return ((), None), ((), None)
    if isinstance(transfer, TransferFunction):
        return (coefficients(transfer.numerator), None), (coefficients(transfer.denominator), None)
    return ((), terms(transfer.numerator)), ((), terms(transfer.denominator))


def _reason(found: LoopAnalysis) -> str | None:
    if isinstance(found.subject, Missing):
        return found.subject.reason
    return None if found.solution.algebraic_loop is None else found.solution.algebraic_loop.reason


def _hidden(found: LoopAnalysis) -> Iterator[HiddenMode]:
    for name, response in found.responses.items():
        for channel in filter(hides, response.channels):
            hidden = channel.hidden if isinstance(channel.hidden, fmpq_poly) else channel.hidden.polynomial
            stable = channel.hides_instability is False
            if hidden is not None:
                yield HiddenMode(name, coefficients(hidden), stable, poles(certified_roots(hidden, _SHOWN)))
            elif isinstance(channel.hidden, Quasi):
                yield HiddenMode(name, (), stable, terms=terms(channel.hidden))


def _response(found: ResponseAnalysis, again: ResponseAnalysis, wanted: Wanted) -> ResponseReview:
    declared, subject = found.response, found.subject
    reduced = None if found.channel is None else _reduced(found.channel)
    above, below = _parts(reduced)
    rational = reduced if isinstance(reduced, TransferFunction) else None
    return ResponseReview(
        from_=" + ".join(dict.fromkeys(one.source for one in declared.excitations)),
        to=declared.to,
        input=_input(declared),
        unit=found.unit.symbol,
        numerator=above[0],
        denominator=below[0],
        measures=_absent(declared, subject.reason)
        if isinstance(subject, Missing)
        else _measures("response", subject, again.subject, found.unit, wanted),
        poles=() if rational is None else poles(certified_roots(rational.denominator, _SHOWN)),
        zeros=() if rational is None or not rational.numerator else poles(certified_roots(rational.numerator, _SHOWN)),
        curve=_curve(found) if wanted.drawn else None,
        numerator_terms=above[1],
        denominator_terms=below[1],
        reason=subject.reason if isinstance(subject, Missing) else None,
    )


def _reduced(channel: Channel | DelayedChannel) -> TransferFunction | DelayedTransfer:
    if isinstance(channel, DelayedChannel):
        return channel.transfer.rational or channel.transfer
    return channel.transfer.reduced()


def _input(declared: Response) -> dict[str, str]:
    """Print what drives a response; of several at once each as one text."""
    if len(declared.excitations) == 1:
        one = declared.excitations[0]
        return {"kind": one.kind, **{key: value.as_written for key, value in one.quantities.items()}, **one.options}
    texts: dict[str, str] = {}
    for one in declared.excitations:
        said = " ".join((one.kind, *(f"{key} {value.as_written}" for key, value in one.quantities.items())))
        texts[one.source] = f"{texts[one.source]} + {said}" if one.source in texts else said
    return {"kind": "several", **texts}


def _absent(declared: Response, reason: str) -> tuple[MeasureResult, ...]:
    """Print the measures of a step response that there is none of: the reason in place of every value."""
    if [one.kind for one in declared.excitations] != ["step"]:
        return ()
    rows = (row for row in MEASURES.values() if row.always and "response" in row.subjects)
    return tuple(
        MeasureResult(None, reason=reason, measure=row.name, arguments=ALWAYS_SAID.get(row.name)) for row in rows
    )


def _measures(
    kind: SubjectKind, subject: Subject | Missing, again: Subject | Missing, signal: Unit, wanted: Wanted
) -> tuple[MeasureResult, ...]:
    """Print every measure that is always reported on a subject of this kind."""
    if isinstance(subject, Missing) or isinstance(again, Missing):
        return ()
    rows = (row for row in MEASURES.values() if row.read is not None and kind in row.subjects)
    chosen = REPORTED.get(subject.kind) if isinstance(subject, ResponseSubject) else None
    unasked = subject.on_request if isinstance(subject, BreakSubject) else ()
    reported = (
        row for row in rows if (row.always and row.name not in unasked if chosen is None else row.name in chosen)
    )
    return tuple(_measure(row, subject, again, signal, wanted) for row in reported)


def _measure(row: Measure, subject: Subject, again: Subject, signal: Unit, wanted: Wanted) -> MeasureResult:
    arguments = replace(ALWAYS, measure=row.name)
    unit = default_unit(row, arguments, signal)
    readings = [_read(row, reader, subject, again, arguments) for reader in (row.read, row.beside)]
    assert readings[0] is not None
    scale = smallness(row, arguments, subject, unit)
    found = result(readings[0], unit, scale, readings[1], signal, method=row.method if wanted.proof else None)
    return MeasureResult(**vars(found), measure=row.name, arguments=ALWAYS_SAID.get(row.name))


def _read(
    row: Measure, reader: Reader | None, subject: Subject, again: Subject, arguments: Arguments
) -> Reading | None:
    if reader is None:
        return None
    answer = reader(subject, arguments)
    return Reading.once(answer) if again is subject else Reading(answer, reader(again, arguments))


def _curve(found: ResponseAnalysis) -> Curve | None:
    subject = found.subject
    if not isinstance(subject, ResponseSubject) or isinstance(subject.response, Absent) or subject.void is not None:
        return None
    points = subject.response.curve(_POINTS)
    factor = found.unit.si_factor
    values = [value / factor for _, value in points]
    peak = max((abs(float(value.mid())) for value in values), default=0.0)
    return Curve(
        tuple(printed_short(arb(time)) for time, _ in points),
        tuple(printed_short(value, peak) for value in values),
    )

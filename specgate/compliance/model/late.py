"""What stands for a dead time: blocks that represent a sampled one, and dead times that are written as fractions.

A hold and the computation before it turn the phase by exactly -w (T/2 + d), below the sampling frequency. A continuous
block that stands for them must turn it as much: by a dead time of its own, or by a fraction. What it lags less is
stated at the highest gain crossover of the loop through the block; where there is none, at the highest frequency that
decides the criterion.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

from flint import arb, fmpq

from specgate.analysis.late_fractions import NOTHING, LateFraction, late_fraction
from specgate.analysis.late_phase import LatePhase
from specgate.approximations.figures import combined, negative
from specgate.compliance.model.fact import DEGREE, RADIAN_PER_SECOND, RATIO, SECOND, Figured, ModelAssumption, exceeds
from specgate.compliance.readings import Reading
from specgate.compliance.wording import apart, figure
from specgate.project.parameters import Values, evaluate
from specgate.project.types import StandIn, Subsystem, Value
from specgate.response.answers import Answer
from specgate.systems.blocks import Block
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.unit import Unit
from specgate.terms.verdicts import Standing, Trilean

Mapped = Callable[[Answer], Answer]
LIMIT = fmpq(5)
"""Degrees that a phase may be off at the crossover: common practice for dead times."""
_FAST = "fast_sampling_as_continuous"
_RATES: Mapping[str, tuple[int, str]] = {_FAST: (20, "Franklin, Powell, Workman, Digital Control of Dynamic Systems")}
_RATE = (10, "common practice")
"""How many times the crossover frequency the sampling frequency has to be, and who says so."""
AT_THE_START = ("initial_value", "undershoot", "rise_time", "delay_time")
"""Measures that a fraction in place of a dead time never gives: it dips or jumps where nothing happens at all."""


@record
class Where:
    """A frequency (rad/s) at which phases are compared, and what is there."""

    what: str
    frequency: Reading


@record
class Late:
    """A subsystem as a block with the given values, and where its phase is compared; None: no frequency tells."""

    subsystem: Subsystem
    block: Block
    on: str
    where: Where | None
    known: tuple[Values, Values]


def fraction_of(block: Block) -> LateFraction | None:
    """Return the fraction in a block that stands for a dead time, the first of several outputs or inputs."""
    transfers = (TransferFunction(numerator, block.denominator) for numerator in block.numerators.values())
    return next((found for one in transfers if (found := late_fraction(one)) is not None), None)


# --- what a block says that it stands for -----------------------------------------------------------------------


def stand_in(late: Late) -> ModelAssumption | None:
    """Audit what a subsystem stands for; None where it says nothing of that."""
    said, block = late.subsystem.stands_for, late.block
    if said is None:
        return None
    period, delay = _value(said.sampled, late), _value(said.delay, late)
    phase = LatePhase(period / 2 + delay, block.dead_time, fraction_of(block) or NOTHING)
    words = f"{late.subsystem.name} stands for {_what(said)}: a lag of {_time(phase.meant)}"
    figures: tuple[Figured, ...] = (
        Figured("dead time that is meant", _exact(phase.meant), SECOND),
        Figured("dead time in the block", _exact(phase.own + phase.fraction.delay), SECOND),
    )
    if late.where is None:
        words += "; no crossover or bandwidth tells what that is to the loop"
        return _stands(late, said, (Trilean.UNKNOWN, Standing.INCONCLUSIVE), words, figures)
    error = _error(phase, late.where)
    violated = [] if said.by == _FAST else [exceeds(_size(error), _limit(late))]
    words += f"; {_compared(late.where, error)}"
    figures += _figures(late.where, error)
    if said.sampled is not None:
        ratio, (least, source) = _ratio(period, late.where), _RATES.get(said.by or "", _RATE)
        violated.append(exceeds(_each(negative, ratio), _exact(fmpq(-least))))
        figures += (Figured("sampling frequency over it", ratio, RATIO),)
        times = _beside(ratio, RATIO, fmpq(least))
        words += f", and the sampling frequency is {times} times it (at least {least}: {source})"
    return _stands(late, said, _state(violated), words, figures)


def _stands(
    late: Late, said: StandIn, state: tuple[Trilean, Standing], words: str, figures: tuple[Figured, ...]
) -> ModelAssumption:
    return ModelAssumption("stands_for", late.on, late.subsystem.name, *state, words, said.place, figures)


def _what(said: StandIn) -> str:
    parts = [] if said.sampled is None else [f"a block that is sampled every {said.sampled.as_written}"]
    parts += [] if said.delay is None else [f"a dead time of {said.delay.as_written}"]
    return " and ".join(parts) + (f" by {said.by}" if said.by else "")


def _ratio(period: fmpq, where: Where) -> Reading:
    """Return the sampling frequency over another."""

    def of(frequency: Answer) -> Answer:
        return combined(lambda ball: 2 * arb.pi() / (arb(period) * ball), frequency)

    return _each(of, where.frequency)


# --- a dead time that is written as a fraction -------------------------------------------------------------------


def written_dead_time(late: Late, measure: str) -> ModelAssumption | None:
    """Say of a dead time that is written as a fraction how far it is one; None where the block has none."""
    subsystem = late.subsystem
    fraction = None if subsystem.stands_for is not None else fraction_of(late.block)
    if fraction is None:
        return None
    phase = LatePhase(fraction.delay, fmpq(0), fraction)
    until = Reading.once(phase.departs(LIMIT))
    words = (
        f"{subsystem.name} holds {fraction.words}, as for a dead time of {_time(fraction.delay)}: its phase is that of "
        f"one to within {LIMIT} deg up to {_shown(until, RADIAN_PER_SECOND)}"
    )
    figures: tuple[Figured, ...] = (
        Figured("equivalent dead time", _exact(fraction.delay), SECOND),
        Figured("frequency up to which its phase is that of one", until, RADIAN_PER_SECOND),
    )
    violated: list[Trilean] = []
    if late.where is not None:
        error = _error(phase, late.where)
        violated.append(exceeds(_size(error), _limit(late)))
        words += f"; {_compared(late.where, error)}"
        figures += _figures(late.where, error)
    if measure in AT_THE_START:
        violated.append(Trilean.YES)
        words += f"; no fraction gives the {measure.replace('_', ' ')} of a dead time"
    holds = _state(violated)[0] if violated else Trilean.UNKNOWN
    standing = Standing.INCONCLUSIVE if holds is Trilean.NO else Standing.SOUND
    return ModelAssumption("dead_time", late.on, subsystem.name, holds, standing, words, subsystem.model_place, figures)


# --- what both have in common -----------------------------------------------------------------------------------


def _state(violated: Sequence[Trilean]) -> tuple[Trilean, Standing]:
    if any(one is Trilean.YES for one in violated):
        return Trilean.NO, Standing.OUT_OF_RANGE
    if any(one is Trilean.UNKNOWN for one in violated):
        return Trilean.UNKNOWN, Standing.INCONCLUSIVE
    return Trilean.YES, Standing.SOUND


def _error(phase: LatePhase, where: Where) -> Reading:
    return _each(phase.error_at, where.frequency)


def _size(error: Reading) -> Reading:
    return _each(lambda answer: combined(abs, answer), error)


def _limit(late: Late) -> Reading:
    first, second = (Answer.of_exact(LIMIT * values.pi / 180) for values in late.known)
    return Reading(first, second)


def _compared(where: Where, error: Reading) -> str:
    """Say what the block lags less, or more, at a frequency."""
    with working_precision(64):
        more = bool(error.answer.enclose(64) < 0)
    turned = _beside(_size(error), DEGREE, LIMIT)
    return (
        f"at {where.what}, {_shown(where.frequency, RADIAN_PER_SECOND)}, it lags {turned} {'more' if more else 'less'}"
    )


def _figures(where: Where, error: Reading) -> tuple[Figured, ...]:
    return (Figured(where.what, where.frequency, RADIAN_PER_SECOND), Figured("phase that it lags less", error, DEGREE))


def _value(value: Value | None, late: Late) -> fmpq:
    return fmpq(0) if value is None else evaluate(value, late.known[0], late.subsystem.name)


def _exact(value: fmpq) -> Reading:
    return Reading.once(Answer.of_exact(value))


def _each(of: Mapped, reading: Reading) -> Reading:
    first = of(reading.answer)
    return Reading.once(first) if reading.again is reading.answer else Reading(first, of(reading.again))


def _shown(reading: Reading, unit: Unit) -> str:
    return figure(reading.in_unit(unit), unit)


def _beside(reading: Reading, unit: Unit, limit: fmpq) -> str:
    """Write a number with as many digits as it takes to tell it from a limit in the same unit."""
    return apart([reading.in_unit(unit), Answer.of_exact(limit)], unit)[0]


def _time(value: fmpq) -> str:
    return _shown(_exact(value), SECOND)

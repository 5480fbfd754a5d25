"""Sampled models with values: a block in z with its period and its delay, checked for dimensions and for sense.

Polynomials in z have no dimension of their own in z: all terms of one polynomial share a dimension, and numerator over
denominator turns the input's unit into the output's. A controller given with a rule is the continuous one with s
replaced: forward (z - 1)/T, backward (z - 1)/(T z), trapezoidal 2 (z - 1)/(T (z + 1)).
"""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq, fmpq_poly

from specgate.project import faults
from specgate.project.controller import controller
from specgate.project.counting import shown
from specgate.project.faults import Fault
from specgate.project.fit import Pair, plain_gain
from specgate.project.rational_forms import Rational, only_pair
from specgate.project.reader import ModelReader, is_zero
from specgate.project.types import Polynomial, SampledModel, Subsystem, Value
from specgate.sampled.blocks import LONGEST_DELAY, SampledBlock
from specgate.terms.dimensions import DIMENSIONLESS, TIME
from specgate.terms.expressions import PLAIN, Inferred, as_dimension
from specgate.terms.records import record

_RULES: Mapping[str, tuple[fmpq_poly, fmpq_poly]] = {
    "forward": (fmpq_poly([-1, 1]), fmpq_poly([1])),
    "backward": (fmpq_poly([-1, 1]), fmpq_poly([0, 1])),
    "trapezoidal": (fmpq_poly([-2, 2]), fmpq_poly([1, 1])),
}
"""T s as a numerator over a denominator in z."""


@record
class PeriodicBlock:
    """A sampled block and its period (s)."""

    block: SampledBlock
    period: fmpq


def sampled_block(reader: ModelReader, model: SampledModel) -> PeriodicBlock:
    """Return the block of a sampled model; a dead time of its output adds to the delay. Raises Fault."""
    subsystem = reader.subsystem
    period = _time(reader, model.period, "a sampling period")
    if period <= 0:
        raise Fault(
            faults.VALUE, f"`{model.period.as_written}`: a sampling period is greater than zero", model.period.place
        )
    delays = {"a computation time": model.delay, "a dead time": subsystem.dead_time}
    delay = sum((_delay(reader, value, what) for what, value in delays.items() if value is not None), fmpq(0))
    if delay > LONGEST_DELAY * period:
        place = subsystem.model_place if model.delay is None else model.delay.place
        message = f"a delay of more than {LONGEST_DELAY} periods is not worked with: is the period meant?"
        raise Fault(faults.VALUE, message, place)
    rational = _polynomials(reader, model) if model.pid is None else _by_rule(reader, model, period)
    _refuse_improper(subsystem, rational, model)
    block = SampledBlock(
        subsystem.name,
        tuple(subsystem.inputs),
        tuple(subsystem.outputs),
        rational.numerators,
        rational.denominator,
        delay,
    )
    return PeriodicBlock(block, period)


def _time(reader: ModelReader, value: Value, what: str) -> fmpq:
    reader.wants(value, TIME, what)
    return reader.number(value)


def _delay(reader: ModelReader, value: Value, what: str) -> fmpq:
    delay = _time(reader, value, what)
    if delay < 0:
        raise Fault(faults.VALUE, f"`{value.as_written}`: {what} is not negative", value.place)
    return delay


def _polynomials(reader: ModelReader, model: SampledModel) -> Rational:
    pair = only_pair(reader)
    reader.check_order(len(model.numerator) - 1, len(model.denominator) - 1)
    above, below = _dimension(reader, model.numerator), _dimension(reader, model.denominator)
    scale = _scale(reader, pair, above, below)
    denominator = reader.polynomial(model.denominator)
    if not denominator:
        raise Fault(faults.VALUE, "the denominator is zero", reader.subsystem.model_place)
    return Rational({pair: reader.polynomial(model.numerator) * scale}, denominator)


def _dimension(reader: ModelReader, coefficients: Polynomial) -> Inferred:
    """Return the dimension that all terms share, PLAIN if none has a unit. Raises Fault for the first that differs."""
    terms = [(value, reader.infer(value)) for value in coefficients if not is_zero(value)]
    first = next((term for term in terms if term[1] is not PLAIN), None)
    if first is None:
        return PLAIN
    for value, inferred in terms:
        if as_dimension(inferred) != as_dimension(first[1]):
            message = (
                f"`{value.as_written}` is {shown(value, inferred)}, `{first[0].as_written}` beside it is in "
                f"{shown(*first)}: the coefficients of a polynomial in z are all in one unit"
            )
            raise Fault(faults.DIMENSION, message, value.place)
    return first[1]


def _scale(reader: ModelReader, pair: Pair, above: Inferred, below: Inferred) -> fmpq:
    """Return what plain coefficients are multiplied by to count in the declared units. Raises Fault."""
    ratio = reader.ratio(*pair)
    if above is PLAIN and below is PLAIN:
        reader.by_fit = reader.by_fit or ratio != DIMENSIONLESS
        return plain_gain(reader, pair, ratio, reader.conversion(*pair))
    found = as_dimension(above) / as_dimension(below)
    if found != ratio:
        message = f"numerator over denominator has to be in {reader.shown_ratio(*pair)}, but it is in {found}"
        raise Fault(faults.DIMENSION, message, reader.subsystem.model_place)
    return fmpq(1)


def _by_rule(reader: ModelReader, model: SampledModel, period: fmpq) -> Rational:
    assert model.pid is not None
    continuous = controller(reader, model.pid)
    above, below = _RULES[model.rule or "backward"]
    below = below * period
    degree = max(p.degree() for p in (continuous.denominator, *continuous.numerators.values()))

    def replaced(p: fmpq_poly) -> fmpq_poly:
        return sum((above**k * below ** (degree - k) * p[k] for k in range(p.degree() + 1)), fmpq_poly())

    numerators = {pair: replaced(numerator) for pair, numerator in continuous.numerators.items()}
    return Rational(numerators, replaced(continuous.denominator))


def _refuse_improper(subsystem: Subsystem, rational: Rational, model: SampledModel) -> None:
    below = rational.denominator.degree()
    worst = max(numerator.degree() for numerator in rational.numerators.values())
    if worst <= below:
        return
    if model.pid is not None:
        advice = "give the derivative a lag, or take another rule than `forward`"
    else:
        advice = "multiply the denominator by a power of z"
    raise Fault(
        faults.VALUE,
        f"in z the numerator's degree {worst} exceeds the denominator's {below}: the answer would need samples that "
        f"are yet to come; {advice}",
        subsystem.model_place,
    )

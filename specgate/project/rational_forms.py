"""Models given as polynomials, factors, or poles and zeros: checked, and turned into numerators over a denominator."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from flint import fmpq, fmpq_poly

from specgate.project import faults
from specgate.project.counting import shown
from specgate.project.faults import Fault
from specgate.project.fit import Pair, plain_gain, scales
from specgate.project.parameters import Values, written_numbers
from specgate.project.reader import ModelReader, S
from specgate.project.types import (
    FactoredModel,
    MatrixModel,
    PoleZeroModel,
    Polynomial,
    PolynomialModel,
    Root,
    Value,
)
from specgate.project.types import Pair as SecondOrder
from specgate.terms.dimensions import DIMENSIONLESS, RATE, TIME, Dimension
from specgate.terms.expressions import PLAIN, as_dimension
from specgate.terms.records import record
from specgate.terms.unit import frequency_problem

_ONE = fmpq_poly([1])


@record
class Rational:
    """numerators[(output, input)] over one denominator, coherent SI, as written and never reduced."""

    numerators: Mapping[Pair, fmpq_poly]
    denominator: fmpq_poly


def only_pair(reader: ModelReader) -> Pair:
    """Return the output and the input of a subsystem that has one of each. Raises Fault for any other."""
    outputs, inputs = tuple(reader.subsystem.outputs), tuple(reader.subsystem.inputs)
    if len(outputs) != 1 or len(inputs) != 1:
        raise Fault(
            faults.VALUE,
            "this form of a model has one input and one output: for more use `numerators` over one `denominator`, "
            "or `state_space`",
            reader.subsystem.model_place,
        )
    return outputs[0], inputs[0]


def polynomials(reader: ModelReader, model: PolynomialModel) -> Rational:
    """Read polynomials in s, or a differential equation. Raises Fault."""
    return _over(reader, {only_pair(reader): model.numerator}, model.denominator)


def matrix(reader: ModelReader, model: MatrixModel) -> Rational:
    """Read several numerators over one denominator. Raises Fault."""
    return _over(reader, model.numerators, model.denominator)


def _over(reader: ModelReader, numerators: Mapping[Pair, Polynomial], denominator: Polynomial) -> Rational:
    reader.check_order(len(denominator) - 1, *(len(written) - 1 for written in numerators.values()))
    factors = scales(reader, numerators, denominator)
    below = reader.polynomial(denominator)
    if not below:
        raise Fault(faults.VALUE, "the denominator is zero", reader.subsystem.model_place)
    above = {pair: reader.polynomial(written) * factors[pair] for pair, written in numerators.items()}
    return Rational(above, below)


def factored(reader: ModelReader, model: FactoredModel) -> Rational:
    """Read a gain with integrators, lags, leads and pairs. Raises Fault."""
    pair = only_pair(reader)
    reader.check_order(
        model.differentiators + len(model.leads) + 2 * len(model.zero_pairs),
        model.integrators + len(model.lags) + 2 * len(model.pairs),
    )
    order = model.differentiators - model.integrators
    above = _lags(reader, model.leads) * _pairs(reader, model.zero_pairs) * S**model.differentiators
    below = _lags(reader, model.lags) * _pairs(reader, model.pairs) * S**model.integrators
    return Rational({pair: above * _gain(reader, pair, model.gain, TIME**order)}, below)


def poles_and_zeros(reader: ModelReader, model: PoleZeroModel) -> Rational:
    """Read roots in 1/s with a leading coefficient. Raises Fault."""
    pair = only_pair(reader)
    reader.check_order(len(model.zeros), len(model.poles))
    above, below = _roots(reader, model.zeros), _roots(reader, model.poles)
    order = above.degree() - below.degree()
    return Rational({pair: above * _gain(reader, pair, model.leading_coefficient, TIME**order)}, below)


def _gain(reader: ModelReader, pair: Pair, value: Value, time: Dimension) -> fmpq:
    """Return the factor in front of a product whose other factors are in 1/time."""
    ratio = reader.ratio(*pair)
    wanted = ratio * time
    inferred = reader.infer(value)
    if inferred is PLAIN:
        reader.by_fit = reader.by_fit or wanted != DIMENSIONLESS
        return reader.number(value) * plain_gain(reader, pair, ratio, reader.conversion(*pair))
    if as_dimension(inferred) != wanted:
        output, source = (reader.subsystem.outputs[pair[0]].unit, reader.subsystem.inputs[pair[1]].unit)
        raise Fault(
            faults.DIMENSION,
            f"`{value.as_written}`: from `{source.symbol}` to `{output.symbol}` this factor has to be in "
            f"{reader.shown_ratio(*pair, time)}, but it is in {shown(value, inferred)}",
            value.place,
        )
    return reader.number(value)


def _lags(reader: ModelReader, times: Iterable[Value]) -> fmpq_poly:
    """Return the product of the factors 1 + T s."""
    result = _ONE
    for value in times:
        reader.wants(value, TIME, "a time constant", plain_as="s")
        result *= fmpq_poly([1, reader.number(value)])
    return result


def _pairs(reader: ModelReader, pairs: Iterable[SecondOrder]) -> fmpq_poly:
    """Return the product of the factors s^2/w^2 + 2 zeta s/w + 1."""
    result = _ONE
    for pair in pairs:
        refuse_written_rate(pair.natural_frequency, reader.values, reader.subsystem.name)
        reader.wants(pair.natural_frequency, RATE, "a natural frequency", plain_as="rad/s")
        reader.wants(pair.damping, DIMENSIONLESS, "a damping ratio")
        frequency, damping = reader.number(pair.natural_frequency), reader.number(pair.damping)
        if frequency <= 0:
            message = f"`{pair.natural_frequency.as_written}`: a natural frequency is greater than zero"
            raise Fault(faults.VALUE, message, pair.natural_frequency.place)
        result *= fmpq_poly([1, 2 * damping / frequency, 1 / frequency**2])
    return result


def _roots(reader: ModelReader, roots: Iterable[Root]) -> fmpq_poly:
    """Return the product of the factors s - real, or (s - real)^2 + imaginary^2."""
    result = _ONE
    for root in roots:
        real = _rate(reader, root.real)
        if root.imaginary is None:
            result *= S - real
        else:
            result *= (S - real) ** 2 + _rate(reader, root.imaginary) ** 2
    return result


def _rate(reader: ModelReader, value: Value) -> fmpq:
    reader.wants(value, RATE, "a pole or zero", plain_as="1/s")
    for node in written_numbers(value.expression, reader.values, reader.subsystem.name):
        if node.unit is not None and node.unit.frequency and node.unit.pi_power:
            message = f"`{value.as_written}`: poles and zeros are in 1/s, and `{node.unit.symbol}` is another size"
            raise Fault(faults.DIMENSION, message, value.place)
    return reader.number(value)


def refuse_written_rate(value: Value, values: Values, scope: str | None = None) -> None:
    """Refuse `1/s` where a frequency is meant, directly or by the parameters that are read. Raises Fault."""
    for node in written_numbers(value.expression, values, scope):
        if node.unit is not None and node.unit.dimension == RATE:
            problem = frequency_problem(node.unit)
            if problem is not None:
                raise Fault(faults.DIMENSION, f"`{value.as_written}`: {problem}", value.place)

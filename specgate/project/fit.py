"""The unit that a polynomial without any unit carries: the one that fits, if only one does.

Coefficients that are all plain count in the declared units of the ports, and time in seconds. Where more than one
reading is possible and they differ in size (a plain gain from m to mm), the model is refused.
"""

from __future__ import annotations

from collections.abc import Mapping

from flint import fmpq

from specgate.project import faults
from specgate.project.faults import Fault
from specgate.project.reader import ModelReader, is_zero
from specgate.project.types import Polynomial
from specgate.terms.dimensions import DIMENSIONLESS, TIME, Dimension
from specgate.terms.expressions import PLAIN, Inferred, as_dimension
from specgate.terms.records import record

Pair = tuple[str, str]
"""(output, input)."""


@record
class _Case:
    """One numerator over the denominator: dimensions, the ratio that is wanted, and the size of the declared units.

    terms: how many coefficients the numerator has. degree: that of the denominator as written.
    """

    pair: Pair
    numerator: Inferred
    terms: int
    denominator: Inferred
    degree: int
    ratio: Dimension
    conversion: fmpq


def scales(reader: ModelReader, numerators: Mapping[Pair, Polynomial], denominator: Polynomial) -> dict[Pair, fmpq]:
    """Return what each numerator is multiplied by to be coherent SI beside the denominator as written.

    Raises Fault if the dimensions do not turn the input into the output.
    """
    below = reader.polynomial_dimension(denominator)
    result: dict[Pair, fmpq] = {}
    carried: Dimension | None = None
    for (output, source), coefficients in numerators.items():
        if all(is_zero(value) for value in coefficients):
            result[output, source] = fmpq(1)
            continue
        above = reader.polynomial_dimension(coefficients)
        case = _Case(
            (output, source),
            above,
            len(coefficients),
            below,
            len(denominator) - 1,
            reader.ratio(output, source),
            reader.conversion(output, source),
        )
        result[output, source] = _scale(reader, case)
        if above is not PLAIN and below is PLAIN:
            needed = above / case.ratio
            if carried not in (None, needed):
                raise _fault(reader, f"the plain denominator would have to be in {carried} and in {needed} at once")
            carried = needed
    reader.by_fit = reader.by_fit or (below is PLAIN and len(denominator) > 1)
    return result


def _scale(reader: ModelReader, case: _Case) -> fmpq:
    if case.numerator is not PLAIN:
        _fit_denominator(reader, case)
        return fmpq(1)
    # what the plain numerator has to carry
    needed = as_dimension(case.denominator) * case.ratio
    dimensionless_below = case.denominator is PLAIN or _power_of_time(case.denominator) is not None
    if dimensionless_below:
        reader.by_fit = reader.by_fit or _power_of_time(case.ratio) is None
        return plain_gain(reader, case.pair, case.ratio, case.conversion)
    if _power_of_time(needed) is not None:
        reader.by_fit = reader.by_fit or case.terms > 1 or needed != DIMENSIONLESS
        return fmpq(1)
    _coherent(reader, case, "numerator", needed)
    return fmpq(1)


def plain_gain(reader: ModelReader, pair: Pair, ratio: Dimension, conversion: fmpq) -> fmpq:
    """Return the factor of a plain gain counted in the declared units.

    Raises Fault where it could also be a pure number: between two sizes of one unit, time apart.
    """
    if _power_of_time(ratio) is not None and conversion != 1:
        output, source = (reader.subsystem.outputs[pair[0]].unit, reader.subsystem.inputs[pair[1]].unit)
        example = (output / source if ratio == DIMENSIONLESS else output / output).symbol
        pure = "" if ratio == DIMENSIONLESS else " for a pure number"
        raise _fault(
            reader,
            f"a plain gain from `{source.symbol}` to `{output.symbol}` can be read in two ways: "
            f"give it a unit, such as `1 {example}`{pure}",
        )
    return conversion


def _fit_denominator(reader: ModelReader, case: _Case) -> None:
    """Check that the denominator, plain or not, turns the numerator with units into what is wanted."""
    needed = as_dimension(case.numerator) / case.ratio
    if case.denominator is not PLAIN:
        if case.denominator != needed:
            found, wanted = as_dimension(case.numerator) / case.denominator, reader.shown_ratio(*case.pair)
            raise _fault(reader, f"the model {_between(reader, case)} has to be in {wanted}, but it is in {found}")
        return
    power = _power_of_time(needed)
    if power is None:
        _coherent(reader, case, "denominator", needed)
    elif not -case.degree <= power <= 0:
        found = as_dimension(case.numerator)
        raise _fault(
            reader,
            f"the numerator is in {found}, {_between(reader, case)} {reader.shown_ratio(*case.pair)} is wanted, "
            "and a denominator of plain numbers does not make up for it",
        )


def _coherent(reader: ModelReader, case: _Case, what: str, needed: Dimension) -> None:
    """Accept a plain polynomial beside one with units only where its size is not in doubt."""
    reader.by_fit = True
    output, source = (reader.subsystem.outputs[case.pair[0]].unit, reader.subsystem.inputs[case.pair[1]].unit)
    if output.si_factor != 1 or source.si_factor != 1:
        raise _fault(
            reader,
            f"the plain {what} would have to carry {needed}, and `{output.symbol}` over `{source.symbol}` leaves its "
            "size in doubt: give its coefficients units",
        )


def _power_of_time(dimension: Dimension) -> int | None:
    """Return n where the dimension is that of time to the power n, else None."""
    power = dimension.exponents[2]
    return power if TIME**power == dimension else None


def _between(reader: ModelReader, case: _Case) -> str:
    output, source = (reader.subsystem.outputs[case.pair[0]], reader.subsystem.inputs[case.pair[1]])
    return f"from `{source.unit.symbol}` to `{output.unit.symbol}`"


def _fault(reader: ModelReader, message: str) -> Fault:
    return Fault(faults.DIMENSION, message, reader.subsystem.model_place)

"""Integrals of a sampled response that tends to zero, over all time from a sample on.

With x the deviation at the sample and M its step, the integral of y^2 over one period is a quadratic form x' G x, and
that over all time x' P x with P = G + M'GM + ... (Lyapunov). N terms are summed in doublings, until the row sums of
|M^N| are at most 2^-b; what is left is at most the sum of |P[i, j]| times the square of the largest entry of M^N x, and
smaller by 4^-b with every further N periods. Where y keeps its sign the integral of |y| is linear: with g x that over
one period it is g (I - M)^-1 x.
"""

from __future__ import annotations

from collections.abc import Sequence

from flint import acb, acb_mat, arb, arb_mat, fmpq

from specgate.response.superposed.integrals import exponential
from specgate.sampled.states import States
from specgate.terms.precision import working_precision

Stretch = tuple[Sequence[tuple[acb, acb_mat]], arb_mat, fmpq]
"""Shapes with their weights, what they are weights of as rows over the deviation at the sample, and the length."""

_DOUBLINGS = 48


def linear(stretches: Sequence[Stretch], bits: int) -> arb_mat:
    """Return the integral of y over one period as a row over the deviation at its sample."""
    with working_precision(bits):
        size = int(stretches[0][1].ncols())
        total = arb_mat(1, size)
        for shapes, through, length in stretches:
            for pole, weights in shapes:
                for power, row in enumerate((weights * acb_mat(through)).tolist()):
                    part = _power(pole, power, length, bits)
                    total = total + arb_mat(1, size, [(entry * part).real for entry in row])
        return total


def quadratic(stretches: Sequence[Stretch], bits: int) -> arb_mat:
    """Return the integral of y^2 over one period as a quadratic form of the deviation at its sample.

    Re z Re w = Re(z w + z conj w)/2.
    """
    with working_precision(bits):
        size = int(stretches[0][1].ncols())
        total = arb_mat(size, size)
        for shapes, through, length in stretches:
            terms = [
                (pole, power, acb_mat(1, size, row))
                for pole, weights in shapes
                for power, row in enumerate((weights * acb_mat(through)).tolist())
            ]
            for one, first, row in terms:
                for other, second, column in terms:
                    both = _power(one + other, first + second, length, bits)
                    apart = _power(one + acb(other.real, -other.imag), first + second, length, bits)
                    mirrored = acb_mat(1, size, [acb(entry.real, -entry.imag) for entry in column.entries()])
                    product = row.transpose() * (column * both + mirrored * apart)
                    total = total + arb_mat(size, size, [entry.real / 2 for entry in product.entries()])
        return total


def _power(rate: acb, power: int, length: fmpq, bits: int) -> acb:
    """Return the integral of t^power e^(rate t) over [0, length]."""
    return exponential(rate, [*([acb(0)] * power), acb(1)], fmpq(0), length, bits)


def all_time(matrix: arb_mat, first: arb_mat, form: arb_mat, bits: int) -> arb | None:
    """Return the sum of x[k]' form x[k] over all k; None where the decay is not proved."""
    states = States(matrix, first, bits)
    with working_precision(bits):
        small = arb(fmpq(1, 1 << min(bits // 4, 512)))
        total = form
        for exponent in range(_DOUBLINGS):
            power = states.power(exponent)
            total = total + power.transpose() * total * power
            after = states.power(exponent + 1)
            if max(float(sum((abs(e) for e in row), arb(0)).upper()) for row in after.tolist()) < float(small):
                far = after * first
                size = max((abs(entry).upper() for entry in far.entries()), key=float)
                rest = 2 * size * size * sum((abs(entry) for entry in total.entries()), arb(0))
                near = (first.transpose() * total * first)[0, 0]
                return near + arb(0, rest.upper())
    return None


def one_sided(matrix: arb_mat, state: arb_mat, row: arb_mat, bits: int) -> arb:
    """Return the sum of row x[k] over all k, from a state on."""
    with working_precision(bits):
        size = int(matrix.nrows())
        unit = arb_mat(size, size, [int(i % (size + 1) == 0) for i in range(size * size)])
        return (row * (unit - matrix).solve(state))[0, 0]

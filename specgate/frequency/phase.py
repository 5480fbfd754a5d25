"""The phase of a rational function at a frequency, followed continuously from zero frequency.

L(s) = K s^m prod(1 - s/z) / prod(1 - s/p). K gives 0 or -pi, s^m gives m pi/2. While omega rises from 0, the point
1 - j omega/r moves on a straight line from 1; it meets the negative real axis only if r lies on the imaginary axis, so
that else its principal argument is the continuous one. At r = j b, b > 0 the factor passes through zero: this is taken
as for a slightly damped r (left of the axis): from then on -pi for a pole, pi for a zero.
"""

from __future__ import annotations

from collections.abc import Iterator

from flint import arb, fmpq, fmpq_poly

from specgate.frequency.angles import equals_where
from specgate.frequency.axis import AxisFunction, along_the_axis
from specgate.response.answers import Answer
from specgate.systems.polynomials import order_at_origin
from specgate.systems.roots import certified_roots
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof


def phase_at(axis: AxisFunction, frequency: fmpq) -> Answer:
    """Return arg L(j frequency) (rad); frequency not negative."""
    numerator, denominator = axis.numerator, axis.denominator
    if not numerator:
        return Answer.nothing("the gain is zero: there is no phase")
    for p in (numerator, denominator):
        if _vanishes(p, frequency):
            return Answer.nothing("a pole or zero lies on the imaginary axis at this frequency")
    quarters = order_at_origin(numerator) - order_at_origin(denominator)
    zeros, poles = (p.right_shift(order_at_origin(p)) for p in (numerator, denominator))
    quarters -= 2 if zeros[0] / poles[0] < 0 else 0

    def refine(bits: int) -> arb:
        precision = bits + 16
        while True:
            with working_precision(precision):
                turned = sum(_turns(zeros, frequency, precision), arb(0)) - sum(
                    _turns(poles, frequency, precision), arb(0)
                )
                angle = arb.pi() * quarters / 2 + turned
            if angle.rel_accuracy_bits() >= bits or precision > 4 * bits + 256:
                return angle
            precision *= 2

    return Answer(
        Proof.ENCLOSED, refine=refine, against=equals_where(lambda times: _turns_round(axis, frequency, times))
    )


def _turns_round(axis: AxisFunction, frequency: fmpq, times: int) -> bool:
    """Whether so many half turns of the angle are whole ones: of rational parts only multiples of 45 deg are."""
    square = frequency * frequency
    real, imaginary = axis.real(square), frequency * axis.imaginary(square)
    if imaginary == 0:
        return True
    if real == 0:
        return times % 2 == 0
    return bool(abs(real) == abs(imaginary) and times % 4 == 0)


def _vanishes(p: fmpq_poly, frequency: fmpq) -> bool:
    even, odd = along_the_axis(p)
    square = frequency * frequency
    return bool(even(square) == 0 and frequency * odd(square) == 0)


def _turns(p: fmpq_poly, frequency: fmpq, bits: int) -> Iterator[arb]:
    """Give the continuous argument of 1 - j frequency/r for every root r, with multiplicity."""
    if p.degree() < 1 or frequency == 0:
        return
    for index, root in enumerate(certified_roots(p, bits)):
        real, imaginary = root.value.real, root.value.imag
        if real.is_zero():
            # both of a pair pass zero together, or neither does
            yield arb.pi() / 2 * (root.multiplicity if _passed(p, index, frequency, bits) else 0)
        else:
            size = real * real + imaginary * imaginary
            yield arb.atan2(-real * frequency, size - imaginary * frequency) * root.multiplicity


def _passed(p: fmpq_poly, index: int, frequency: fmpq, bits: int) -> bool:
    """Whether a frequency lies above that of a root on the axis, from which it is known to differ."""
    while True:
        height = abs(certified_roots(p, bits)[index].value.imag)
        with working_precision(bits):
            distance = height - arb(frequency)
        if not distance.contains(0):
            return bool(distance < 0)
        bits *= 2

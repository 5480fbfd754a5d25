"""A rational function L = N/D on the imaginary axis, as polynomials in x = omega^2.

N(j omega) = E(x) + j omega O(x), and so for D. Then |N|^2, |D|^2 and N conj(D) = real + j omega imaginary are exact
polynomials in x, with |N|^2 |D|^2 = real^2 + x imaginary^2. N and D have no common factor, so that |N|^2 and |D|^2 have
no common zero x >= 0, and `real` and `imaginary` vanish together only where L is zero or infinite.
"""

from __future__ import annotations

from functools import cached_property

from flint import arb, fmpq, fmpq_poly

from specgate.frequency.angles import equals_where
from specgate.frequency.spots import Infinity, Rational, Sign, Spot, positive_roots
from specgate.response.answers import Answer
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision
from specgate.terms.records import record
from specgate.terms.verdicts import Proof

X = fmpq_poly([0, 1])


@record
class Turn:
    """The angle of -L: `size` in [0, pi] (rad), to be lagged (side 1), led (-1), or either (0, at 0 and pi)."""

    size: Answer
    side: Sign


class AxisFunction:
    """L = N/D on the axis; the fraction is reduced on construction."""

    def __init__(self, function: TransferFunction) -> None:
        reduced = function.reduced()
        self.numerator: fmpq_poly = reduced.numerator
        self.denominator: fmpq_poly = reduced.denominator
        (a, b), (c, d) = along_the_axis(self.numerator), along_the_axis(self.denominator)
        self.above: fmpq_poly = a * a + X * b * b
        """|N|^2"""
        self.below: fmpq_poly = c * c + X * d * d
        """|D|^2"""
        self.real: fmpq_poly = a * c + X * b * d
        """Re(N conj D)"""
        self.imaginary: fmpq_poly = b * c - a * d
        """Im(N conj D) / omega"""

    @cached_property
    def poles(self) -> tuple[Spot, ...]:
        """Where L is infinite: x >= 0, in rising order; infinity itself not among them."""
        at_origin = (Rational(fmpq(0)),) if self.denominator[0] == 0 else ()
        return (*at_origin, *positive_roots(self.below))

    @property
    def proper(self) -> bool:
        """Whether L is finite at infinity."""
        return self.numerator.degree() <= self.denominator.degree()

    def finite(self, spot: Spot) -> bool:
        """Whether L has a value at a spot."""
        return self.proper if isinstance(spot, Infinity) else spot.sign(self.below) != 0

    def square(self, spot: Spot) -> Answer:
        """Return |L|^2 where L is finite."""
        return spot.ratio(self.above, self.below)

    def turn(self, spot: Spot) -> Turn:
        """Return the angle of -L where L is neither zero nor infinite; at infinity L is real."""
        real, imaginary = self._direction(spot)
        if imaginary == 0:
            return Turn(Answer.of_exact(0) if real < 0 else Answer(Proof.ENCLOSED, refine=_pi, against=_is_pi), 0)

        def refine(bits: int) -> arb:
            # |imaginary| omega over real, with the sign of real kept in the second argument of atan2
            tangent = spot.ratio(self.imaginary, self.real) if real else None
            precision = bits + 16
            while True:
                with working_precision(precision + 16):
                    if tangent is None:
                        return arb.pi() / 2
                    slope = abs(tangent.enclose(precision)) * spot.enclose(precision).sqrt()
                    angle = arb.atan2(slope, arb(-real))
                if angle.rel_accuracy_bits() >= bits:
                    return angle
                precision *= 2

        against = equals_where(lambda times: self._turns_round(spot, times))
        return Turn(Answer(Proof.ENCLOSED, refine=refine, against=against), 1 if imaginary < 0 else -1)

    def _turns_round(self, spot: Spot, times: int) -> bool:
        """Whether so many times twice the angle of L are whole turns: cos 2t = 2 real^2/(|N|^2 |D|^2) - 1."""
        whole = self.above * self.below
        return spot.turns_round(2 * self.real * self.real - whole, whole, times)

    def _direction(self, spot: Spot) -> tuple[Sign, Sign]:
        """Return the signs of real and imaginary part of L."""
        if isinstance(spot, Infinity):
            return spot.sign(self.real), 0
        imaginary = 0 if spot.sign(X) == 0 else spot.sign(self.imaginary)
        return spot.sign(self.real), imaginary


def along_the_axis(p: fmpq_poly) -> tuple[fmpq_poly, fmpq_poly]:
    """Return E and O of p(j omega) = E(x) + j omega O(x), x = omega^2."""
    coefficients = p.coeffs()
    even = [-c if k % 2 else c for k, c in enumerate(coefficients[::2])]
    odd = [-c if k % 2 else c for k, c in enumerate(coefficients[1::2])]
    return fmpq_poly(even), fmpq_poly(odd)


def _pi(bits: int) -> arb:
    with working_precision(bits):
        return arb.pi()


_is_pi = equals_where(lambda times: times == 1)

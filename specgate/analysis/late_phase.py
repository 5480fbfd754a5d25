"""By how much something lags less than the dead time that it stands for, and up to which frequency that is little.

A dead time T turns the phase by -wT. What stands for it, a dead time of its own and a fraction N/D, turns it by less:
with D and N(-s) free of roots right of the axis, the phase of each along the axis, followed from zero, is a sum of one
angle for each real root and each pair, between 0 and pi/2 or pi, and the fraction lags by both together. The error
e(w) = w (T - own) - lag(w) is differentiated exactly: its slope is a polynomial in w^2 over one without roots on the
axis, so that e is monotone between the positive roots of that polynomial, which are certified. Piece by piece, the
first frequency at which |e| reaches a limit is bracketed by the signs of balls and bisected.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from flint import acb, arb, fmpq, fmpq_poly

from specgate.analysis.late_fractions import NOTHING, LateFraction
from specgate.response.answers import Answer
from specgate.systems.roots import certified_roots
from specgate.terms.enclosed import ends
from specgate.terms.precision import working_precision

_GUARD = 32
_BITS = 128
_DOUBLINGS = 200
_MIRROR = fmpq_poly([0, -1])
_UNDECIDED = "where the phase departs is not told"


@dataclass(frozen=True)
class LatePhase:
    """What lags against a dead time that is meant. own: a dead time in its place, exact, s."""

    meant: fmpq
    own: fmpq = fmpq(0)
    fraction: LateFraction = NOTHING

    def error_at(self, frequency: Answer) -> Answer:
        """Return by how much it lags less at a frequency (rad/s) than what is meant, rad."""

        def refine(bits: int) -> arb:
            return self._error(frequency.enclose(bits + _GUARD), bits)

        return Answer.of_ball(refine)

    def departs(self, limit_in_degrees: fmpq) -> Answer:
        """Return the first frequency (rad/s) at which the lag differs by a limit; infinite where it never does."""
        bracket = self._bracket(limit_in_degrees)
        if isinstance(bracket, Answer):
            return bracket
        low, high = bracket

        def refine(bits: int) -> arb:
            below, above = low, high
            with working_precision(bits):
                while above - below > abs(above) * fmpq(1, 2 ** (bits // 2)):
                    middle = (below + above) / 2
                    reached = self._reaches(arb(middle), limit_in_degrees, bits)
                    if reached is None:
                        break
                    below, above = (below, middle) if reached else (middle, above)
                return arb(below).union(arb(above))

        return Answer.of_ball(refine)

    # --- the search ---------------------------------------------------------------------------------------------

    def _bracket(self, limit: fmpq) -> tuple[fmpq, fmpq] | Answer:
        """Return a monotone piece in which the limit is first reached."""
        below = fmpq(0)
        for low, high in self._turns:
            reached = self._reaches(arb(low), limit, _BITS)
            if reached:
                return below, low
            if reached is None or self._reaches(_between(low, high), limit, _BITS) is not False:
                return Answer.undecided(_UNDECIDED)
            below = high
        above = below * 2 + 1 / self._scale
        for _ in range(_DOUBLINGS):
            if self._reaches(arb(above), limit, _BITS):
                return below, above
            above *= 2
        return Answer.nothing("it never does", infinite=True)

    def _reaches(self, frequency: arb, limit: fmpq, bits: int) -> bool | None:
        """Whether the error is at least a limit all over a ball of frequencies; None where that is not told."""
        error = abs(self._error(frequency, bits))
        with working_precision(bits):
            bound = arb.pi() * arb(limit) / 180
            return True if error >= bound else False if error < bound else None

    @cached_property
    def _scale(self) -> fmpq:
        """The longest of the times, s: one over it is where to start looking."""
        return max(self.meant, self.own, self.fraction.delay)

    @cached_property
    def _turns(self) -> list[tuple[fmpq, fmpq]]:
        """Enclosures of the positive frequencies at which the error turns round, in order."""
        slope = self._slope
        if not slope or slope.degree() < 1:
            return []
        with working_precision(_BITS):
            roots = [one.value for one in certified_roots(slope, _BITS)]
            real = [one.real for one in roots if one.imag.is_zero() and one.real > 0]
            return [ends(one.sqrt()) for one in sorted(real, key=lambda one: float(one.mid()))]

    @cached_property
    def _slope(self) -> fmpq_poly:
        """The numerator of the slope of the error over w, as a polynomial in w^2."""
        (turned, size), (other, weight) = (_slope_of(one) for one in self._sides)
        return fmpq_poly([self.meant - self.own]) * size * weight - turned * weight - other * size

    @property
    def _sides(self) -> tuple[fmpq_poly, fmpq_poly]:
        """The two polynomials, without roots right of the axis, whose phases the fraction lags by."""
        return self.fraction.denominator, self.fraction.numerator(_MIRROR)

    def _error(self, frequency: arb, bits: int) -> arb:
        lag = arb(0)
        for side in self._sides:
            if side.degree() < 1:
                continue
            roots = [one for one in certified_roots(side, bits + _GUARD) if not one.value.imag < 0]
            with working_precision(bits + _GUARD):
                for root in roots:
                    lag += root.multiplicity * _turn(root.value, frequency)
        with working_precision(bits + _GUARD):
            return frequency * arb(self.meant - self.own) - lag


def _between(low: fmpq, high: fmpq) -> arb:
    with working_precision(_BITS):
        return arb(low).union(arb(high))


def _turn(root: acb, frequency: arb) -> arb:
    """Return the phase that a root, with its conjugate where it has one, adds at j*frequency."""
    if root.imag.is_zero():
        return (-frequency / root.real).atan()
    square = root.real * root.real + root.imag * root.imag
    return acb(square - frequency * frequency, -2 * root.real * frequency).arg()


def _slope_of(p: fmpq_poly) -> tuple[fmpq_poly, fmpq_poly]:
    """Return numerator and denominator of d arg p(jw)/dw as polynomials in x = w^2.

    p(jw) = E(x) + jw O(x); the slope is (E (O + 2x O') - 2x O E')/(E^2 + x O^2).
    """
    x = fmpq_poly([0, 1])
    even = fmpq_poly([c if k % 2 == 0 else -c for k, c in enumerate(p.coeffs()[::2])])
    odd = fmpq_poly([c if k % 2 == 0 else -c for k, c in enumerate(p.coeffs()[1::2])])
    above = even * (odd + 2 * x * odd.derivative()) - 2 * x * odd * even.derivative()
    return above, even * even + x * odd * odd

"""Dead times written as fractions: recognised exactly in a block, with the dead time that they stand for.

A fraction A(-s)/A(s) with all roots of A left of the axis has the magnitude one at every frequency and only turns the
phase: an all-pass pair. Whether a block N/D holds one is decided exactly: after common factors are cancelled, the roots
that D shares with N(-s) are those of gcd(D, N(-s)), and its factors over the rationals with all roots to the left are
taken. A Pade approximant with a numerator of lower degree is no all-pass pair: the factor of N with all roots right of
the axis is compared, coefficient by coefficient, with the approximant that has the same delay at s = 0.

The delay of a fraction F, F(0) = 1, at low frequency is -F'(0): of an all-pass pair 2 A'(0)/A(0).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from itertools import combinations

from flint import fmpq, fmpq_poly

from specgate.approximations.pade import approximant
from specgate.systems.polynomials import ONE, product
from specgate.systems.stability import is_hurwitz
from specgate.systems.transfer import TransferFunction
from specgate.terms.records import record

CLOSE = fmpq(1, 100)
"""Part by which a coefficient may differ from that of the approximant: as much as two written digits leave."""
_MOST_FACTORS = 8
_MIRROR = fmpq_poly([0, -1])


@record
class LateFraction:
    """A factor of a block that stands for a dead time.

    numerator, denominator: 1 at s = 0. delay: of the factor at low frequency, s. all_pass: whether it is an all-pass
    pair, exactly. pade: whether it is the Pade approximant of its degrees, to a hundredth of each coefficient.
    """

    numerator: fmpq_poly
    denominator: fmpq_poly
    delay: fmpq
    all_pass: bool
    pade: bool

    @property
    def words(self) -> str:
        """What the fraction is."""
        above, below = self.numerator.degree(), self.denominator.degree()
        if self.all_pass:
            return f"an all-pass pair of order {below}" + (", a Pade approximant" if self.pade else "")
        return f"a Pade approximant of degrees {above} over {below}"


def late_fraction(block: TransferFunction) -> LateFraction | None:
    """Return the part of a block that stands for a dead time; None where there is none."""
    if not block.numerator or not block.denominator:
        return None
    reduced = block.reduced()
    return _all_pass(reduced) or _approximant(reduced)


def _all_pass(reduced: TransferFunction) -> LateFraction | None:
    shared = reduced.denominator.gcd(reduced.numerator(_MIRROR))
    left = product(factor**power for factor, power in shared.factor()[1] if is_hurwitz(factor))
    if left.degree() < 1:
        return None
    left = left / left[0]
    delay = 2 * left[1]
    return LateFraction(left(_MIRROR), left, delay, True, _is_pade(left(_MIRROR), left, delay))


def _approximant(reduced: TransferFunction) -> LateFraction | None:
    """Return the Pade approximant in a block whose zeros right of the axis are all of it; None where there is none."""
    right = product(f**power for f, power in reduced.numerator.factor()[1] if is_hurwitz(f(_MIRROR)))
    if right.degree() < 1:
        return None
    numerator = right / right[0]
    for candidate in _parts(reduced.denominator, numerator.degree()):
        denominator = candidate / candidate[0]
        delay = denominator[1] - numerator[1]
        if delay > 0 and _is_pade(numerator, denominator, delay):
            return LateFraction(numerator, denominator, delay, False, True)
    return None


def _parts(denominator: fmpq_poly, least: int) -> Iterator[fmpq_poly]:
    """Yield the products of factors with all roots to the left, of degree `least` or more, small ones first."""
    factors: list[fmpq_poly] = []
    for factor, power in denominator.factor()[1]:
        factors += [factor] * power if is_hurwitz(factor) else []
    if len(factors) > _MOST_FACTORS:
        return
    for size in range(1, len(factors) + 1):
        for chosen in combinations(factors, size):
            part = product(chosen)
            if part.degree() >= least:
                yield part


def _is_pade(numerator: fmpq_poly, denominator: fmpq_poly, delay: fmpq) -> bool:
    found = approximant(numerator.degree(), denominator.degree())
    scaled = fmpq_poly([0, delay])
    pairs = ((numerator, found.numerator(scaled)), (denominator, found.denominator(scaled)))
    return all(_close(own.coeffs(), wanted.coeffs()) for own, wanted in pairs)


def _close(own: Sequence[fmpq], wanted: Sequence[fmpq]) -> bool:
    return all(abs(one - other) <= CLOSE * abs(other) for one, other in zip(own, wanted, strict=True))


NOTHING = LateFraction(ONE, ONE, fmpq(0), True, True)
"""A fraction that turns nothing."""

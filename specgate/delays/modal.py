"""A delayed response far from its start: the residues at its rightmost poles, and a proved bound of the rest."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import lru_cache
from itertools import chain, islice

from flint import acb, acb_poly, arb, fmpq

from specgate.delays.laurent import as_time_polynomial, of_quasi, principal, without_root
from specgate.delays.remainder import Remainder, remainder
from specgate.delays.roots import Rightmost, certified_right
from specgate.delays.steps import Mode
from specgate.delays.swing import shaped
from specgate.delays.transform import Transform
from specgate.systems.quasi_count import Line, dominated_beyond, line
from specgate.systems.quasi_disc import roots_within
from specgate.systems.roots import certified_roots
from specgate.terms.precision import series_terms, working_precision
from specgate.terms.records import record

_RADIANS = 90
"""Height of the line times the longest delay that is worth its cells."""

_FAR = tuple(fmpq(halves, 2) for halves in (24, 16, 12, 10, 8, 7, 6, 5, 4, 3, 2))
_NEAR = tuple(fmpq(part, 2**power) for power in range(2, 8) for part in (3, 2))
"""Distances of the line from the axis that are tried, in parts of the longest delay.

Beside a dead time much longer than the lags a long chain of poles lies near Re s = ln(gain)/delay, and the line is best
right of it.
"""

_TRIED = 4


@record
class Poles:
    """All poles of Y in a region, but s = 0: of polynomials in s alone, and of each factor with dead time.

    count: their number, each as often as it is one, s = 0 included.
    """

    count: int
    rational: tuple[tuple[acb, int], ...]
    delayed: tuple[tuple[Rightmost, int], ...]

    def with_multiplicities(self, transform: Transform, bits: int) -> list[tuple[acb, int]]:
        """Return the poles but s = 0, of conjugates the upper one, in balls of about `bits` relative bits."""
        found: list[tuple[acb, int]] = []
        for factor, times in transform.rational_factors:
            roots = [root.value for root in certified_roots(factor, bits)]
            kept = [root for root in roots if any(root.overlaps(pole) for pole, _ in self.rational)]
            found += [(root, times) for root in kept if not root.imag < 0]
        for rightmost, times in self.delayed:
            found += [(root, times) for root in rightmost.at(bits)]
        return found

    def at(self, transform: Transform, bits: int) -> list[acb]:
        """Return all poles, s = 0 first if it is one; in the same order at every precision."""
        poles = [pole for pole, _ in self.with_multiplicities(transform, bits)]
        return [acb(0), *poles] if transform.zero_times else poles


def poles_right_of(transform: Transform, left: fmpq) -> tuple[Poles, Line] | None:
    """Return all poles of a transform right of Re s = left, proved complete by one count, with the line that counted.

    None where they were not found.
    """
    counted = line(transform.denominator, left)
    if counted is None:
        return None
    bound = arb(left)
    found = _complete(transform, counted.count, left, counted.height, lambda pole: bool(pole.real > bound))
    return None if found is None else (found, counted)


def poles_within(transform: Transform, radius: fmpq) -> Poles | None:
    """Return all poles of a transform with |s| < radius, proved complete by one count; None where they were not."""
    count = roots_within(transform.denominator, radius)
    if count is None:
        return None
    return _complete(transform, count, -radius, radius, lambda pole: bool(abs(pole) < arb(radius)))


def _complete(
    transform: Transform, count: int, left: fmpq, height: fmpq, inside: Callable[[acb], bool]
) -> Poles | None:
    """Return the poles of a region that lies right of a line and below a height, if as many are found as there are."""
    rational = [
        (root.value, times)
        for factor, times in transform.rational_factors
        for root in certified_roots(factor, 64)
        if inside(root.value)
    ]
    wanted = count - transform.zero_times - sum(times for _, times in rational)
    for fineness in (1.0, 2.5, 6.0):
        delayed = [
            (certified_right(factor, left, height, fineness).those(inside), times)
            for factor, times in transform.quasi_factors
        ]
        if sum(found.count * times for found, times in delayed) == wanted:
            upper = tuple((value, times) for value, times in rational if not value.imag < 0)
            return Poles(count, upper, tuple(delayed))
    return None


def suitable_lines(transform: Transform, *, near: bool = False) -> Iterator[fmpq]:
    """Yield lines (real parts) to try, those that leave least first: far from the axis, and yet with few poles.

    near: those within one over the longest delay.
    """
    longest = transform.denominator.delayed[-1][0]
    for spread in _NEAR if near else _FAR:
        left = -spread / longest * fmpq(199, 200)
        height = dominated_beyond(transform.denominator, left)
        if height is not None and height * longest <= _RADIANS:
            yield left


class Modal:
    """The residues of Y at its poles right of a line, and what they leave; the part at s = 0 is kept apart, exact."""

    def __init__(self, transform: Transform, poles: Poles, rest: Remainder) -> None:
        self.transform, self.poles, self.rest = transform, poles, rest
        self._at = lru_cache(maxsize=8)(self._modes)

    def modes(self, bits: int) -> tuple[Mode, ...]:
        """Return the modes, x counted from t = 0, at a working precision."""
        return self._at(bits)

    def _modes(self, bits: int) -> tuple[Mode, ...]:
        found = self.poles.with_multiplicities(self.transform, bits)
        with working_precision(bits):
            return tuple(self._mode(pole, times) for pole, times in found)

    def _mode(self, pole: acb, times: int) -> Mode:
        with series_terms(2 * times):
            above = shaped(of_quasi(self.transform.numerator, pole), pole, self.transform.period)
            below = without_root(of_quasi(self.transform.denominator, pole), times)
        with series_terms(times):
            parts = principal(above / below, times)
        return Mode.of(pole, acb_poly(as_time_polynomial(parts)))


def modal(transform: Transform, since: fmpq) -> Modal | None:
    """Return the modal sum of a retarded, stable transform with its remainder from a time on; None: not found."""
    lines = (islice(suitable_lines(transform, near=near), _TRIED) for near in (False, True))
    for left in chain.from_iterable(lines):
        for nudge in (fmpq(1), fmpq(93, 100)):
            found = poles_right_of(transform, left * nudge)
            if found is None:
                continue
            poles, counted = found
            rest = remainder(transform, counted, since)
            if rest is not None:
                return Modal(transform, poles, rest)
    return None

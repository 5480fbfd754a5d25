"""How closely other poles and zeros crowd the dominant pair, and the accuracy that is stated for it."""

from __future__ import annotations

from collections.abc import Sequence

from flint import arb, fmpq

from specgate.approximations.approximation import Accuracy
from specgate.approximations.dropped import dropped_at_peak, ringing
from specgate.approximations.features import Features
from specgate.approximations.figures import quotient, total
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision

Ranges = Sequence[tuple[int | fmpq, int | fmpq]]
"""Signed ranges in thousandths: pair alone; crowding up to 1/5; up to 2/5."""

SINGLE, SEVERAL = fmpq(1, 5), fmpq(2, 5)
"""Crowding by one pole or zero at the nearest place allowed; by the most that any accuracy is stated for."""


_COMPARED_AT = 128
_FINEST = fmpq(1, 10**9)
_QUIET, _QUIET_AT_PEAK = fmpq(1, 50), fmpq(1, 10000)


def by_decay_rates(features: Features) -> Answer | None:
    """Return the sum of sigma/(decay rate of a pole) and sigma/(distance of a zero); None where it has no value."""
    sigma = features.sigma
    figures = [pole.decay for pole in features.others] + [zero.distance for zero in features.zeros]
    if sigma is None or not features.stable or any(figure.exact == 0 for figure in figures):
        return None
    return total([quotient(sigma, figure) for figure in figures])


def by_distances(features: Features) -> Answer | None:
    """Return the sum of wn/(distance from the origin) over the other poles and zeros; None where it has no value."""
    frequency = features.natural_frequency
    figures = [spot.distance for spot in (*features.others, *features.zeros)]
    if frequency is None or any(figure.exact == 0 for figure in figures):
        return None
    return total([quotient(frequency, figure) for figure in figures])


def excess_of_zeros(features: Features) -> int:
    """Return by how many the zeros outnumber the dropped poles, at most, within any distance from the origin.

    Where a distance cannot be told from another, the zero counts as the nearer one.
    """
    zeros = [zero.distance.enclose(_COMPARED_AT) for zero in features.zeros]
    poles = [pole.distance.enclose(_COMPARED_AT) for pole in features.others]
    within = [sum(not other > reach for other in zeros) - sum(bool(pole <= reach) for pole in poles) for reach in zeros]
    return max(within, default=0)


def in_decay_rates(features: Features, ranges: Ranges) -> Accuracy | None:
    """Return the accuracy that holds for this response, crowding measured in decay rates."""
    return _stated(features, by_decay_rates(features), ranges)


def in_distances(features: Features, ranges: Ranges) -> Accuracy | None:
    """Return the accuracy that holds for this response, crowding measured in distances from the origin.

    The middle range asks besides that the dropped modes have as good as died away at the pair's peak: a ripple of a
    ten-thousandth of the overshoot still moves a flat peak by half a per cent.
    """
    at_peak, ever = dropped_at_peak(features), ringing(features)
    quiet = (
        at_peak is not None
        and ever is not None
        and _surely_at_most(at_peak, _QUIET_AT_PEAK)
        and _surely_at_most(ever, _QUIET)
    )
    return _stated(features, by_distances(features), ranges, quiet)


def _stated(features: Features, crowding: Answer | None, ranges: Ranges, quiet: bool = True) -> Accuracy | None:
    alone, single, several = ranges
    if features.alone:
        return _accuracy(alone, "the pair alone")
    if crowding is None:
        return None
    if quiet and _surely_at_most(crowding, SINGLE):
        return _accuracy(single, "with another pole or zero at the nearest place allowed, or the like of it")
    if _surely_at_most(crowding, SEVERAL):
        return _accuracy(several, "with several other poles or zeros near the nearest place allowed")
    return None


def _surely_at_most(value: Answer, limit: fmpq) -> bool:
    if value.exact is not None:
        return value.exact <= limit
    ball = value.enclose(_COMPARED_AT)
    with working_precision(_COMPARED_AT):
        return bool(ball <= arb(limit))


def _accuracy(thousandths: tuple[int | fmpq, int | fmpq], where: str) -> Accuracy:
    low, high = (fmpq(end) / 1000 for end in thousandths)
    if low == high == 0:
        return Accuracy(fmpq(0), fmpq(0), f"exact ({where})")
    return Accuracy(low, high, f"{signed_percent(low)} to {signed_percent(high)} % ({where})")


def outward(low: fmpq, high: fmpq) -> tuple[fmpq, fmpq]:
    """Return a range rounded outward, to between a hundredth and a thousandth of its width."""
    step = fmpq(1)
    while step * 100 > high - low and step > _FINEST:
        step /= 10
    return step * (low / step).floor(), step * (high / step).ceil()


def signed_percent(part: fmpq) -> str:
    """Return a fraction in per cent with its sign, nothing without one."""
    return f"{100 * int(part.p) / int(part.q):+.6g}" if part else "0"

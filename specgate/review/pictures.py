"""What the pictures of an audit are drawn from: the error of a formula over damping ratio, and the map of what is near.

Both are plain values of the Review, so that a report draws and never computes.
"""

from __future__ import annotations

from functools import lru_cache

from flint import fmpq

from specgate.approximations.approximation import Approximation
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN
from specgate.approximations.over_damping import ErrorPoint, error_over_damping
from specgate.approximations.table import chain, entry
from specgate.compliance.assessment import Audit
from specgate.measures.measure import Arguments
from specgate.response.answers import Answer
from specgate.review.printing import plain_number, poles
from specgate.review.types import ErrorCurveReview, PointReview, Pole, SeparationReview
from specgate.systems.roots import certified_roots
from specgate.terms.enclosed import ends, printed_short

_DOMINANT = "dominant_pair"
_NO_ERROR = fmpq(1, 10**9)
_SETTLING = ("separation", "zero_separation")
_SHAPE = "distance"


def error_curve(audit: Audit, arguments: Arguments) -> ErrorCurveReview | None:
    """Return the error of a rule over the damping ratio of the pair alone, and where this response is; None without."""
    read = audit.read
    features = None if read is None else read.viewed
    if read is None or not _second_order(read.row) or not isinstance(features, Features):
        return None
    if features.damping is None or not features.stable:
        return None
    points = _points(read.row.name, read.row.variant, arguments)
    if not points:
        return None
    holding = [point.damping for point in points if point.holds]
    error = None if audit.error is None else audit.error.relative
    return ErrorCurveReview(
        damping=tuple(_short(Answer.of_exact(point.damping)) for point in points),
        error=tuple(_error(point) for point in points),
        lower=_short(Answer.of_exact(min(holding))) if holding else None,
        upper=_short(Answer.of_exact(max(holding))) if holding else None,
        here=PointReview(_short(features.damping), None if error is None else plain_number(error, fmpq(1))),
    )


def separation(audit: Audit, arguments: Arguments) -> SeparationReview | None:
    """Return the poles and zeros about the dominant pair, and how far from it they have to be; None without a pair."""
    read = audit.read
    features = None if read is None else read.viewed
    if read is None or not isinstance(features, Features) or features.pair is None or not features.stable:
        return None
    if not any(row.name == _DOMINANT for row in chain(read.row.name)):
        return None
    thresholds = {
        one.condition.key: one.threshold for one in audit.conditions if one.approximation == _DOMINANT and one.threshold
    }
    if not {*_SETTLING, _SHAPE} & set(thresholds):
        return None
    return _map(features, thresholds)


def _map(features: Features, thresholds: dict[str, fmpq]) -> SeparationReview:
    pair, sigma, frequency = features.pair, features.sigma, features.natural_frequency
    assert pair is not None
    assert sigma is not None
    assert frequency is not None
    channel = features.channel
    by_rate, by_distance, by_frequency = (thresholds.get(key) for key in (*_SETTLING, _SHAPE))
    reach = by_frequency if by_distance is None else by_distance
    return SeparationReview(
        real=-_short(sigma),
        imaginary=printed_short(pair.at(SHOWN).imag),
        poles=poles(certified_roots(channel.denominator, SHOWN)),
        zeros=_zeros(features),
        real_part=None if by_rate is None else -_short(_times(by_rate, sigma)),
        distance=None if reach is None else _short(_times(reach, frequency if by_distance is None else sigma)),
        poles_too=by_distance is None,
    )


def _zeros(features: Features) -> tuple[Pole, ...]:
    numerator = features.channel.numerator
    return poles(certified_roots(numerator, SHOWN)) if numerator.degree() > 0 else ()


@lru_cache(maxsize=64)
def _points(name: str, variant: str | None, arguments: Arguments) -> tuple[ErrorPoint, ...]:
    return error_over_damping(entry(name, variant), arguments)


def _second_order(row: Approximation) -> bool:
    """Whether a row is a rule for a pair, which the pair alone is not."""
    return row.name != _DOMINANT and _DOMINANT in row.premises and row.reduce is None


def _error(point: ErrorPoint) -> float:
    return 0.0 if max(abs(end) for end in ends(point.error)) < _NO_ERROR else printed_short(point.error)


def _times(factor: fmpq, value: Answer) -> Answer:
    if value.exact is not None:
        return Answer.of_exact(factor * value.exact)
    return Answer.of_ball(lambda bits: factor * value.enclose(bits))


def _short(value: Answer) -> float:
    return printed_short(value.enclose(SHOWN))

"""What is lost when everything but the dominant pair is dropped: other modes, and amplitude of the pair's own."""

from __future__ import annotations

from collections.abc import Callable
from math import prod

from flint import arb, fmpq

from specgate.approximations.features import Features
from specgate.approximations.spots import Spot
from specgate.response.answers import Answer
from specgate.response.modes import Expansion, Mode, expand
from specgate.terms.precision import working_precision


def dropped_in_band(features: Features, band: fmpq) -> Answer | None:
    """Return how much of a settling band the dropped modes may still fill when the pair enters it.

    The bound of their sum at t = ln(1/band)/sigma, in parts of band times change; None where there is no such time.
    """
    pair = _simple_pair(features)
    if pair is None or not 0 < band < 1:
        return None
    return _left(features, pair, lambda sigma, _: -arb(band).log() / sigma, lambda _, __: arb(band))


def dropped_at_peak(features: Features) -> Answer | None:
    """Return how much the dropped modes may still add at the pair's first peak, in parts of its overshoot."""
    pair = _simple_pair(features)
    if pair is None:
        return None
    return _left(
        features, pair, lambda _, omega: arb.pi() / omega, lambda sigma, omega: (-arb.pi() * sigma / omega).exp()
    )


def pair_amplitude(features: Features) -> Answer | None:
    """Return the amplitude of the pair's oscillation in parts of what it has in the response of the pair alone."""
    pair = _simple_pair(features)
    if pair is None:
        return None

    def refine(bits: int) -> arb:
        expansion = _expansion(features, bits)
        place = pair.at(bits)
        with working_precision(expansion.bits):
            full = next(mode for mode in expansion.modes if mode.pole.overlaps(place))
            alone = abs(place) / place.imag
            return abs(full.coefficients[0]) / (abs(arb(expansion.offset)) * alone)

    return Answer.of_ball(refine)


def ringing(features: Features) -> Answer | None:
    """Return a bound of all dropped oscillating modes together at any time, in parts of the change.

    A mode e^(-s t)(a cos w t + b sin w t) stays below |a| + |b| sin f e^(-f/tan f), f = atan(w/s), where its sine term
    is greatest: a pair that is as good as real does not ring.
    """
    pair = _simple_pair(features)
    if pair is None:
        return None

    def refine(bits: int) -> arb:
        expansion = _expansion(features, bits)
        place = pair.at(bits)
        with working_precision(expansion.bits):
            dropped = [mode for mode in expansion.modes if mode.oscillates and not mode.pole.overlaps(place)]
            return sum((_crest(mode) for mode in dropped), arb(0)) / abs(arb(expansion.offset))

    return Answer.of_ball(refine)


def zeros_amplitude(features: Features) -> Answer | None:
    """Return the factor by which the zeros change the amplitude of the pair's oscillation: product of |1 - p/z|."""
    pair = _simple_pair(features)
    if pair is None:
        return None

    def refine(bits: int) -> arb:
        place, zeros = pair.at(bits), [zero.at(bits) for zero in features.zeros]
        with working_precision(bits):
            return prod((abs(1 - place / zero) for zero in zeros), start=arb(1))

    return Answer.of_ball(refine)


def _left(
    features: Features, pair: Spot, instant: Callable[[arb, arb], arb], yardstick: Callable[[arb, arb], arb]
) -> Answer:
    """Return the bound of the dropped modes at an instant, in parts of a yardstick times the change.

    Instant and yardstick are functions of sigma and wd.
    """

    def refine(bits: int) -> arb:
        expansion = _expansion(features, bits)
        place = pair.at(bits)
        with working_precision(expansion.bits):
            parts = -place.real, place.imag
            time = instant(*parts)
            left = [_envelope(mode, time) for mode in expansion.modes if not mode.pole.overlaps(place)]
            return sum(left, arb(0)) / (yardstick(*parts) * abs(arb(expansion.offset)))

    return Answer.of_ball(refine)


def _simple_pair(features: Features) -> Spot | None:
    """Return the pair where it is simple and decays, and the change is not zero."""
    pair = features.pair
    if pair is None or not features.stable or not features.steady_gain:
        return None
    return None if any(pole.index == pair.index for pole in features.others) else pair


def _expansion(features: Features, bits: int) -> Expansion:
    channel = features.channel
    return expand(channel.numerator, channel.denominator, fmpq(1), bits)


def _envelope(mode: Mode, time: arb) -> arb:
    """Return the bound of a mode at a time."""
    powers = [abs(coefficient) * time**j for j, coefficient in enumerate(mode.coefficients)]
    return sum(powers, arb(0)) * (mode.pole.real * time).exp()


def _crest(mode: Mode) -> arb:
    """Return a bound of a decaying oscillating mode at any time."""
    decay, omega = -mode.pole.real, mode.pole.imag
    angle = (omega / decay).atan()
    first, *higher = mode.coefficients
    crest = abs(first.real) + abs(first.imag) * angle.sin() * (-angle / angle.tan()).exp()
    for power, coefficient in enumerate(higher, start=1):
        crest += abs(coefficient) * (power / (arb(1).exp() * decay)) ** power
    return crest

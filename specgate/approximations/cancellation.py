"""A pole and a zero beside it: what is left without them, and how far that is from the whole at any time.

With pf and zf the factors of pole and zero, 1 at s = 0, and F the rest, the whole is F zf/pf and differs from F by
F (zf - pf)/pf: both have one final value, and the greatest deviation of the step response of this difference, which is
proved as that of any response, is the greatest distance a between the two. From |y - x| <= a alone follows

    |y - final| <= b for good implies |x - final| <= b + a for good,
    |x - final| <= b - a for good implies |y - final| <= b for good,
    y >= l implies x >= l - a, x >= l + a implies y >= l,
    max x - a <= max y <= max x + a.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from flint import acb, arb, fmpq, fmpq_poly

from specgate.approximations.approximation import Accuracy
from specgate.approximations.crowding import outward, signed_percent
from specgate.approximations.features import Features
from specgate.approximations.figures import SHOWN
from specgate.approximations.spots import Spot
from specgate.measures.measure import Band
from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.terms.enclosed import ends, printed_short
from specgate.terms.precision import working_precision
from specgate.terms.records import record

_DIVIDED_AT = 256
_SPARE = fmpq(1, 10**9)
"""Part by which a is taken greater than it is: far more than a couple divided out to seventy digits is off by."""


@record
class Couple:
    """A pole and a zero, both left of the axis, both real or both of a complex pair (the upper one stands for it)."""

    pole: Spot
    zero: Spot

    @property
    def words(self) -> str:
        """Both in words."""
        return f"pole at {_place(self.pole)}, zero at {_place(self.zero)} 1/s"


@dataclass(frozen=True, eq=False)
class Remainder:
    """What is left of a response without a tail that is left out.

    rest: the features of what is left. unit: its response to a step that makes a change of 1.
    tail: greatest distance between the two responses at any time, in parts of the change.
    """

    rest: Features
    unit: StepResponse
    tail: Answer

    @cached_property
    def _most(self) -> fmpq:
        return ends(self.tail.enclose(SHOWN))[1] * (1 + _SPARE)

    def width(self, band: Band) -> fmpq:
        """Return the half-width of a band in parts of the change."""
        if band.relative:
            return band.size
        final = self.rest.steady_gain
        assert final is not None
        return band.size / abs(final * self.rest.subject.size)

    def of_settling(self, band: Band) -> Accuracy | None:
        """Return the accuracy of the rest's settling time; None where the tail may fill the band."""
        width = self.width(band)
        if width <= self._most:
            return None
        value, early, late = (self.unit.settling(w) for w in (width, width + self._most, width - self._most))
        return self._stated(value, early, late)

    def of_rise(self, lower: fmpq, upper: fmpq) -> Accuracy | None:
        """Return the accuracy of the rest's time between two fractions of the change; lower 0: from the start."""
        most = self._most
        value = self._between(lower, upper)
        early, late = (
            self._between(lower + most if lower else lower, upper - most),
            self._between(lower - most, upper + most),
        )
        return self._stated(value, early, late)

    def of_overshoot(self) -> Accuracy | None:
        """Return the accuracy of the rest's overshoot; None where the tail may be all of it."""
        greatest = self.unit.greatest().value
        if greatest.absent is not None:
            return None
        most = self._most
        value, less, more = (_shifted(greatest, by) for by in (fmpq(-1), -1 - most, -1 + most))
        return self._stated(value, less, more)

    def _between(self, lower: fmpq, upper: fmpq) -> Answer:
        start, end = self._arrival(lower), self._arrival(upper)
        if start.absent is not None or end.absent is not None:
            return Answer.nothing("a level is never reached")
        return Answer.of_ball(lambda bits: _difference(end, start, bits))

    def _arrival(self, level: fmpq) -> Answer:
        return Answer.of_exact(0) if level <= 0 else self.unit.first_arrival(level)

    def _stated(self, value: Answer, least: Answer, most: Answer) -> Accuracy | None:
        """Return the accuracy of a value where the truth lies between two others."""
        if any(one.absent is not None for one in (value, least, most)):
            return None
        (low, high), floor, ceiling = (ends(one.enclose(SHOWN)) for one in (value, least, most))
        if floor[0] <= 0:
            return None
        lower, upper = outward(low / ceiling[1] - 1, high / floor[0] - 1)
        tail = f"a tail of at most {100 * printed_short(self.tail.enclose(SHOWN)):.3g} % of the change is left out"
        return Accuracy(
            lower,
            upper,
            f"{signed_percent(lower)} to {signed_percent(upper)} % ({tail})",
        )


@dataclass(frozen=True, eq=False)
class Cancellation(Remainder):
    """What is left of a response without a couple."""

    couple: Couple


def cancellation(features: Features) -> Cancellation | None:
    """Return the response without the couple whose ratio is nearest to 1; None where there is none."""
    couples = [Couple(pole, zero) for pole in features.poles for zero in features.zeros if _of_a_kind(pole, zero)]
    gain = features.steady_gain
    if not couples or not gain or not features.stable:
        return None
    distances = [float(_offset(couple).mid()) for couple in couples]
    couple = couples[distances.index(min(distances))]
    pole, zero = _factor(couple.pole), _factor(couple.zero)
    numerator, denominator = _divided(features.channel.numerator, zero), _divided(features.channel.denominator, pole)
    tail = StepResponse(numerator * (zero - pole), denominator * pole, 1 / gain)
    return Cancellation(
        features.of(numerator, denominator),
        StepResponse(numerator, denominator, 1 / gain),
        tail.peak_deviation().value,
        couple,
    )


def _of_a_kind(pole: Spot, zero: Spot) -> bool:
    """Whether both lie left of the axis, and are real or upper ones of complex pairs."""
    left = pole.decay.enclose(SHOWN) > 0 and zero.decay.enclose(SHOWN) > 0
    return left and ((pole.upper and zero.upper) or not (pole.oscillates or zero.oscillates))


def _offset(couple: Couple) -> arb:
    pole, zero = couple.pole.at(SHOWN), couple.zero.at(SHOWN)
    with working_precision(SHOWN):
        return abs(1 - pole / zero)


def _factor(spot: Spot) -> fmpq_poly:
    """Return the factor of a root or pair of roots, 1 at s = 0; what is not rational to some seventy digits."""
    rate = rational(spot.decay)
    if not spot.oscillates:
        return fmpq_poly([1, 1 / rate])
    square = rational(spot.distance_squared)
    return fmpq_poly([1, 2 * rate / square, 1 / square])


def rational(value: Answer) -> fmpq:
    """Return a number, or what it is to some seventy digits where it is not known to be rational."""
    return value.exact if value.exact is not None else value.enclose(_DIVIDED_AT).mid().fmpq()


def _divided(polynomial: fmpq_poly, factor: fmpq_poly) -> fmpq_poly:
    """Return a polynomial without a factor, of the same value at s = 0."""
    quotient, _ = divmod(polynomial, factor)
    return quotient * (polynomial[0] / quotient[0])


def _shifted(value: Answer, by: fmpq) -> Answer:
    if value.exact is not None:
        return Answer.of_exact(value.exact + by)
    return Answer.of_ball(lambda bits: value.enclose(bits) + by)


def _difference(later: Answer, earlier: Answer, bits: int) -> arb:
    end, start = later.enclose(bits), earlier.enclose(bits)
    with working_precision(bits):
        return end - start


def _place(spot: Spot) -> str:
    place: acb = spot.at(SHOWN)
    real = f"{printed_short(place.real):.4g}"
    return f"{real} ± {printed_short(place.imag):.4g}j" if spot.oscillates else real

"""The step response of a complex pair alone, wn^2/(s^2 + 2 sigma s + wn^2), in closed form and in balls.

With the angle a = wd t and rho = sigma/wd the deviation from the final value is e(a) = e^(-rho a) (cos a + rho sin a)
times the change. Its derivative is -(1 + rho^2) e^(-rho a) sin a, so that e is monotone between multiples of pi, where
it takes the values (-1)^k e^(-rho k pi).
"""

from __future__ import annotations

from collections.abc import Callable

from flint import arb, fmpq

from specgate.approximations.spots import Spot
from specgate.response.answers import Answer
from specgate.terms.precision import HIGHEST, working_precision

_GUARD = 32


def overshoot(pair: Spot) -> Answer:
    """Return the overshoot as a fraction of the change: e^(-pi rho)."""
    return _of_pair(pair, lambda sigma, omega: (-arb.pi() * sigma / omega).exp())


def peak_time(pair: Spot) -> Answer:
    """Return the time of the first peak, s: pi/wd."""
    return _of_pair(pair, lambda _, omega: arb.pi() / omega)


def settling_time(pair: Spot, band: fmpq) -> Answer:
    """Return the settling time into a band that is a fraction of the change, s; the pair must decay, 0 < band < 1."""

    def refine(bits: int) -> arb:
        sigma, omega, lobes = _lobes(pair, band, bits)
        with working_precision(bits + _GUARD):
            rho = sigma / omega
            sign = -1 if lobes % 2 else 1
            return _crossing(lambda a: sign * _deviation(rho, a) - band, lobes, bits) / omega

    return Answer.of_ball(refine)


def arrival(pair: Spot, fraction: fmpq) -> Answer:
    """Return the first time at which a fraction (0 to 1) of the change is reached, s; the pair must decay."""

    def refine(bits: int) -> arb:
        sigma, omega = _parts(pair, bits)
        with working_precision(bits + _GUARD):
            rho = sigma / omega
            return _crossing(lambda a: _deviation(rho, a) - (1 - fraction), 0, bits) / omega

    return Answer.of_ball(refine)


def rise_time(pair: Spot, lower: fmpq, upper: fmpq) -> Answer:
    """Return the time between first arrivals at two fractions of the change, s."""
    start, end = arrival(pair, lower), arrival(pair, upper)

    def refine(bits: int) -> arb:
        first, last = start.enclose(bits), end.enclose(bits)
        with working_precision(bits):
            return last - first

    return Answer.of_ball(refine)


def _parts(pair: Spot, bits: int) -> tuple[arb, arb]:
    """Return sigma and wd."""
    place = pair.at(bits + _GUARD)
    with working_precision(bits + _GUARD):
        return -place.real, place.imag


def _of_pair(pair: Spot, of: Callable[[arb, arb], arb]) -> Answer:
    def refine(bits: int) -> arb:
        sigma, omega = _parts(pair, bits)
        with working_precision(bits + _GUARD):
            return of(sigma, omega)

    return Answer.of_ball(refine)


def _deviation(rho: arb, angle: arb) -> arb:
    sine, cosine = angle.sin_cos()
    return (-rho * angle).exp() * (cosine + rho * sine)


def _lobes(pair: Spot, band: fmpq, bits: int) -> tuple[arb, arb, int]:
    """Return sigma, wd and the number of peaks after the start that stick out of the band.

    Peak k does if k < ln(1/band)/(pi rho); the precision is raised until that number is not a whole one.
    Raises ArithmeticError if it cannot be told from one.
    """
    while bits <= 2 * HIGHEST:
        sigma, omega = _parts(pair, bits)
        with working_precision(bits + _GUARD):
            whole = (-arb(band).log() * omega / (arb.pi() * sigma)).floor().unique_fmpz()
        if whole is not None:
            return sigma, omega, int(whole)
        bits *= 2
    raise ArithmeticError("a peak of the pair cannot be told from the edge of the band")


def _crossing(falls: Callable[[arb], arb], lobes: int, bits: int) -> arb:
    """Return a ball about the zero of a function that falls from + to - between `lobes` and `lobes` + 1 times pi."""
    low, high = arb.pi() * lobes, arb.pi() * (lobes + 1)
    for _ in range(bits + _GUARD):
        middle = ((low + high) / 2).mid()
        value = falls(middle)
        if value > 0:
            low = middle
        elif value < 0:
            high = middle
        else:
            break
    return low.union(high)

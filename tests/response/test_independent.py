"""Responses of every difficult kind against an independent method: exponentials of the system matrix, 90 digits.

A claim is checked where it is made and on both sides of it: an extreme is the value at its time and no sample exceeds
it, a crossing lies on its edge and nothing leaves the band after it (or reaches the level before it).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from math import log2

import mpmath
import pytest
from flint import arb, arb_mat, fmpq, fmpq_poly

from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.systems.polynomials import highest_first, product
from specgate.terms.precision import working_precision

DIGITS = 90
"""Working digits: 60 and what stiff matrices take of them."""

BITS = 500

CLOSE = mpmath.mpf(10) ** -25


def _exact(value: str | int | Fraction) -> fmpq:
    fraction = Fraction(value)
    return fmpq(fraction.numerator, fraction.denominator)


def real(pole: str | int | Fraction) -> fmpq_poly:
    """Return s + pole."""
    return highest_first([fmpq(1), _exact(pole)])


def pair(frequency: str | int, damping: str | Fraction) -> fmpq_poly:
    """Return s^2 + 2 damping frequency s + frequency^2."""
    w, z = _exact(frequency), _exact(damping)
    return highest_first([fmpq(1), 2 * z * w, w * w])


@dataclass(frozen=True)
class System:
    """A named transfer function."""

    name: str
    numerator: fmpq_poly
    denominator: fmpq_poly


def systems() -> Iterator[System]:
    """Yield a few systems of every kind that is known to be hard."""
    one = fmpq_poly([1])
    fifth = Fraction(1, 5)
    yield System("plain", real(3), pair(2, "0.3") * real(5))
    yield System("right half plane zeros", real(-1) * real(-4), pair(1, "0.6") * real(3) * real(7))
    yield System("stiff 1e6", one, real(1) * real(10**6))
    yield System("stiff 1e9 with a fast pair", one, real(1) * pair(10**9, "0.2"))
    yield System("damping 1e-4", one, pair(1, "0.0001"))
    yield System("damping 1e-3 and a slow pole", real("0.4"), pair(2, "0.001") * real("0.3"))
    yield System("eight equal poles", one, real("1.3") ** 8)
    yield System("eight equal poles, two zeros", real("0.2") * real(-5), real(1) ** 8)
    yield System("four equal pairs", one, pair(1, "0.4") ** 4)
    yield System("slow tail from above", real("0.0099"), real("0.01") * pair(1, "0.7"))
    yield System("slow tail from below", real("0.0101"), real("0.01") * pair(1, "0.7"))
    yield System("pole beside a zero, 1e-8", real("2.00000001"), real(2) * pair(1, "0.4"))
    yield System("close poles 1e-4", one, product(real(1 + k * Fraction(1, 10**4)) for k in range(5)))
    yield System("close pairs 1e-3", one, pair(1, "0.3") * pair("1.001", "0.3001"))
    yield System("beating", pair(3, fifth), pair("1", "0.01") * pair("1.13", "0.01"))
    yield System("order 20", real("0.7"), product(real(Fraction(k, 7)) for k in range(1, 21)))
    yield System("order 12 pairs", one, product(pair(k, "0.35") for k in range(1, 7)))
    yield System("feed-through", real(2) * real(-3), pair(1, "0.5"))
    yield System("feed-through, jump the wrong way", real(-1), real(1))
    yield System("zeros, no overshoot", real(2) * real(9), real(1) * real(3) * real(8) * real(20))
    yield System("returns to zero", fmpq_poly([0, 1]), pair(1, "0.3") * real(4))
    yield System("real pole and pair on one line", one, real(1) * highest_first([fmpq(1), fmpq(2), fmpq(10)]))
    yield System("falls", -3 * real("0.1"), pair(1, "0.2") * real(1))
    yield System("time scale 1e9", one, real(10**9) * pair(3 * 10**9, "0.2"))
    yield System("time scale 1e-9", one, real(Fraction(1, 10**9)) * pair(Fraction(3, 10**9), "0.2"))


class Matrix:
    """The step response as one component of exp(A t) x0; time in units that make the largest coefficient moderate.

    The exponential is FLINT's, of the whole matrix: no pole and no residue is computed on the way. mpmath's, from its
    own Taylor series, is compared with it where that is quick.
    """

    def __init__(self, system: System) -> None:
        common = system.numerator.gcd(system.denominator)
        top, bottom = system.numerator // common, system.denominator // common
        self.order, lead = bottom.degree(), bottom.leading_coefficient()
        self._unit = fmpq(2) ** round(log2(_speed(bottom)))
        low = [bottom[k] / lead / self._unit ** (self.order - k) for k in range(self.order)]
        rest = top - bottom * (top[self.order] / lead)
        self._output = [rest[k] / lead / self._unit ** (self.order - k) for k in range(self.order)]
        self._output.append(top[self.order] / lead)
        size = self.order + 1
        self._rows = [[fmpq(int(column == row + 1)) for column in range(size)] for row in range(size)]
        self._rows[self.order - 1] = [-c for c in low] + [fmpq(1)]
        self._rows[self.order] = [fmpq(0)] * size

    def samples(self, start: mpmath.mpf, step: mpmath.mpf, count: int) -> list[mpmath.mpf]:
        """Return y at start, start + step ..., count values."""
        with working_precision(BITS):
            matrix = arb_mat(self.order + 1, self.order + 1, [arb(c) for row in self._rows for c in row])
            state = arb_mat(self.order + 1, 1, [arb(int(k == self.order)) for k in range(self.order + 1)])
            output = arb_mat(1, self.order + 1, [arb(c) for c in self._output])
            state = (matrix * arb(self._time(start))).exp() * state
            onward = (matrix * arb(self._time(step))).exp()
            found = []
            for _ in range(count):
                found.append(_middle((output * state)[0, 0]))
                state = onward * state
            return found

    def _time(self, time: mpmath.mpf) -> fmpq:
        return _exact(Fraction(*mpmath.libmp.to_rational(mpmath.mpf(time)._mpf_))) * self._unit

    def at(self, time: mpmath.mpf) -> mpmath.mpf:
        """Return y at a time."""
        return self.samples(time, mpmath.mpf(0), 1)[0]

    def by_mpmath(self, time: mpmath.mpf) -> mpmath.mpf:
        """Return y at a time, by mpmath alone."""
        matrix = mpmath.matrix([[_mpf(c) for c in row] for row in self._rows]) * (time * _mpf(self._unit))
        last = mpmath.expm(matrix, method="taylor")[:, self.order]
        return mpmath.fdot([_mpf(c) for c in self._output], list(last))


def _speed(bottom: fmpq_poly) -> float:
    """Return a frequency that all poles are of the order of, or below."""
    order, lead = bottom.degree(), bottom.leading_coefficient()
    rates = [abs(bottom[k] / lead) for k in range(order)]
    return max((int(rate.p) / int(rate.q)) ** (1 / (order - k)) for k, rate in enumerate(rates) if rate != 0)


def _mpf(value: fmpq) -> mpmath.mpf:
    return mpmath.mpf(int(value.p)) / int(value.q)


def _middle(ball: arb) -> mpmath.mpf:
    return _mpf(ball.mid().fmpq())


ALL = list(systems())


@pytest.fixture(autouse=True)
def _many_digits() -> Iterator[None]:
    with mpmath.workdps(DIGITS):
        yield


@pytest.fixture(params=ALL, ids=lambda system: system.name)
def both(request: pytest.FixtureRequest) -> tuple[StepResponse, Matrix, mpmath.mpf]:
    """Return a response, the independent one, and a time after which nothing of interest happens."""
    system: System = request.param
    response = StepResponse(system.numerator, system.denominator, fmpq(1))
    slowest = min(-float(root.value.real) for root in response.poles)
    return response, Matrix(system), mpmath.mpf(12 / slowest)


Both = tuple[StepResponse, Matrix, mpmath.mpf]


def test_extremes(both: Both) -> None:
    response, matrix, horizon = both
    for extreme, sign in ((response.greatest(), 1), (response.least(), -1)):
        value = _middle(extreme.value.enclose(128))
        scale = max(abs(value), mpmath.mpf(10) ** -3)
        if extreme.time.absent is None:
            time = _middle(extreme.time.enclose(128))
            assert abs(matrix.at(time) - value) < CLOSE * scale
            around = matrix.samples(time * mpmath.mpf("0.99"), time / 1000, 21) if time > 0 else []
        else:
            assert extreme.time.absent.proved
            around = []
        seen = around + matrix.samples(horizon / 400, horizon / 200, 40)
        assert max(sign * sample for sample in seen) <= sign * value + CLOSE * scale


def test_settling(both: Both) -> None:
    response, matrix, horizon = both
    final = response.final_value().exact
    assert final is not None
    change = abs(final) if final != 0 else _peak(response)
    for band in (change / 50, change / 20, change / 1000):
        time, edge = _middle(response.settling(band).enclose(128)), _mpf(band)
        assert abs(abs(matrix.at(time) - _mpf(final)) - edge) < CLOSE * edge
        after = matrix.samples(time * (1 + CLOSE), time / 700, 30)
        after += matrix.samples(time * (1 + CLOSE), horizon / 100, 30)
        assert max(abs(sample - _mpf(final)) for sample in after) <= edge * (1 + CLOSE)
        assert abs(matrix.at(time * (1 - CLOSE)) - _mpf(final)) > edge


def test_arrivals(both: Both) -> None:
    response, matrix, _ = both
    final = response.final_value().exact
    assert final is not None
    if final == 0:
        assert response.first_arrival(fmpq(1, 10**30)).absent is None
        return
    for share in (fmpq(1, 10), fmpq(1, 2), fmpq(9, 10)):
        answer: Answer = response.first_arrival(final * share)
        time, level = _middle(answer.enclose(128)), _mpf(share)
        if time == 0:
            jump = response.initial_value().exact
            assert jump is not None
            assert jump / final >= share
            continue
        assert abs(matrix.at(time) / _mpf(final) - level) < CLOSE
        before = matrix.samples(time / 50, time / 50, 49) + matrix.samples(time * mpmath.mpf("0.99"), time / 2000, 20)
        assert max(sample / _mpf(final) for sample in before) < level


def _peak(response: StepResponse) -> fmpq:
    return response.peak_deviation().value.enclose(64).mid().fmpq()


def test_values_at_any_time(both: Both) -> None:
    response, matrix, horizon = both
    for share in (Fraction(1, 977), Fraction(1, 31), Fraction(2, 5)):
        time = fmpq(int(horizon * 10**12 * share.numerator / share.denominator), 10**12)
        value = _middle(response.enclose(time, 128))
        assert abs(matrix.at(_mpf(time)) - value) < CLOSE * max(abs(value), CLOSE)


@pytest.mark.parametrize("system", [s for s in ALL if s.denominator.degree() <= 3], ids=lambda system: system.name)
def test_values_by_mpmath(system: System) -> None:
    response, matrix = StepResponse(system.numerator, system.denominator, fmpq(1)), Matrix(system)
    time = fmpq(7, 5) / _exact(Fraction(max(abs(float(root.value.real)) for root in response.poles)))
    value = _middle(response.enclose(time, 200))
    assert abs(matrix.by_mpmath(_mpf(time)) - value) < CLOSE * abs(value)

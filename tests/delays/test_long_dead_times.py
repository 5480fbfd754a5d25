"""A dead time much longer than the lag of what it stands before, against a closed form.

With L = (k + i/s) e^(-s) / (lag s + 1) the step response is the sum over j of (-1)^(j - 1) times the step response of
L^j. That of 1/(lag s + 1)^j is the distribution function F_j of a sum of j exponential times (Erlang); integrated n
times it is E[(t - G)_+^n]/n!, G the sum, and E[G^m; G <= t] = lag^m j (j + 1) ... (j + m - 1) F_(j + m)(t).
"""

from __future__ import annotations

import math
from fractions import Fraction
from functools import cache

import mpmath
import pytest
from flint import arb, fmpq

from specgate.delays.inputs import respond_late
from specgate.response.inputs import Input
from specgate.response.questions import TimeResponse
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.polynomials import highest_first
from specgate.systems.quasi import Quasi

from .conftest import closed, late

DIGITS = 160
LAWS = {
    "proportional": (Fraction(1, 2), Fraction(0)),
    "strong proportional": (Fraction(4, 5), Fraction(0)),
    "integral": (Fraction(0), Fraction(9, 25)),
    "both": (Fraction(1, 3), Fraction(2, 5)),
    "near its limit": (Fraction(9, 10), Fraction(0)),
}
LOOPS = [(law, ratio) for law in LAWS for ratio in (100, 1000) if (law, ratio) != ("near its limit", 1000)]


def erlang(count: int, x: mpmath.mpf) -> mpmath.mpf:
    """Return P(G <= x) for a sum of so many exponential times of mean one."""
    term = total = mpmath.mpf(1)
    for k in range(1, count):
        term = term * x / k
        total += term
    return 1 - mpmath.exp(-x) * total


@cache
def true_value(law: str, ratio: int, time: Fraction) -> mpmath.mpf:
    """Return y at a time, the unit step at 0."""
    k, i = LAWS[law]
    with mpmath.workdps(DIGITS):
        total = mpmath.mpf(0)
        for j in range(1, int(time) + 1):
            x = mpmath.mpf((time - j).numerator) / (time - j).denominator
            for n in range(j + 1):
                factor = mpmath.binomial(j, n) * k ** (j - n) * i**n
                if factor != 0:
                    total -= (-1) ** j * factor * _integrated(j, n, x, ratio)
        return total


def _integrated(j: int, n: int, x: mpmath.mpf, ratio: int) -> mpmath.mpf:
    total, rising = mpmath.mpf(0), mpmath.mpf(1)
    for m in range(n + 1):
        total += mpmath.binomial(n, m) * x ** (n - m) * (-1) ** m * rising / ratio**m * erlang(j + m, x * ratio)
        rising *= j + m
    return total / mpmath.factorial(n)


@cache
def response(law: str, ratio: int) -> TimeResponse:
    k, i = (fmpq(value.numerator, value.denominator) for value in LAWS[law])
    lag = fmpq(1, ratio)
    above, below = ([k, i], [lag, 1, 0]) if i != 0 else ([k], [lag, 1])
    found = respond_late([(closed(late(above, below, fmpq(1))), Input("step", {"size": fmpq(1)}))])
    assert not hasattr(found, "reason"), found
    return found  # type: ignore[return-value]


def near(ball: arb) -> Fraction:
    exact = ball.mid().fmpq()
    return Fraction(int(exact.p), int(exact.q))


@pytest.mark.parametrize(("law", "ratio"), LOOPS)
def test_values(law: str, ratio: int) -> None:
    found = response(law, ratio)
    for j in (1, 2, 5, 9):
        for after in (Fraction(1, 3 * ratio), Fraction(j, ratio), Fraction(7 * j, 2 * ratio), Fraction(1, 2)):
            ball = found.enclose(fmpq((j + after).numerator, (j + after).denominator), 128)
            assert ball.rad() < arb(2) ** -90
            with mpmath.workdps(40):
                found_value = mpmath.mpf(ball.mid().str(40, radius=False))
                assert abs(found_value - true_value(law, ratio, j + after)) < mpmath.mpf(10) ** -26


@pytest.mark.parametrize(("law", "ratio"), LOOPS)
def test_settling_and_extremes(law: str, ratio: int) -> None:
    """Just before the settling time y is outside of the band, just after it inside; no value is above the greatest."""
    found = response(law, ratio)
    final = found.final_value().exact
    assert final is not None
    band = final / 20
    settled = found.settling(band)
    assert settled.absent is None
    time, edge = near(settled.enclose(80)), Fraction(int(band.p), int(band.q))
    target = Fraction(int(final.p), int(final.q))
    for side, outside in ((-1, True), (1, False)):
        away = abs(true_value(law, ratio, time + Fraction(side, 10**9)) - _mp(target))
        assert bool(away > _mp(edge)) is outside
    top, low = (_mp(near(ball)) for ball in (found.greatest().value.enclose(60), found.least().value.enclose(60)))
    close = mpmath.mpf(10) ** -12
    for step in range(1, 60):
        value = true_value(law, ratio, Fraction(step, 7) + Fraction(3, 2 * ratio))
        assert low - close <= value <= top + close


def _mp(value: Fraction) -> mpmath.mpf:
    return mpmath.mpf(value.numerator) / value.denominator


def test_what_a_settling_time_rests_on_is_told() -> None:
    """Early terms, the line beyond which no pole counts, and the poles."""
    answer = response("both", 100).settling(fmpq(1, 50))
    assert answer.how is not None
    account = answer.how()
    assert account.footing is not None
    assert "the method of steps: 60 terms" in account.footing.ground
    assert "residues at all poles right of Re s = -0.994 1/s" in account.footing.ground
    assert account.footing.poles == 1
    assert account.footing.pole_radius is not None
    assert account.footing.pole_radius < 1e-60
    assert account.searched_until is not None


def test_more_kinks_than_are_told_one_by_one() -> None:
    """Four sensors with unlike dead times: a thousand kinks in five seconds; against steps of a millisecond."""
    delays = [fmpq(53, 100), fmpq(37, 100), fmpq(211, 1000), fmpq(137, 1000)]
    law, base = highest_first([fmpq(1, 5), fmpq(1, 5)]), highest_first([2, 1, 0])
    late_terms = {delay + fmpq(1, 10): law * fmpq(1, 4) for delay in delays}
    below = Quasi.of({fmpq(0): base, **late_terms}).scaled(fmpq(1, 2))
    channel = DelayedTransfer(Quasi.of({fmpq(1, 10): law * fmpq(1, 2)}), below, ((below, 1),))
    found = respond_late([(channel, Input("step", {"size": fmpq(1)}))])
    values = stepped([530, 370, 211, 137])
    outside = max(k for k, value in enumerate(values) if abs(value - 1) > 0.02)
    assert abs(float(found.settling(fmpq(1, 50)).enclose(60)) - outside / 1000) < 2e-3  # type: ignore[union-attr]
    assert abs(float(found.greatest().value.enclose(60)) - max(values)) < 1e-6  # type: ignore[union-attr]
    for k in (800, 2500, 7000, 15000):
        assert abs(float(found.enclose(fmpq(k, 1000), 60)) - values[k]) < 1e-6  # type: ignore[union-attr]


def stepped(delays: list[int], until: int = 30_000) -> list[float]:
    """Return y each millisecond: 2 y' + y = u(t - 0.1), u' = 0.2 e + 0.2 e', e = 1 less the mean of late y."""
    fallen = math.exp(-0.0005)
    late_share = 1.0 - (1.0 - fallen) / 0.0005
    y, u, error, area = [0.0], [0.2], 1.0, 0.0
    for k in range(until):
        before, after = (u[j] if j >= 0 else 0.0 for j in (k - 100, k - 99 if k >= 100 else -1))
        y.append(fallen * y[k] + (1.0 - fallen - late_share) * before + late_share * after)
        following = 1.0 - sum(y[k + 1 - delay] for delay in delays if k + 1 >= delay) / len(delays)
        area += 0.0005 * (error + following)
        error = following
        u.append(0.2 * error + 0.2 * area)
    return y

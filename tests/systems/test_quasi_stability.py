"""Stability of quasi-polynomials against closed forms, and counts of roots against floats on the same line."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from flint import ctx, fmpq, fmpq_poly

from specgate.systems.polynomials import highest_first
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import line
from specgate.systems.quasi_stability import is_stable
from specgate.terms.precision import working_precision

NEAR = fmpq(1, 10**9)


def quasi(**terms: list[int | fmpq]) -> Quasi:
    """Terms by delay, `d3_2` being 3/2: coefficients, highest power first."""
    return Quasi.of({fmpq(*map(int, name[1:].split("_"))): highest_first(c) for name, c in terms.items()})


def rational(value: float | mpmath.mpf) -> fmpq:
    return fmpq(int(mpmath.floor(mpmath.mpf(value) * 10**30)), 10**30)


@pytest.mark.parametrize("delay", [fmpq(1), fmpq(1, 2000), fmpq(731, 7), fmpq(3000)])
def test_integrator_with_dead_time_is_stable_up_to_half_pi(delay: fmpq) -> None:
    """k/s e^(-s t): stable for 0 < k t < pi/2 (Hayes 1950)."""
    limit = rational(mpmath.pi / 2) / delay
    loops = [Quasi.of({fmpq(0): fmpq_poly([0, 1]), delay: fmpq_poly([gain])}) for gain in _around(limit)]
    assert [is_stable(loop) for loop in loops] == [True, False]


def _around(limit: fmpq) -> tuple[fmpq, fmpq]:
    return limit * (1 - NEAR), limit * (1 + NEAR)


@pytest.mark.parametrize("ratio", [0.1, 0.5, 1.0, 2.0, 10.0, 200.0])
def test_ultimate_gain_of_a_lag_with_dead_time(ratio: float) -> None:
    """e^(-s t)/(T s + 1): tan(w t) = -w T at the limit and K = sqrt(1 + (w T)^2)."""
    with mpmath.workdps(40):
        delay = mpmath.mpf(ratio)
        near = math.pi / ratio - (0.5 * math.pi / ratio) / (1 + ratio / 2)
        crossing = mpmath.findroot(lambda w: w * delay + mpmath.atan(w) - mpmath.pi, near)
        gain = rational(mpmath.sqrt(1 + crossing**2))
    loops = [Quasi.of({fmpq(0): fmpq_poly([1, 1]), rational(delay): fmpq_poly([k])}) for k in _around(gain)]
    assert [is_stable(loop) for loop in loops] == [True, False]


def test_unstable_lag_is_held_only_by_short_dead_times() -> None:
    """k e^(-s t)/(s - 1), k = 2: the crossing is at sqrt(3), the phase left is atan(sqrt(3)) = pi/3."""
    limit = rational(mpmath.pi / 3 / mpmath.sqrt(3))
    loops = [quasi(d0=[1, -1]) + Quasi.of({t: fmpq_poly([2])}) for t in _around(limit)]
    assert [is_stable(loop) for loop in loops] == [True, False]


def test_stability_returns_as_dead_time_grows() -> None:
    """s^2 + s/10 + 2 + e^(-s t)/2: windows of stability (Cooke, Grossman 1982)."""
    found, expected = [], []
    for step in range(1, 60):
        delay = fmpq(step, 10)
        loop = quasi(d0=[1, fmpq(1, 10), 2]) + Quasi.of({delay: fmpq_poly([fmpq(1, 2)])})
        found.append(is_stable(loop))
        expected.append(_winding(loop, top=60.0, points=20_000) == 0)
    assert found == expected
    assert len({True, False} & set(found)) == 2


def _winding(loop: Quasi, real: float = 0.0, top: float = 400.0, points: int = 100_000) -> int:
    """Roots right of a line by summed differences of the argument, in floats."""
    s = real + 1j * np.linspace(0.0, top, points)
    total = np.zeros_like(s)
    for delay, p in loop.terms:
        total += np.polyval([float(str_to_float(c)) for c in reversed(p.coeffs())], s) * np.exp(
            -str_to_float(delay) * s
        )
    growth = np.unwrap(np.angle(total))
    degree = loop.undelayed.degree()
    return round(degree / 2 - (growth[-1] - growth[0]) / math.pi)


def str_to_float(value: fmpq) -> float:
    return int(value.p) / int(value.q)


@pytest.mark.parametrize("real", [fmpq(0), fmpq(-1, 2), fmpq(-3, 2)])
@pytest.mark.parametrize(
    "loop",
    [
        quasi(d0=[1, 3, 2, 0], d3_10=[fmpq(1, 2)], d1_2=[fmpq(1, 4), 0], d11_10=[fmpq(1, 10)]),
        quasi(d0=[1, 0, 4], d1=[1, 1], d2=[3]),
        quasi(d0=[1, 0, 0], d1_3=[2, 5]),
        quasi(d0=[2, 1, 0, 7, 3], d1_10=[1, 1, 0], d7_10=[-4]),
    ],
)
def test_count_right_of_a_line_is_that_of_the_argument(loop: Quasi, real: fmpq) -> None:
    found = line(loop, real)
    assert found is not None
    assert found.count == _winding(loop, str_to_float(real))


def test_neutral_loops_compare_the_leading_coefficients_first() -> None:
    lag = quasi(d0=[1, 1])
    assert is_stable(lag + quasi(d1=[fmpq(1, 2), fmpq(1, 4)])) is True
    assert is_stable(lag + quasi(d1=[fmpq(3, 2), fmpq(1, 4)])) is False
    assert is_stable(lag + quasi(d1=[-1, 0])) is None
    assert is_stable(quasi(d0=[1, 1], d1=[1, 0, 0])) is False


def test_what_is_polynomial_is_decided_by_itself() -> None:
    late = quasi(d0=[1, 0], d1=[1])
    assert is_stable(late * quasi(d0=[1, 0, 1])) is False
    assert is_stable(late * quasi(d0=[1, 1])) is True
    assert is_stable(late * quasi(d0=[1, 0])) is False


def test_a_root_at_the_origin_is_seen_exactly() -> None:
    """1 - e^(-s) + s: zero at s = 0 though no coefficient is."""
    loop = quasi(d0=[1, 1], d1=[-1])
    assert is_stable(loop) is False
    assert loop.first_at_origin() == (1, fmpq(2))


def test_small_gain_is_stable_at_any_dead_time() -> None:
    assert is_stable(quasi(d0=[1, 1], d1000000=[fmpq(999, 1000)])) is True


def test_series_at_the_origin_is_that_of_mpmath() -> None:
    loop = quasi(d0=[1, -2, 3], d1_3=[5, 7], d2=[fmpq(1, 9)])
    exact = [int(c.p) / mpmath.mpf(int(c.q)) for c in loop.at_origin(6)]
    series = mpmath.taylor(lambda s: s**2 - 2 * s + 3 + (5 * s + 7) * mpmath.exp(-s / 3) + mpmath.exp(-2 * s) / 9, 0, 5)
    assert all(mpmath.almosteq(one, other, 1e-10) for one, other in zip(exact, series, strict=True))


def test_precision_is_left_as_it_was() -> None:
    with working_precision(77):
        is_stable(quasi(d0=[1, 0, 3], d1=[1, 1]))
        assert ctx.prec == 77

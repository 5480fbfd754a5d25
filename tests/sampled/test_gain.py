"""A channel of a sampled loop over frequency, against pulse transfer functions by matrix exponentials in 50 digits."""

from __future__ import annotations

from fractions import Fraction

import mpmath
import pytest
from flint import fmpq

from specgate.response.questions import Mask
from specgate.sampled.channel import channel
from specgate.sampled.gain import SampledGain
from specgate.sampled.opened import opened
from specgate.sampled.over_frequency import over_frequency
from specgate.sampled.solution import solve_sampled

from .conftest import Case, form

CASES = {
    "lag": Case(([1], [1, 1]), (["3/2"], [1]), "1/2"),
    "integral law": Case(([2], [1, 3, 2]), (["3/4", "-5/8"], [1, -1]), "1/5"),
    "resonant": Case(([4], [1, "2/5", 4]), (["1/40", "1/40"], [1, -1]), "1/4"),
    "trapezoidal zero at -1": Case(([1], [1, 1]), (["1/4", "1/4"], [1, -1]), "1/2"),
    "rational": Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2"),
}
FREQUENCIES = (Fraction(1, 3), Fraction(7, 5), Fraction(29, 8))


def number(value: Fraction | int | str) -> mpmath.mpf:
    fraction = Fraction(value)
    return mpmath.mpf(fraction.numerator) / fraction.denominator


def plant_at(case: Case, z: mpmath.mpc) -> mpmath.mpc:
    """The held plant at z, by its companion form."""
    above, below = ([number(c) for c in p] for p in case.plant)
    order = len(below) - 1
    above = [mpmath.mpf(0)] * (order + 1 - len(above)) + above
    a, b = mpmath.zeros(order), mpmath.zeros(order, 1)
    for i in range(order - 1):
        a[i, i + 1] = 1
    for j in range(order):
        a[order - 1, j] = -below[order - j] / below[0]
    b[order - 1] = 1 / below[0]
    joined = mpmath.zeros(order + 1)
    joined[:order, :order], joined[:order, order] = a, b
    moved = mpmath.expm(joined * number(case.period))
    inner = mpmath.lu_solve(z * mpmath.eye(order) - moved[:order, :order], moved[:order, order])
    return sum(above[order - i] * inner[i] for i in range(order))


def law_at(case: Case, z: mpmath.mpc) -> mpmath.mpc:
    above, below = ([number(c) for c in p] for p in case.controller)
    return sum(c * z**k for k, c in enumerate(above[::-1])) / sum(c * z**k for k, c in enumerate(below[::-1]))


def channel_at(case: Case, source: str, omega: mpmath.mpf) -> mpmath.mpc:
    z = mpmath.expj(omega * number(case.period))
    plant, law = plant_at(case, z), law_at(case, z)
    return (plant * law if source == "ask" else plant) / (1 + plant * law)


def gain(case: Case, source: str) -> SampledGain:
    solution = solve_sampled(case.wiring())
    return SampledGain(channel(solution, [source], form(place=1)))


def exact(value: Fraction) -> fmpq:
    return fmpq(value.numerator, value.denominator)


@pytest.mark.parametrize("source", ["ask", "load"])
@pytest.mark.parametrize("name", CASES)
def test_gain_and_phase_at_a_frequency(name: str, source: str) -> None:
    case, found = CASES[name], gain(CASES[name], source)
    for frequency in FREQUENCIES:
        expected = channel_at(case, source, number(frequency))
        size, phase = found.gain_at(exact(frequency)), found.phase_at(exact(frequency))
        assert abs(float(size.enclose(80).mid()) / float(abs(expected)) - 1) < 1e-14
        turned = (float(phase.enclose(80).mid()) - float(mpmath.arg(expected))) / (2 * mpmath.pi)
        assert abs(turned - round(turned)) < 1e-13


def test_a_gain_that_never_falls_so_far_has_no_bandwidth() -> None:
    answer = gain(CASES["lag"], "ask").bandwidth()
    assert answer.absent is not None
    assert answer.absent.proved


@pytest.mark.parametrize("name", [name for name in CASES if name != "lag"])
def test_the_bandwidth_is_where_the_gain_is_3_db_down(name: str) -> None:
    case = CASES[name]
    answer = gain(case, "ask").bandwidth()
    level = abs(channel_at(case, "ask", mpmath.mpf("1e-20"))) * mpmath.mpf(10) ** (mpmath.mpf(-3) / 20)
    omega = mpmath.mpf(answer.enclose(100).mid().str(30, radius=False))
    assert abs(abs(channel_at(case, "ask", omega)) - level) < 1e-18
    steps = [omega * k / 30 for k in range(1, 30)]
    assert all(abs(channel_at(case, "ask", step)) > level for step in steps)


@pytest.mark.parametrize("name", CASES)
def test_the_resonance_peak_is_the_greatest_gain(name: str) -> None:
    case = CASES[name]
    answer = gain(case, "ask").resonance_peak()
    at_zero = abs(channel_at(case, "ask", mpmath.mpf("1e-20")))
    end = mpmath.pi / number(case.period)
    best = max(float(abs(channel_at(case, "ask", end * k / 60)) / at_zero) for k in range(1, 61))
    found = float(answer.enclose(64).mid())
    assert best <= found * (1 + 1e-12)
    assert answer.at is not None
    frequency = answer.at["frequency"]
    assert not isinstance(frequency, str)
    omega = mpmath.mpf(frequency.enclose(100).mid().str(30, radius=False))
    there = abs(channel_at(case, "ask", omega)) / at_zero if omega else 1
    assert abs(found / float(there) - 1) < 1e-12


def test_a_mask_on_a_channel_and_on_a_break() -> None:
    case = CASES["integral law"]
    found = gain(case, "ask")
    limit = found.resonance_peak().enclose(64).mid().fmpq()
    for factor, inside in ((1 + fmpq(1, 10**6), True), (1 - fmpq(1, 10**6), False)):
        answer = found.within(Mask(upper=((fmpq(0), limit * factor), (fmpq(9), limit * factor))))
        assert answer.truth is inside
        if not inside:
            assert answer.at is not None
    assert found.within(Mask(upper=((fmpq(0), limit * 2), (fmpq(100), limit * 2)))).truth is None
    rational = over_frequency(opened(solve_sampled(CASES["rational"].wiring()), "place"))
    assert rational is not None
    at = abs(plant_at(CASES["rational"], mpmath.expj(0.5)) * law_at(CASES["rational"], mpmath.expj(0.5)))
    for factor, inside in ((0.999999, False), (1.000001, True)):
        level = fmpq(int(at * factor * 10**12), 10**12)
        assert rational.within(Mask(upper=((fmpq(1), level), (fmpq(2), level)))).truth is inside


def test_a_slanted_mask_is_left_where_gain_and_limit_are_one() -> None:
    case = CASES["lag"]
    mask = Mask(upper=((fmpq(1, 2), fmpq(1)), (fmpq(5), fmpq(1, 100))), logarithmic=True)
    answer = gain(case, "ask").within(mask)
    assert answer.truth is False
    assert answer.at is not None
    frequency, value = answer.at["frequency"], answer.at["value"]
    assert not isinstance(frequency, str)
    assert not isinstance(value, str)
    omega = mpmath.mpf(frequency.enclose(80).mid().str(25, radius=False))
    limit = mpmath.mpf(10) ** (-2 * mpmath.log(omega * 2) / mpmath.log(10))
    assert abs(abs(channel_at(case, "ask", omega)) - limit) < 1e-14
    assert abs(float(value.enclose(80).mid()) - float(limit)) < 1e-14

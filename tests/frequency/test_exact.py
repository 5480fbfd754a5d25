"""Equality with a limit: a ball never decides it, an exact predicate does."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq

from specgate.compliance.compare import sign
from specgate.frequency.rational_gain import RationalGain
from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction
from specgate.terms.unit import PI, PRECISE_PI

Loop = Callable[..., RationalLoop]
MILLIONTH = fmpq(1, 10**6)


def signs(answer: Answer, limit: fmpq) -> list[int | None]:
    """Signs against what is a millionth below a limit, the limit, and a millionth above."""
    return [sign(answer, limit * step) for step in (1 - MILLIONTH, fmpq(1), 1 + MILLIONTH)]


ANGLES = [
    pytest.param([1], [1, 0], 90, id="integrator"),
    pytest.param([2], [1, 2, 1], 90, id="two lags, crossing at 1"),
    pytest.param([fmpq(3, 2), fmpq(3, 2)], [1, 0, 0], 60, id="crossing at sqrt 3"),
    pytest.param([fmpq(2, 3)], [1, 1, 0], 60, id="crossing at 1/sqrt 3"),
]


@pytest.mark.parametrize("pi", [PI, PRECISE_PI], ids=["60 digits", "100 digits"])
@pytest.mark.parametrize(("numerator", "denominator", "margin"), ANGLES)
def test_a_phase_margin_of_whole_degrees(
    loop: Loop, numerator: list[fmpq], denominator: list[fmpq], margin: int, pi: fmpq
) -> None:
    """L = 3/2 (s + 1)/s^2: |L| = 1 at sqrt 3, and atan(sqrt 3) is left; the others likewise."""
    found, limit = loop(numerator, denominator), margin * pi / 180
    assert found.stable
    assert signs(found.phase_margin(), limit) == [1, 0, -1]
    assert signs(found.phase_margin_lag(), limit) == [1, 0, -1]
    assert signs(found.phase_margin_lead(), 2 * pi - limit) == [1, 0, -1]
    # what is not equal is told apart, however near
    assert sign(found.phase_margin(), limit * (1 + fmpq(1, 10**50))) == -1


def test_gain_margins_that_are_algebraic(loop: Loop) -> None:
    """1/(s (s + 1)(s + 2)) stands 6; K/(s + 1)^8 stands cos(22.5 deg)^-8, which no rational equals."""
    assert loop([1], [1, 3, 2, 0]).gain_margin().exact == 6
    eighth = loop([1], [1, 8, 28, 56, 70, 56, 28, 8, 1]).gain_margin()
    assert eighth.exact is None
    assert signs(eighth, fmpq(18839840974, 10**10)) == [1, 1, -1]
    assert sign(eighth, fmpq(1)) == 1


def test_a_rational_value_at_an_irrational_crossing(loop: Loop) -> None:
    """D + 2 N = (s^4 + 2 s^2 - 1)(s + 3)(s + 5): L = -1/2 at the irrational x = 1 + sqrt 2 of x^2 - 2x - 1 = 0."""
    above = highest_first([1, 1, 1])
    below = highest_first([1, 0, 2, 0, -1]) * highest_first([1, 3]) * highest_first([1, 5]) - 2 * above
    found = RationalLoop(TransferFunction(above, below), stable=True)
    halves = [c for c in found.crossings() if c.kind == "phase" and sign(c.margin, fmpq(2)) == 0]
    assert len(halves) == 1
    assert halves[0].margin.exact is None
    assert halves[0].direction == "up"
    assert signs(halves[0].margin, fmpq(2)) == [1, 0, -1]
    assert sign(halves[0].margin, 2 + fmpq(1, 10**60)) == -1


def test_frequencies_and_peaks(loop: Loop) -> None:
    """1/(s (s + 1)(s + 2)) is on the axis at sqrt 2; s^2 + s + 1 has the greatest gain 2/sqrt 3, at sqrt(1/2)."""
    crossing = loop([1], [1, 3, 2, 0]).phase_crossover_frequency()
    assert crossing.exact is None
    assert sign(crossing, fmpq(14142135623730950488, 10**19)) == 1
    peak = loop([1], [1, 1, 1]).peak_gain()
    assert peak.exact is None
    assert sign(peak, fmpq(11547005383792515, 10**16)) == 1
    # with damping 1/sqrt(5): peak 1/(2 zeta sqrt(1 - zeta^2)) = 5/4 of that at zero frequency
    assert loop([1], [1, 2, 5]).peak_gain().exact == fmpq(1, 4)


def test_the_gain_at_a_frequency_and_its_phase() -> None:
    gain = RationalGain(TransferFunction(highest_first([1]), highest_first([1, 1])))
    assert gain.gain_at(fmpq(0)).exact == 1
    assert gain.gain_at(fmpq(4, 3)).exact == fmpq(3, 5)
    for pi in (PI, PRECISE_PI):
        assert signs(gain.phase_at(fmpq(1)), -pi / 4) == [-1, 0, 1]
        assert sign(gain.phase_at(fmpq(2)), -pi / 4) == -1

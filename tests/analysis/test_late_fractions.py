"""Dead times written as fractions: which are recognised, and where their phase departs from that of a dead time.

The frequencies at which Pade approximants of orders 1 to 5 lag 5 degrees less are those of the catalogue (w theta =
1.07, 2.48, 4.05, 5.70, 7.41); all phases are compared with those of numpy, followed from zero in small steps.
"""

from __future__ import annotations

import cmath
from math import pi

import numpy as np
import pytest
from flint import fmpq, fmpq_poly

from specgate.analysis.late_fractions import LateFraction, late_fraction
from specgate.analysis.late_phase import LatePhase
from specgate.approximations.pade import approximant, of_dead_time
from specgate.response.answers import Answer
from specgate.systems.transfer import TransferFunction

S = fmpq_poly([0, 1])


def scaled(above: int, below: int, delay: fmpq) -> TransferFunction:
    found, scale = approximant(above, below), fmpq_poly([0, delay])
    return TransferFunction(found.numerator(scale), found.denominator(scale))


@pytest.mark.parametrize(("order", "reach"), [(1, 1.07), (2, 2.48), (3, 4.05), (4, 5.70), (5, 7.41)])
def test_an_approximant_in_a_block_is_recognised_with_its_dead_time(order: int, reach: float) -> None:
    pade = of_dead_time(order, fmpq(1, 2))
    found = late_fraction(TransferFunction(7 * pade.numerator * (S + 5), pade.denominator * (3 + S) * S))
    assert found is not None
    assert (found.delay, found.all_pass, found.pade) == (fmpq(1, 2), True, True)
    departs = LatePhase(found.delay, fmpq(0), found).departs(fmpq(5))
    assert float(departs.enclose(96).mid()) * 0.5 == pytest.approx(reach, abs=5e-3)


@pytest.mark.parametrize(("above", "below"), [(1, 2), (2, 3), (1, 3), (3, 4)])
def test_a_numerator_of_lower_degree_is_recognised_too(above: int, below: int) -> None:
    pade = scaled(above, below, fmpq(3))
    found = late_fraction(TransferFunction(pade.numerator, 5 * pade.denominator * (1 + 2 * S) * S))
    assert found is not None
    assert (found.delay, found.all_pass, found.pade) == (fmpq(3), False, True)
    assert f"degrees {above} over {below}" in found.words


def test_decimals_that_are_rounded_are_still_an_approximant() -> None:
    found = late_fraction(TransferFunction(1 - S * fmpq(1, 3), 1 + S * fmpq(67, 100) + S * S * fmpq(167, 1000)))
    assert found is not None
    assert found.delay == fmpq(67, 100) + fmpq(1, 3)


@pytest.mark.parametrize(
    ("numerator", "denominator"),
    [
        (1 - S, 1 + S * fmpq(11, 10)),  # nearly mirrored is not mirrored, and no approximant
        (1 - S * fmpq(1, 3), 1 + S * fmpq(8, 10) + S * S * fmpq(167, 1000)),
        (1 + S, S - 1),  # mirrored, and growing
        (1 + S * S, (1 + S * S) * (1 + S)),  # roots on the axis mirror themselves
        ((1 - S) * (1 + S), (1 + S) * (2 + S)),  # what cancels is no part of a pair
        (1 + S, (1 + S) * (2 + S)),
        (fmpq_poly([1]), 1 + S),
        (fmpq_poly([0]), 1 + S),
    ],
)
def test_what_is_no_dead_time(numerator: fmpq_poly, denominator: fmpq_poly) -> None:
    assert late_fraction(TransferFunction(numerator, denominator)) is None


def test_an_all_pass_pair_that_is_no_approximant_is_one_all_the_same() -> None:
    mirrored = (1 - S) * (1 - 2 * S)
    found = late_fraction(TransferFunction(mirrored, (1 + S) * (1 + 2 * S)))
    assert found is not None
    assert (found.delay, found.all_pass, found.pade) == (6, True, False)


# --- phases -----------------------------------------------------------------------------------------------------


def followed(fraction: LateFraction, meant: fmpq, frequency: float) -> float:
    """Return w meant + arg(N/D)(jw), the phase followed from zero in 4000 steps of floating point."""
    above, below = (
        [int(c.p) / int(c.q) for c in reversed(p.coeffs())] for p in (fraction.numerator, fraction.denominator)
    )
    phase, last = 0.0, 1 + 0j
    for step in range(1, 4001):
        s = 1j * frequency * step / 4000
        value = complex(np.polyval(above, s) / np.polyval(below, s))
        phase, last = phase + cmath.phase(value / last), value
    return frequency * int(meant.p) / int(meant.q) + phase


@pytest.mark.parametrize("frequency", [fmpq(1, 3), fmpq(7, 4), fmpq(23)])
@pytest.mark.parametrize(
    "block",
    [
        of_dead_time(3, fmpq(7, 10)),
        scaled(2, 4, fmpq(7, 10)),
        TransferFunction((1 - S) * (4 - S + S * S), (1 + S) * (4 + S + S * S)),
    ],
)
def test_the_phase_is_that_of_another_method(block: TransferFunction, frequency: fmpq) -> None:
    found = late_fraction(block)
    assert found is not None
    error = LatePhase(found.delay, fmpq(0), found).error_at(Answer.of_exact(frequency)).enclose(64)
    expected = followed(found, found.delay, int(frequency.p) / int(frequency.q))
    assert float(error.mid()) == pytest.approx(expected, abs=1e-9)


def test_where_the_error_turns_round_the_first_arrival_is_still_found() -> None:
    # A lightly damped pair lags far more than its delay near its own frequency: -5 deg comes long before +5 deg.
    ringing = TransferFunction(1 - S * fmpq(1, 10) + S * S, 1 + S * fmpq(1, 10) + S * S)
    found = late_fraction(ringing)
    assert found is not None
    phase = LatePhase(found.delay, fmpq(0), found)
    departs = phase.departs(fmpq(5)).enclose(96)
    at = float(departs.mid())
    assert float(departs.rad()) < 1e-9
    assert followed(found, found.delay, at) == pytest.approx(-pi / 36, abs=1e-7)
    assert all(abs(followed(found, found.delay, at * k / 10)) < pi / 36 for k in range(1, 10))


@pytest.mark.parametrize("meant", [fmpq(1, 1000), fmpq(3), fmpq(10**6)])
def test_nothing_at_all_lags_nothing(meant: fmpq) -> None:
    departs = LatePhase(meant).departs(fmpq(5)).enclose(96)
    assert float(departs.mid()) * int(meant.p) / int(meant.q) == pytest.approx(pi / 36)


def test_a_dead_time_that_is_meant_never_departs() -> None:
    departs = LatePhase(fmpq(2), fmpq(2)).departs(fmpq(5))
    assert departs.absent is not None
    assert departs.absent.infinite

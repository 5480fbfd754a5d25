"""Stability, modes and hidden modes of sampled loops."""

from __future__ import annotations

from fractions import Fraction

import pytest
from flint import arb, arb_poly, fmpq, fmpq_poly

from specgate.sampled.channel import channel
from specgate.sampled.circle import is_schur, is_schur_in_balls
from specgate.sampled.hidden import hidden_modes
from specgate.sampled.solution import solve_sampled
from specgate.terms.precision import working_precision
from specgate.terms.unit import PI

from .conftest import Case, form


def arb_of(polynomial: fmpq_poly, bits: int) -> arb_poly:
    with working_precision(bits):
        return arb_poly([arb(c) + arb(0, arb(fmpq(1, 1 << bits))) for c in polynomial.coeffs()])


@pytest.mark.parametrize(
    ("coefficients", "inside"),
    [
        ([1], True),
        ([0, 1], True),
        ([0, 0, 0, 1], True),
        ([Fraction(1, 2), 1], True),
        ([1, 1], False),
        ([-1, 1], False),
        ([1, 0, 1], False),
        ([Fraction(-3, 2), 1], False),
        ([Fraction(99, 100), Fraction(-6, 5), 1], True),
        ([Fraction(101, 100), Fraction(-6, 5), 1], False),
        ([Fraction(1, 4), -1, 1], True),
    ],
)
def test_roots_inside_the_circle(coefficients: list[Fraction], inside: bool) -> None:
    p = fmpq_poly([fmpq(Fraction(c).numerator, Fraction(c).denominator) for c in coefficients])
    assert is_schur(p) is inside
    told = is_schur_in_balls(lambda bits: arb_of(p, bits))
    on_circle = not inside and is_schur(p(fmpq_poly([0, fmpq(100001, 100000)])))
    assert told is inside or (told is None and on_circle)


def proportional(gain: str) -> Case:
    """Gain on 1/(s(s+1)) sampled every second: the limit is 2.39221119118 (Jury 1958 works this loop)."""
    return Case(([1], [1, 1, 0]), ([gain], [1]), 1)


@pytest.mark.parametrize(("gain", "stable"), [("2.392211191177", True), ("2.392211191178", False)])
def test_the_limit_of_a_gain(gain: str, stable: bool) -> None:
    """2 (1 - 2/e)^-1 ... from b(K) = K (1 - 2/e) + 1/e = 1, recomputed in 30 digits: 2.39221119117733..."""
    assert solve_sampled(proportional(gain).wiring()).stable is stable


def test_an_integrator_that_a_controller_cancels_is_hidden_and_never_decays() -> None:
    solution = solve_sampled(Case(([1], [1, 1, 0]), ([1, -1], [1, 0]), 1).wiring())
    assert solution.stable is False
    assert channel(solution, ["ask"], form(place=1)).hides_instability
    assert not channel(solution, ["load"], form(place=1)).hides_instability


def test_nothing_is_hidden_in_a_plain_loop() -> None:
    assert (
        hidden_modes(solve_sampled(Case(([2, 1], [1, 2, 5]), (["1/5"], [1, -1]), "1/10", "1/25").wiring())).exact == 0
    )


def test_a_common_factor_in_z_is_hidden() -> None:
    law = (["1/5", "-1/10"], [1, "-3/2", "1/2"])
    assert hidden_modes(solve_sampled(Case(([1], [1, 1]), law, "1/10").wiring())).exact == 1


def test_a_common_factor_in_s_is_hidden_and_decides_stability() -> None:
    good = solve_sampled(Case(([1, 3], [1, 4, 3]), (["1/5"], [1, -1]), "1/10").wiring())
    assert (good.stable, hidden_modes(good).exact) == (True, 1)
    bad = solve_sampled(Case(([1, -3], [1, -2, -3]), (["1/5"], [1, -1]), "1/10").wiring())
    assert (bad.stable, hidden_modes(bad).exact) == (False, 1)


@pytest.mark.parametrize(("damping", "stable"), [("0", False), ("1/10", True)])
def test_an_oscillation_that_samples_cannot_see(damping: str, stable: bool) -> None:
    """omega T = pi: e^(pT) is one and the same for both poles of the pair, so that one of them is not fed back."""
    w, sigma = Fraction(str(PI)), Fraction(damping)
    plant = ([str(w * w + sigma * sigma)], [1, str(2 * sigma), str(w * w + sigma * sigma)])
    solution = solve_sampled(Case(plant, (["1/50"], [1, -1]), 1).wiring())
    ((_, half_turns),) = solution.components[0].unseen
    assert half_turns == 1
    assert solution.stable is stable
    # the load drives it and the place shows it between the samples: it is hidden from the samples, not from all
    assert hidden_modes(solution).exact == 0


def test_an_algebraic_loop_at_the_samples_is_named() -> None:
    solution = solve_sampled(Case(([-1], [1]), ([1], [1]), 1).wiring())
    assert solution.algebraic_loop is not None
    assert "error" in solution.algebraic_loop.reason
    late = solve_sampled(Case(([-1], [1]), ([1], [1]), 1, "1/2").wiring())
    assert late.algebraic_loop is None


def test_modes_of_a_rational_loop_are_exact() -> None:
    solution = solve_sampled(Case(([1], [1, 0, 0]), ([3, "-5/2"], [1, "1/2"]), "1/2").wiring())
    assert solution.exact is not None
    assert solution.exact.degree() == 3
    assert solution.stable is is_schur(solution.exact)

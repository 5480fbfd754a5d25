"""Rightmost poles of loops with dead time against Lambert's function, and proofs that none is missing."""

from __future__ import annotations

import mpmath
import pytest
from flint import arb, fmpq, fmpq_poly

from specgate.delays.modes import least_over_late_modes
from specgate.delays.roots import certified_right
from specgate.response.answers import Answer
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.delayed import DelayedSolution, solve_delayed
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_count import line


def integrator(gain: fmpq, delay: fmpq) -> Quasi:
    return Quasi.of({fmpq(0): fmpq_poly([0, 1]), delay: fmpq_poly([gain])})


def loop(gain: fmpq, delay: fmpq) -> DelayedSolution:
    block = Block("tank", ("u",), ("y",), {("y", "u"): fmpq_poly([gain])}, fmpq_poly([0, 1]), delay)
    argument = LinearForm(((fmpq(1), SignalRef("r")), (fmpq(-1), SignalRef("y"))))
    level = LinearForm(((fmpq(1), OutputRef("tank", "y")),))
    return solve_delayed(Wiring(("r",), (Instance("tank", block, {"u": argument}),), {"y": level}))


def lambert(gain: mpmath.mpf, delay: mpmath.mpf, branch: int) -> mpmath.mpc:
    """s + k e^(-s t) = 0: s t = W(-k t)."""
    return mpmath.lambertw(-gain * delay, branch) / delay


@pytest.mark.parametrize(
    ("gain", "delay"), [(fmpq(1), fmpq(1)), (fmpq(1, 5), fmpq(3)), (fmpq(7), fmpq(1, 10)), (fmpq(5), fmpq(1))]
)
def test_all_poles_right_of_a_line_are_those_of_lambert(gain: fmpq, delay: fmpq) -> None:
    left = -fmpq(4) / delay * fmpq(199, 200)
    counted = line(integrator(gain, delay), left)
    assert counted is not None
    found = certified_right(integrator(gain, delay), left, counted.height)
    assert found.count == counted.count
    with mpmath.workdps(40):
        k, t = (mpmath.mpf(int(x.p)) / int(x.q) for x in (gain, delay))
        known = [lambert(k, t, branch) for branch in range(-60, 60)]
        expected = [s for s in known if s.real > mpmath.mpf(int(left.p)) / int(left.q) and s.imag >= -1e-30]
        assert len(expected) == len(found.roots)
        for root in found.at(100):
            value = mpmath.mpc(root.real.mid().str(40, radius=False), root.imag.mid().str(40, radius=False))
            assert min(abs(value - s) for s in expected) < mpmath.mpf(10) ** -28
            assert root.rel_accuracy_bits() >= 100


def number(answer: Answer) -> mpmath.mpf:
    ball = answer.enclose(90)
    assert ball.rad() < arb(2) ** -80
    return mpmath.mpf(ball.mid().str(35, radius=False))


def test_figures_of_the_slowest_modes() -> None:
    solution = loop(fmpq(1), fmpq(1))
    with mpmath.workdps(40):
        slowest, second = (lambert(mpmath.mpf(1), mpmath.mpf(1), branch) for branch in (0, 1))
        assert abs(number(least_over_late_modes(solution, "decay_rate", None)) + slowest.real) < 1e-25
        assert abs(number(least_over_late_modes(solution, "natural_frequency", None)) - abs(slowest)) < 1e-25
        near = least_over_late_modes(solution, "damping_ratio", (fmpq(1), fmpq(2)))
        assert abs(number(near) + slowest.real / abs(slowest)) < 1e-25
        far = least_over_late_modes(solution, "damping_ratio", (fmpq(3), fmpq(9)))
        assert abs(number(far) + second.real / abs(second)) < 1e-25


def test_there_is_no_least_damping_without_a_range() -> None:
    found = least_over_late_modes(loop(fmpq(1), fmpq(1)), "damping_ratio", None)
    assert found.absent is not None
    assert not found.absent.proved
    assert "over" in found.absent.reason


def test_a_range_without_modes_has_none() -> None:
    found = least_over_late_modes(loop(fmpq(1), fmpq(1)), "decay_rate", (fmpq(1, 100), fmpq(1, 10)))
    assert found.absent is not None
    assert found.absent.proved


def test_a_growing_mode_has_a_negative_decay_rate() -> None:
    found = least_over_late_modes(loop(fmpq(2), fmpq(1)), "decay_rate", None)
    with mpmath.workdps(40):
        assert abs(number(found) + lambert(mpmath.mpf(2), mpmath.mpf(1), 0).real) < 1e-25

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
from specgate.systems.quasi_disc import roots_within


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


@pytest.mark.parametrize("reach", [2, 9, 22, 40])
@pytest.mark.parametrize(("gain", "delay"), [(fmpq(1, 5), fmpq(1)), (fmpq(1), fmpq(1)), (fmpq(3, 10), fmpq(1, 2))])
def test_a_range_is_known_as_a_whole(gain: fmpq, delay: fmpq, reach: int) -> None:
    """All roots in a disc: their number, and the least figures over a range that ends within it."""
    with mpmath.workdps(40):
        k, t = (mpmath.mpf(int(x.p)) / int(x.q) for x in (gain, delay))
        known = [s for s in (lambert(k, t, branch) for branch in range(-60, 60)) if abs(s) < reach]
        assert roots_within(integrator(gain, delay), fmpq(reach)) == len(known)
        over = (fmpq(0), fmpq(reach))
        damping = least_over_late_modes(loop(gain, delay), "damping_ratio", over)
        assert abs(number(damping) - min(-s.real / abs(s) for s in known)) < mpmath.mpf(10) ** -20
        oscillating = [abs(s) for s in known if abs(s.imag) > 1e-20]
        frequency = least_over_late_modes(loop(gain, delay), "natural_frequency", over)
        if oscillating:
            assert abs(number(frequency) - min(oscillating)) < mpmath.mpf(10) ** -20
        else:
            assert frequency.absent is not None
            assert frequency.absent.proved


def test_the_least_natural_frequency_lies_beyond_the_slow_modes() -> None:
    """k t = 1/5: two real modes at 0.26 and 2.54, the first that oscillates at 8.3 rad/s: none is nearer."""
    found = least_over_late_modes(loop(fmpq(1, 5), fmpq(1)), "natural_frequency", None)
    with mpmath.workdps(40):
        expected = abs(lambert(mpmath.mpf(1) / 5, mpmath.mpf(1), 1))
        assert abs(number(found) - expected) < mpmath.mpf(10) ** -20


def test_a_chain_without_end_may_have_no_slowest_mode() -> None:
    """1 + e^(-s)/2 has all its roots at Re s = -ln 2."""
    block = Block("gain", ("u",), ("y",), {("y", "u"): fmpq_poly([fmpq(1, 2)])}, fmpq_poly([1]), fmpq(1))
    argument = LinearForm(((fmpq(1), SignalRef("r")), (fmpq(-1), SignalRef("y"))))
    level = LinearForm(((fmpq(1), OutputRef("gain", "y")),))
    solution = solve_delayed(Wiring(("r",), (Instance("gain", block, {"u": argument}),), {"y": level}))
    found = least_over_late_modes(solution, "decay_rate", None)
    assert found.absent is not None
    assert not found.absent.proved
    assert "tend to a limit" in found.absent.reason
    with mpmath.workdps(30):
        nearest = least_over_late_modes(solution, "natural_frequency", None)
        assert abs(number(nearest) - abs(mpmath.mpc(-mpmath.log(2), mpmath.pi))) < mpmath.mpf(10) ** -20

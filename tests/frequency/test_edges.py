"""Loops at the edge of what a margin is: none, constant, real, on the axis, improper, crossing at the ends."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq, fmpq_poly

from specgate.frequency.rational_loop import RationalLoop
from specgate.measures.measure import Arguments
from specgate.measures.subjects import BreakSubject
from specgate.measures.table import MEASURES
from specgate.response.answers import Answer
from specgate.systems.transfer import TransferFunction
from tests.frequency.conftest import rational

Loop = Callable[..., RationalLoop]
HALF = fmpq(1, 2)


def infinite(*answers: Answer) -> bool:
    return all(answer.absent is not None and answer.absent.infinite for answer in answers)


def number(answer: Answer) -> float:
    return float(answer.enclose(64).mid())


def where(answer: Answer) -> Answer:
    assert answer.at is not None
    found = answer.at["frequency"]
    assert isinstance(found, Answer)
    return found


def test_no_loop_at_all(loop: Loop) -> None:
    none = loop([0], [1, 1])
    assert none.stable
    assert none.crossings() == ()
    assert infinite(none.gain_margin(), none.phase_margin(), none.delay_margin())
    assert none.sensitivity_peak().exact == 1
    assert none.least_distance().exact == 1
    assert none.peak_gain().exact == 0
    assert none.gain_at(fmpq(3)).exact == 0
    assert none.phase_at(fmpq(3)).absent is not None


@pytest.mark.parametrize(
    ("gain", "up", "down", "delay"),
    [(HALF, None, None, None), (-HALF, 2, None, None), (fmpq(-4), None, 4, 0), (fmpq(3), None, None, 0)],
)
def test_a_constant(loop: Loop, gain: fmpq, up: int | None, down: int | None, delay: int | None) -> None:
    static = loop([gain], [1])
    found = (static.gain_margin_up(), static.gain_margin_down(), static.delay_margin())
    for answer, wanted in zip(found, (up, down, delay), strict=True):
        assert answer.exact == wanted if wanted is not None else infinite(answer)
    assert static.sensitivity_peak().exact == abs(1 / (1 + gain))
    assert infinite(static.phase_margin())


def test_a_magnitude_of_one_everywhere(loop: Loop) -> None:
    one = loop([1], [1])
    assert number(one.phase_margin()) == pytest.approx(3.14159265)
    assert one.delay_margin().exact == 0
    assert one.crossover_frequency().exact == 0
    passing = loop([1, -2, 4], [1, 2, 4])  # is -1 at 2 rad/s
    assert not passing.stable
    assert passing.gain_margin().absent is not None
    assert any(c.kind == "phase" and c.frequency.exact == 2 and c.margin.exact == 1 for c in passing.crossings())


def test_real_everywhere(loop: Loop) -> None:
    """-1/(s^2 + 4) falls from -1/4; no closed loop around it is stable, its crossings are ends of what it passes."""
    undamped = loop([-1], [1, 0, 4])
    assert not undamped.stable
    factors = [c.margin.exact for c in undamped.crossings() if c.kind == "phase"]
    assert factors == [4]


def test_imaginary_everywhere(loop: Loop) -> None:
    """s/(s^2 + 1): |L| = 1 at (sqrt 5 -+ 1)/2, a quarter of a turn from -1 on either side; its pole is no crossing."""
    found = loop([1, 0], [1, 0, 1])
    assert found.stable
    assert infinite(found.gain_margin(), found.peak_gain())
    gain = [c for c in found.crossings() if c.kind == "gain"]
    assert [number(c.frequency) for c in gain] == pytest.approx([(5**0.5 - 1) / 2, (5**0.5 + 1) / 2])
    assert [c.direction for c in gain] == ["lead", "lag"]
    assert [number(c.margin) for c in gain] == pytest.approx([3.14159265 * 1.5 - 3.14159265] * 2)
    assert infinite(found.gain_at(fmpq(1)))
    assert found.phase_at(fmpq(1)).absent is not None
    assert number(found.phase_at(HALF)) == pytest.approx(3.14159265 / 2)
    assert number(found.phase_at(fmpq(2))) == pytest.approx(-3.14159265 / 2)


def test_zeros_on_the_axis_are_no_crossings(loop: Loop) -> None:
    """(s^2 + 4)/(s (s + 1)^2) is zero at 2 rad/s, where its phase jumps."""
    found = loop([HALF, 0, 2], [1, 2, 1, 0])
    assert all(c.frequency.exact != 2 for c in found.crossings())
    assert found.gain_at(fmpq(2)).exact == 0
    assert found.phase_at(fmpq(2)).absent is not None
    before, after = number(found.phase_at(fmpq(199, 100))), number(found.phase_at(fmpq(201, 100)))
    assert after - before == pytest.approx(3.14159265, abs=0.02)


def test_an_integrator(loop: Loop) -> None:
    found = loop([2], [1, 0])
    assert infinite(found.gain_margin(), found.peak_gain())
    assert number(found.phase_margin()) == pytest.approx(3.14159265 / 2)
    assert number(found.phase_margin_lead()) == pytest.approx(1.5 * 3.14159265)
    assert number(found.delay_margin()) == pytest.approx(3.14159265 / 4)
    assert found.crossover_frequency().exact == 2
    assert found.sensitivity_peak().exact == 1
    assert infinite(where(found.sensitivity_peak()))
    assert number(found.phase_at(fmpq(7))) == pytest.approx(-3.14159265 / 2)


def test_crossings_at_zero_and_at_infinity(loop: Loop) -> None:
    """(4 - s/2)/(s + 1) is -1/2 at infinity; 20 (s + 1)/((s + 8)(s - 2)) is -5/4 at zero frequency."""
    far = loop([-HALF, 4], [1, 1])
    assert far.gain_margin().exact == 2
    assert infinite(where(far.gain_margin()))
    assert infinite(where(far.sensitivity_peak()))
    assert far.crossings()[-1].frequency.absent is not None
    near = loop([20, 20], [1, 6, -16])
    assert near.gain_margin_down().exact == fmpq(5, 4)
    assert where(near.gain_margin_down()).exact == 0
    assert near.phase_crossover_frequency().exact == 0
    # |L| = 1 at zero and at infinite frequency
    ends = loop([1, 2, 3], [1, 5, 3])
    gains = [c.frequency for c in ends.crossings() if c.kind == "gain"]
    assert gains[0].exact == 0
    assert gains[-1].absent is not None
    assert ends.delay_margin().exact == 0


def test_an_improper_loop(loop: Loop) -> None:
    found = loop([1, 1], [1])
    assert found.stable
    assert found.delay_margin().exact == 0
    assert infinite(found.gain_margin(), found.peak_gain())
    assert found.sensitivity_peak().exact == HALF
    assert where(found.sensitivity_peak()).exact == 0


def test_feed_through_of_minus_one_leaves_no_margin(loop: Loop) -> None:
    """(1 - s)/(s + 1): 1 + L = 2/(s + 1) loses its mode at infinity."""
    found = loop([-1, 1], [1, 1])
    assert not found.stable
    assert found.gain_margin().absent is not None


def test_an_unstable_loop_lists_its_crossings_all_the_same(loop: Loop) -> None:
    found = loop([100], [1, 6, 5, 0])
    for answer in (found.gain_margin(), found.phase_margin(), found.delay_margin(), found.sensitivity_peak()):
        assert answer.absent is not None
        assert answer.absent.proved
        assert not answer.absent.infinite
    gain, phase = sorted(found.crossings(), key=lambda c: c.kind)
    assert (gain.direction, phase.direction) == ("lead", "down")
    assert phase.margin.exact == fmpq(10, 3)
    assert number(found.crossover_frequency()) == pytest.approx(3.907280582)


def test_a_touch_of_the_unit_circle_counts(loop: Loop) -> None:
    """1/(s^2 + a s + 1) peaks at 1/(a sqrt(1 - a^2/4)): exactly 1 for no rational a; scaled to touch for a = 6/5."""
    touching = loop([fmpq(24, 25)], [1, fmpq(6, 5), 1])
    gain = [c.frequency for c in touching.crossings() if c.kind == "gain"]
    assert len(gain) == 1
    assert number(gain[0]) == pytest.approx(0.28**0.5)
    assert touching.phase_margin().absent is None
    assert touching.peak_gain().exact == 1


def test_a_range(loop: Loop) -> None:
    """0.2/(s (s + 1)(s^2 + 0.02 s + 4)) crosses one at 0.04997, 1.99483 and 2.00484."""
    found = loop([rational("0.2")], [1, rational("1.02"), rational("4.02"), 4, 0])
    whole, low = (fmpq(0), fmpq(10**9)), (fmpq(0), fmpq(1))
    for ask in (found.phase_margin, found.gain_margin, found.sensitivity_peak, found.delay_margin):
        assert number(ask(whole)) == number(ask())
    assert number(found.phase_margin(low)) > number(found.phase_margin())
    assert infinite(found.gain_margin(low))
    assert [c.kind for c in found.crossings(low)] == ["gain"]
    second = (fmpq(2), fmpq(3))
    assert number(found.crossover_frequency(second)) == pytest.approx(2.0048350058)
    assert infinite(found.peak_gain(low))
    # over a range beside the peak the nearer end of the range is the greatest
    beside = found.sensitivity_peak((fmpq(1), fmpq(3, 2)))
    assert where(beside).exact == fmpq(3, 2)
    # an end on a crossing counts
    plain = loop([2], [1, 0])
    assert plain.crossover_frequency((fmpq(1), fmpq(2))).exact == 2
    assert plain.crossover_frequency((fmpq(2), fmpq(2))).exact == 2
    assert plain.crossover_frequency((fmpq(2) + fmpq(1, 10**40), fmpq(3))).absent is not None


def test_the_phase_is_followed_from_zero_frequency(loop: Loop) -> None:
    """K/(s + 1)^8 turns by 8 atan w, a negative gain starts at -pi, a right-half-plane zero lags."""
    eighth = loop([rational("1.2")], [1, 8, 28, 56, 70, 56, 28, 8, 1])
    assert number(eighth.phase_at(fmpq(1))) == pytest.approx(-2 * 3.14159265)
    assert number(loop([-3], [1, 1]).phase_at(fmpq(0))) == pytest.approx(-3.14159265)
    assert number(loop([-1, 1], [1, 1, 0]).phase_at(fmpq(1))) == pytest.approx(-3.14159265)
    assert loop([1, 0], [1, 1]).phase_at(fmpq(0)).absent is not None


def test_a_loop_of_very_high_order_is_left_open() -> None:
    """Isolating all roots of a polynomial of degree 450 would take minutes: it is said, not tried."""
    above, below = fmpq_poly([1]), fmpq_poly([1, 1]) ** 450 + fmpq_poly([1, 1])
    loop = RationalLoop(TransferFunction(above, below), stable=True)
    assert loop.crossings() == ()
    read = MEASURES["gain_margin"].read
    assert read is not None
    answer = read(BreakSubject(TransferFunction(above, below), Answer.of_truth(True), loop), Arguments())
    assert answer.absent is not None
    assert not answer.absent.proved
    assert "order 100" in answer.absent.reason

"""What the measures mean where usage differs, on responses whose figures follow by hand."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import arb, fmpq

from specgate.measures.measure import Band
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent, Answer
from specgate.terms.precision import working_precision

Subject = Callable[..., ResponseSubject]
Read = Callable[..., Answer]
TWO_PERCENT = Band(fmpq(1, 50), relative=True)


def agrees(answer: Answer, expected: Callable[[], arb]) -> bool:
    """Whether a ball of 128 bits is narrow and holds the number."""
    ball = answer.enclose(128)
    with working_precision(256):
        exact = expected()
    return bool(ball.contains(exact)) and float(ball.rad()) < 1e-25


def test_a_pair_alone(subject: Subject, read: Read) -> None:
    """zeta = 0.6, wn = 1: overshoot exp(-3 pi/4), peak at pi/0.8; a step of 5."""
    pair = subject([1], [1, fmpq(6, 5), 1], 5)
    assert read("final_value", pair).exact == 5
    assert agrees(read("overshoot", pair), lambda: (-arb.pi() * 3 / 4).exp())
    assert agrees(read("overshoot", pair, absolute=True), lambda: 5 * (-arb.pi() * 3 / 4).exp())
    assert agrees(read("maximum_value", pair), lambda: 5 * (1 + (-arb.pi() * 3 / 4).exp()))
    assert agrees(read("peak_deviation", pair), lambda: 5 * (1 + (-arb.pi() * 3 / 4).exp()))
    assert agrees(read("peak_time", pair), lambda: arb.pi() * 5 / 4)
    assert read("minimum_value", pair).exact == 0
    assert read("undershoot", pair).exact == 0


def test_a_lag(subject: Subject, read: Read) -> None:
    """1/(3s + 1): settles at 3 ln 50, rises in 3 ln 9, half of it after 3 ln 2; nothing is passed or attained."""
    lag = subject([1], [3, 1])
    assert agrees(read("settling_time", lag, band=TWO_PERCENT), lambda: 3 * arb(50).log())
    assert agrees(read("rise_time", lag), lambda: 3 * arb(9).log())
    assert agrees(read("delay_time", lag), lambda: 3 * arb(2).log())
    assert agrees(read("value_at", lag, time=fmpq(3)), lambda: 1 - (-arb(1)).exp())
    assert read("overshoot", lag).exact == 0
    assert read("maximum_value", lag).exact == 1
    peak = read("peak_time", lag).absent
    assert peak is not None
    assert peak.proved


def test_a_step_down_is_measured_in_its_own_direction(subject: Subject, read: Read) -> None:
    up, down = subject([1], [1, 1, 1], 1), subject([1], [1, 1, 1], -2)
    assert read("final_value", down).exact == -2
    for name in ("overshoot", "peak_time", "rise_time", "delay_time"):
        assert read(name, up).enclose(128).overlaps(read(name, down).enclose(128)), name
    assert read("maximum_value", down).exact == 0
    assert read("overshoot", down).enclose(128) > 0


def test_a_jump_counts_as_overshoot(subject: Subject, read: Read) -> None:
    """(2s + 1)/(s + 1) jumps to 2 and comes down to 1: 100 % of the change from the value before the step."""
    jump = subject([2, 1], [1, 1])
    assert read("initial_value", jump).exact == 2
    assert read("overshoot", jump).exact == 1
    assert read("peak_time", jump).exact == 0
    assert read("rise_time", jump).exact == 0
    assert read("minimum_value", jump).exact == 1
    assert agrees(read("settling_time", jump, band=TWO_PERCENT), lambda: arb(50).log())


def test_the_wrong_way_first(subject: Subject, read: Read) -> None:
    """(1 - s)/(s + 1) starts at -1: an undershoot of 100 %, and a change of 1 all the same."""
    reverse = subject([-1, 1], [1, 1])
    assert read("undershoot", reverse).exact == 1
    assert read("undershoot", reverse, absolute=True).exact == 1
    assert read("minimum_value", reverse).exact == -1
    assert agrees(read("settling_time", reverse, band=TWO_PERCENT), lambda: arb(100).log())


def test_an_excursion_that_stays_on_the_right_side_is_no_undershoot(subject: Subject, read: Read) -> None:
    """A jump to 2, a dip that stays above zero, then 1: the lowest value is no movement the wrong way."""
    dip = subject([2, fmpq(1, 5), 1], [1, fmpq(6, 5), 1])
    low = read("minimum_value", dip).enclose(128)
    assert low > 0
    assert low < 1
    assert read("undershoot", dip).exact == 0


def test_no_change_has_no_percentages(subject: Subject, read: Read) -> None:
    washed_out = subject([1, 0], [1, 3, 2], 4)
    assert read("final_value", washed_out).exact == 0
    for name in ("overshoot", "undershoot", "rise_time", "delay_time", "peak_time"):
        absent = read(name, washed_out).absent
        assert absent is not None, name
        assert absent.proved
    relative = read("settling_time", washed_out, band=TWO_PERCENT).absent
    assert relative is not None
    assert "signal's unit" in relative.reason
    # y = 4 (e^-t - e^-2t), greatest at ln 2: 1
    assert agrees(read("peak_deviation", washed_out), lambda: arb(1))
    absolute = read("settling_time", washed_out, band=Band(fmpq(3, 4), relative=False))
    # 4 (x - x^2) = 3/4 at x = 1/4
    assert agrees(absolute, lambda: 2 * arb(2).log())


def test_steady_state_error_is_a_magnitude(subject: Subject, read: Read) -> None:
    from specgate.measures.table import MEASURES

    too_much = subject([5], [4, 4], 2)
    assert read("steady_state_error", too_much).exact == fmpq(1, 2)
    beside = MEASURES["steady_state_error"].beside
    assert beside is not None
    assert beside(too_much, None).exact == fmpq(-1, 2)


def test_error_without_a_reference(subject: Subject, read: Read) -> None:
    no_reference = subject([1], [1, 1], error=Absent("input and signal have different dimensions"))
    absent = read("steady_state_error", no_reference).absent
    assert absent is not None
    assert absent.reason == "input and signal have different dimensions"


@pytest.mark.parametrize("denominator", [[1, 0], [1, 0, 1], [1, -1], [1, 1, 0, 0]])
def test_what_does_not_settle_has_no_values(subject: Subject, read: Read, denominator: list[int]) -> None:
    wandering = subject([1], denominator)
    for name in ("final_value", "overshoot", "undershoot", "rise_time", "delay_time", "peak_time"):
        absent = read(name, wandering).absent
        assert absent is not None, name
        assert absent.proved, name
    settling = read("settling_time", wandering, band=TWO_PERCENT).absent
    assert settling is not None
    assert settling.proved
    assert read("initial_value", wandering).exact == 0


def test_a_hidden_unstable_mode_voids_every_measure_over_time(subject: Subject, read: Read, unstable: Absent) -> None:
    hidden = subject([1, -1], [1, 0, -1], void=unstable)
    for name in ("final_value", "maximum_value", "overshoot", "peak_time", "rise_time", "steady_state_error"):
        assert read(name, hidden).absent is unstable, name
    assert read("poles_at_origin", hidden).exact == 0


def test_an_open_question_stays_open(subject: Subject, read: Read) -> None:
    later = subject([1], [1, 1], response=Absent("dead time", proved=False))
    absent = read("final_value", later).absent
    assert absent is not None
    assert not absent.proved


def test_integrators_and_differentiators(subject: Subject, read: Read) -> None:
    channel = subject([3, 0, 0, 0], [1, 5, 0, 0])
    assert read("poles_at_origin", channel).exact == 0
    assert read("zeros_at_origin", channel).exact == 1
    assert read("poles_at_origin", subject([1, 1], [1, 0, 0])).exact == 2
    assert read("zeros_at_origin", subject([0], [1, 1])).absent is not None


def test_rise_time_between_other_percentages(subject: Subject, read: Read) -> None:
    lag = subject([1], [1, 1])
    assert agrees(read("rise_time", lag, lower=fmpq(1, 5), upper=fmpq(4, 5)), lambda: arb(4).log())
    with pytest.raises(ValueError, match="from < to"):
        read("rise_time", lag, lower=fmpq(1, 2), upper=fmpq(1, 2))

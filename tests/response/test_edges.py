"""Where an extreme touches an edge, where a value is only approached, where a response is too small for floats."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import arb, fmpq, fmpq_poly

from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof

Make = Callable[..., StepResponse]


def about(answer: Answer) -> float:
    return float(answer.enclose(64))


def test_a_lobe_that_nearly_crosses_is_told(respond: Make) -> None:
    """The second extreme of these pairs, exp(-2 pi z / sqrt(1 - z^2)) below 1, is 0.0199 and 0.0201."""
    inside, outside = respond([1], [1, "1.0581", 1]), respond([1], [1, "1.0561", 1])
    band = fmpq(1, 50)
    for response in (inside, outside):
        answer = response.settling(band)
        assert answer.fragile is not None
        assert answer.fragile.other is not None
        assert abs(float(answer.fragile.other(64)) - about(answer)) > 1.0
    assert about(inside.settling(band)) < about(outside.settling(band)) - 1.0
    assert respond([1], [1, "1.4", 1]).settling(band).fragile is None


def test_an_arrival_that_nearly_happened_earlier_is_told(respond: Make) -> None:
    """The first summit of this slow rise with a ripple misses the level by less than 1 %."""
    response = respond(["0.6", "0.22", "0.4"], [1, "0.5", "1.04", "0.4"])
    peak = None
    for level in (fmpq(k, 1000) for k in range(300, 999)):
        answer = response.first_arrival(level)
        if answer.fragile is not None and answer.fragile.other is not None:
            peak = answer
            break
    assert peak is not None
    assert abs(float(peak.fragile.other(64)) - about(peak)) > 0.01 * about(peak)  # type: ignore[union-attr, misc]


@pytest.mark.parametrize("digits", [6, 12, 18, 40, 400])
def test_an_extreme_next_to_the_edge_by_a_little(digits: int, respond: Make) -> None:
    """With poles 1 and 2 and y = 1 - (x - x^2)/5, x = e^-t, the deviation is least, -1/20, at t = ln 2."""
    response = respond([1, "2.8", 2], [1, 3, 2])
    little = fmpq(1, 10**digits)
    assert response.settling(fmpq(1, 20) + little).exact == 0
    answer = response.settling(fmpq(1, 20) - little)
    with working_precision(2000):
        root = (arb(little) * 5).sqrt()
        assert answer.enclose(64).overlaps(-(arb(fmpq(1, 2)) - root).log())
        assert not answer.enclose(1500).overlaps(arb(2).log())
    assert answer.fragile is not None


def test_an_extreme_exactly_on_the_edge_gives_both(respond: Make) -> None:
    answer = respond([1, "2.8", 2], [1, 3, 2]).settling(fmpq(1, 20))
    ball = answer.enclose(64)
    assert ball.contains(0)
    assert ball.overlaps(arb(2).log())
    assert ball.upper() < 0.6932
    assert answer.fragile is not None


def test_touching_the_edge_at_the_step_is_inside(respond: Make) -> None:
    """The change itself as the band: |y - 1| = 1 at the step and less from then on."""
    response = respond([1], [1, 2, 1])
    assert response.settling(fmpq(1)).exact == 0
    assert about(response.settling(fmpq(999, 1000))) > 0.0


def test_zero_overshoot_is_exact_only_where_it_is(respond: Make) -> None:
    """Poles 1 and 1.001: a zero at -0.9999 gives an overshoot in the far tail, one at -1.0001 none."""
    over, none = respond(["1.0011", "1.001"], [1, "2.001", "1.001"]), respond(["1.001"], [1, "2.001", "1.001"])
    assert over.greatest().value.proof is Proof.ENCLOSED
    assert none.greatest().value.exact == 1
    assert none.greatest().time.absent is not None


def test_an_overshoot_of_next_to_nothing_is_found(respond: Make) -> None:
    """The slowest mode, 1e-60 e^(-t), of the other sign wins in the end: above 1 by far less than 1e-60, but above."""
    tiny = fmpq(1, 10**60)
    response = respond(_shifted(tiny), [1, 3, 2])
    extreme = response.greatest()
    assert extreme.time.absent is None
    value = extreme.value.enclose(1000)
    with working_precision(1000):
        assert value > 1
        assert value < 1 + arb(tiny)


def _shifted(tiny: fmpq) -> list[str]:
    """Return the numerator of y = 1 + tiny e^-t - (1 + tiny) e^(-2 t), over s^2 + 3 s + 2."""
    return [str(c) for c in (fmpq(0), 2 + tiny, fmpq(2))]


def test_a_real_pole_and_a_pair_on_one_line(respond: Make) -> None:
    """1 - e^-t (5 - cos 2t - 2 sin 2t)/4 of 5/((s+1)(s^2+2s+5)) has no overshoot: 5 > sqrt(5). Exact."""
    response = respond([5], [1, 3, 7, 5])
    assert response.greatest().value.exact == 1
    assert response.greatest().time.absent is not None


def test_a_far_tail_that_floats_cannot_hold(respond: Make) -> None:
    """Five poles within 4e-6: the slowest outweighs the others only after e^-1000000 or so. Exactly no overshoot."""
    denominator = _product([f"1.00000{k}" for k in range(5)])
    response = StepResponse(denominator[1], denominator[0], fmpq(1))
    assert response.greatest().value.exact == 1
    assert response.least().value.exact == 0


def _product(rates: list[str]) -> tuple[fmpq_poly, fmpq_poly]:
    """Return the product of s + rate and, as a polynomial, its value at zero."""
    result = fmpq_poly([1])
    for rate in rates:
        whole, part = rate.split(".")
        result *= fmpq_poly([fmpq(int(whole + part), 10 ** len(part)), 1])
    return result, fmpq_poly([result[0]])


@pytest.mark.parametrize("power", [6, 12, 16, 20, 30])
def test_next_to_no_damping(power: int, respond: Make) -> None:
    """Settling of a pair lies within half a period before ln(50)/sigma; its first summit is the highest."""
    response = respond([1], [1, f"2e-{power}", 1])
    settled, extreme = response.settling(fmpq(1, 50)), response.greatest()
    with working_precision(300):
        sigma = arb(fmpq(1, 10**power))
        root = (1 - sigma * sigma).sqrt()
        envelope = (50 / root).log() / sigma
        early = envelope - settled.enclose(200)
        assert early > 0
        assert early < arb.pi()
        assert extreme.time.enclose(200).overlaps(arb.pi() / root)
        assert extreme.value.enclose(200).overlaps(1 + (-arb.pi() * sigma / root).exp())
    assert settled.fragile is None


def test_order_thirty_starts_without_undershoot(respond: Make) -> None:
    """A chain of thirty lags rises from the start on, like t^30: the least value is the jump, exactly zero."""
    denominator = _product([f"{1 + k / 10:.1f}" for k in range(30)])
    response = StepResponse(denominator[1], denominator[0], fmpq(1))
    assert response.least().value.exact == 0
    assert response.greatest().value.exact == 1


def test_a_response_that_never_moves(respond: Make) -> None:
    for numerator, denominator, value in (([0], [1, 1], 0), ([6, 6], [2, 2], 3), ([5], [1], 5)):
        response = respond(numerator, denominator)
        assert response.final_value().exact == response.initial_value().exact == value
        assert response.greatest().value.exact == response.least().value.exact == value
        assert response.settling(fmpq(1, 100)).exact == 0
        assert response.enclose(fmpq(3), 64).contains(value)
        assert len(response.curve()) == 2
    assert respond([6, 6], [2, 2]).first_arrival(fmpq(4)).absent is not None
    assert respond([6, 6], [2, 2]).first_arrival(fmpq(2)).exact == 0


def test_arrival_at_the_final_value_and_beyond(respond: Make) -> None:
    damped, swinging = respond([1], [1, 2, 1]), respond([1], [1, 1, 1])
    assert damped.first_arrival(fmpq(1)).absent is not None
    assert damped.first_arrival(fmpq(2)).absent is not None
    assert 0.0 < about(swinging.first_arrival(fmpq(1))) < about(swinging.greatest().time)
    assert about(swinging.first_arrival(fmpq(23, 20))) < about(swinging.greatest().time)
    assert swinging.first_arrival(fmpq(13, 10)).absent is not None
    assert respond([-1], [1, 1, 1]).first_arrival(fmpq(-1, 2)).absent is None


def test_bad_questions_are_refused(respond: Make) -> None:
    with pytest.raises(ValueError, match="improper"):
        respond([1, 0, 0], [1, 1])
    with pytest.raises(ValueError, match="half-width"):
        respond([1], [1, 1]).settling(fmpq(0))


def test_a_final_value_touched_at_a_rational_time_is_left_open() -> None:
    """y = 1 - (t - 2)^2 e^-t touches 1 at t = 2, exactly, and only approaches it afterwards."""
    line, cube = fmpq_poly([1, 1]), fmpq_poly([1, 1]) ** 3
    response = StepResponse(cube - fmpq_poly([0, 1]) * (4 * line * line - 4 * line + 2), cube, fmpq(1))
    with working_precision(200):
        assert response.enclose(fmpq(2), 128).overlaps(arb(1))
    answer = response.first_arrival(fmpq(1))
    assert answer.absent is not None
    assert not answer.absent.proved


def test_far_below_the_range_of_the_exponential(respond: Make) -> None:
    """1/(s+1)^50: the deviation is e^-t times the first 50 terms of the exponential series, also where e^-t is 0.0."""
    response = StepResponse(*reversed(_product(["1.0"] * 50)), fmpq(1))
    edge = fmpq(1, 10**255)
    time = response.settling(edge).enclose(200)
    with working_precision(400):
        series, term = arb(1), arb(1)
        for k in range(1, 50):
            term = term * time / k
            series = series + term
        assert ((-time).exp() * series).overlaps(arb(edge))
    assert time.rel_accuracy_bits() > 150


@pytest.mark.parametrize("power", [-400, 400])
def test_sizes_and_times_out_of_the_range_of_floats(power: int, respond: Make) -> None:
    """A pair of damping 0.5 scaled in value and in time."""
    unit = fmpq(10) ** power if power > 0 else 1 / fmpq(10) ** -power
    plain = respond([1], [1, 1, 1])
    large = StepResponse(plain.numerator, plain.denominator, unit)
    assert _ratio(large.greatest().value, plain.greatest().value, unit)
    assert _ratio(large.settling(unit / 50), plain.settling(fmpq(1, 50)), fmpq(1))
    slow = respond([1], ["1" + "0" * 800, "1" + "0" * 400, 1])
    assert _ratio(slow.greatest().time, plain.greatest().time, fmpq(10) ** 400)
    assert plain.settling(fmpq(10) ** 400).exact == 0
    assert plain.first_arrival(fmpq(10) ** 400).absent is not None
    assert len(large.curve()) == len(slow.curve()) == 400


def _ratio(one: Answer, other: Answer, factor: fmpq) -> bool:
    with working_precision(200):
        return bool(one.enclose(100).overlaps(other.enclose(100) * arb(factor)))


def test_a_dip_beyond_the_range_of_floats(respond: Make) -> None:
    """(1 - s/10^125)/(s+1)^2 dips by about 10^-250 / 2; with 10^-700 its beginning is out of range: open, no crash."""
    dipping = respond(["-1e-125", 1], [1, 2, 1]).least()
    value = dipping.value.enclose(64)
    with working_precision(100):
        assert (value * 2 * arb(10) ** 250 + 1).overlaps(arb(0, "1e-100"))
    beyond = respond(["-1e-700", 1], [1, 2, 1])
    for answer in (beyond.greatest().value, beyond.settling(fmpq(1, 50)), beyond.first_arrival(fmpq(1, 2))):
        assert answer.absent is not None
        assert not answer.absent.proved


def test_modes_that_cancel_beyond_floats_are_left_open() -> None:
    response = StepResponse(*reversed(_product([f"1.{k:012d}" for k in range(30)])), fmpq(1))
    assert response.final_value().exact == 1
    for answer in (response.greatest().value, response.settling(fmpq(1, 50))):
        assert answer.absent is not None
        assert not answer.absent.proved

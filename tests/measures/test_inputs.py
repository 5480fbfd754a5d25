"""Measures on other inputs than a step: error constants, noise, sines, masks, and which exist at all."""

from __future__ import annotations

from math import atan2, degrees, hypot

import pytest
from flint import fmpq, fmpq_poly

from specgate.measures.inputs import COURSE, INPUTS, REPORTED
from specgate.measures.limits import of_change
from specgate.measures.measure import Arguments, Band
from specgate.measures.subjects import ResponseSubject
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent, Answer
from specgate.response.inputs import Input, respond
from specgate.response.questions import Mask
from specgate.systems.transfer import TransferFunction

S = fmpq_poly([0, 1])
ONE = fmpq_poly([1])


def subject(loop: TransferFunction, given: Input) -> ResponseSubject:
    """Return the response of a unity feedback loop around an open loop, with its error."""
    closed = loop.denominator + loop.numerator
    channel, error = TransferFunction(loop.numerator, closed), TransferFunction(loop.denominator, closed)
    if given.kind == "white_noise":
        missing = Absent("noise", proved=False)
        return ResponseSubject(channel, fmpq(1), missing, missing, inputs=(given,))
    return ResponseSubject(channel, fmpq(1), respond([(channel, given)]), respond([(error, given)]), inputs=(given,))


def read(name: str, on: ResponseSubject, arguments: Arguments | None = None) -> Answer:
    reader = MEASURES[name].read
    assert reader is not None
    answer: Answer = reader(on, arguments or Arguments())
    return answer


STEP = Input("step", {"size": fmpq(3)})
RAMP = Input("ramp", {"slope": fmpq(3)})
PARABOLA = Input("parabola", {"curvature": fmpq(3)})
LAGS = (S + 2) * (S * S + S * 3 + 5)
TYPES = (
    TransferFunction(ONE * 4, LAGS),
    TransferFunction(ONE * 4, S * LAGS),
    TransferFunction(S * 4 + 1, S * S * LAGS),
)


@pytest.mark.parametrize(
    ("kind", "given", "expected"),
    [
        # constants: Kp = 4/10; Kv = 4/10; Ka = 1/10, and the errors 3/(1 + Kp), 3/Kv, 3/Ka of them
        (0, STEP, fmpq(15, 7)),
        (0, RAMP, None),
        (1, STEP, fmpq(0)),
        (1, RAMP, fmpq(15, 2)),
        (1, PARABOLA, None),
        (2, RAMP, fmpq(0)),
        (2, PARABOLA, fmpq(30)),
    ],
)
def test_error_constants_give_the_steady_state_errors(kind: int, given: Input, expected: fmpq | None) -> None:
    """The table of errors by type of loop and input that every textbook has, in exact arithmetic."""
    answer = read("steady_state_error", subject(TYPES[kind], given))
    assert answer.exact == expected
    assert (answer.absent is None) == (expected is not None)


def test_squared_error_of_a_pair() -> None:
    """wn^2/(s^2 + 2 zeta wn s) closed: for a unit step the integral is (1 + 4 zeta^2)/(4 zeta wn)."""
    zeta, wn = fmpq(3, 10), fmpq(7, 2)
    loop = TransferFunction(ONE * wn * wn, S * (S + 2 * zeta * wn))
    found = read("integral_squared_error", subject(loop, Input("step", {"size": fmpq(1)})))
    assert found.exact == (1 + 4 * zeta**2) / (4 * zeta * wn)


def test_absolute_error_without_overshoot_is_the_sum_of_the_lags() -> None:
    channel = TransferFunction(ONE, (S + 1) * (S * 2 + 1) * (S * fmpq(1, 3) + 1))
    error = TransferFunction(channel.denominator - channel.numerator, channel.denominator)
    made = ResponseSubject(channel, fmpq(1), respond([(channel, STEP)]), respond([(error, STEP)]), inputs=(STEP,))
    assert abs(float(read("integral_absolute_error", made).enclose(60)) - 3 * (1 + 2 + 1 / 3)) < 1e-12


def test_standard_deviation_of_a_lag() -> None:
    """One-sided density S through 1/(Ts + 1): the equivalent noise bandwidth is 1/(4T) Hz, the variance S/(4T)."""
    noise = Input("white_noise", {"density": fmpq(9, 4)})
    made = ResponseSubject(
        TransferFunction(ONE, S * fmpq(1, 4) + 1), fmpq(1), Absent("noise"), Absent("noise"), inputs=(noise,)
    )
    assert read("standard_deviation", made).exact == fmpq(3, 2)
    sign = MEASURES["standard_deviation"].at_limit
    assert sign is not None
    assert [sign(made, Arguments(), fmpq(k, 2)) for k in (-3, 2, 3, 4)] == [1, 1, 0, -1]
    direct = ResponseSubject(TransferFunction(S + 1, S + 2), fmpq(1), Absent("noise"), Absent("noise"), inputs=(noise,))
    absent = read("standard_deviation", direct).absent
    assert absent is not None
    assert absent.infinite


def test_the_steady_state_of_a_sine() -> None:
    sine = Input("sine", {"amplitude": fmpq(2), "frequency": fmpq(3)})
    made = subject(TYPES[1], sine)
    assert isinstance(made.channel, TransferFunction)
    s = 3j
    value = 4 / (s * (s + 2) * (s * s + 3 * s + 5) + 4)
    amplitude, phase = read("steady_state_amplitude", made), read("steady_state_phase", made)
    assert abs(float(amplitude.enclose(60)) - 2 * hypot(value.real, value.imag)) < 1e-12
    assert abs(degrees(float(phase.enclose(60))) - degrees(atan2(value.imag, value.real))) < 1e-9
    # 3/5 of the amplitude where 1/(s + 1)... at 4/3 rad/s: the gain is exactly 3/5
    exact = Input("sine", {"amplitude": fmpq(2), "frequency": fmpq(4, 3)})
    lag = ResponseSubject(
        TransferFunction(ONE, S + 1), fmpq(1), respond([(TransferFunction(ONE, S + 1), exact)]), Absent("none"),
        inputs=(exact,),
    )  # fmt: skip
    assert read("steady_state_amplitude", lag).exact == fmpq(6, 5)


@pytest.mark.parametrize("size", [1, -2])
def test_a_mask_in_parts_of_a_change_holds_for_rises_and_falls(size: int) -> None:
    loop = TransferFunction(ONE, S)
    made = subject(loop, Input("step", {"size": fmpq(size)}))
    limits = Mask(upper=((fmpq(0), fmpq(1)),), lower=((fmpq(0), fmpq(0)), (fmpq(1), fmpq(3, 5))), forever=True)
    inside = Arguments(mask=limits, relative=True)
    assert read("within_mask", made, inside).truth is True
    tight = Arguments(mask=Mask(lower=((fmpq(0), fmpq(0)), (fmpq(1), fmpq(2, 3))), forever=True), relative=True)
    assert read("within_mask", made, tight).truth is False
    assert of_change(limits, fmpq(-1)).upper == ((0, 0), (1, fmpq(-3, 5)))


def test_questions_over_time() -> None:
    made = subject(TransferFunction(ONE, S), Input("step", {"size": fmpq(1)}))
    after = read("deviation_after", made, Arguments(time=fmpq(1)))
    assert abs(float(after.enclose(60)) - 0.36787944117144233) < 1e-15
    assert after.at is not None
    assert isinstance(after.at["time"], Answer)
    assert after.at["time"].exact == 1
    rate = read("peak_rate", made)
    assert rate.enclose(60) == 1
    half = read("settling_time", made, Arguments(band=Band(fmpq(1, 2), relative=True)))
    assert abs(float(half.enclose(60)) - 0.6931471805599453) < 1e-15


def test_which_measures_exist_is_told_in_full() -> None:
    for row in MEASURES.values():
        assert set(row.inputs) <= set(INPUTS)
    assert set(REPORTED) <= set(INPUTS)
    for kind, names in REPORTED.items():
        for name in names:
            assert kind in MEASURES[name].inputs, (kind, name)
            assert "response" in MEASURES[name].subjects
    assert "white_noise" not in COURSE

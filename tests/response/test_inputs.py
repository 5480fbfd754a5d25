"""Inputs as sums of delayed steps: against closed forms, and laws that hold for all of them."""

from __future__ import annotations

import mpmath
import pytest
from flint import fmpq, fmpq_poly

from specgate.response.answers import Absent, Answer
from specgate.response.inputs import Input, respond
from specgate.response.questions import TimeResponse
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

PAIR = TransferFunction(highest_first([3, 4]), highest_first([1, fmpq(1, 2), 4]) * highest_first([1, 3]))
LAG = TransferFunction(fmpq_poly([1]), fmpq_poly([1, 1]))

INPUTS = {
    "step": Input("step", {"size": fmpq(2)}),
    "ramp": Input("ramp", {"slope": fmpq(2)}),
    "parabola": Input("parabola", {"curvature": fmpq(1, 2)}),
    "impulse": Input("impulse", {"area": fmpq(3)}),
    "ramp_and_hold": Input("ramp_and_hold", {"size": fmpq(3), "slope": fmpq(2)}),
    "pulse": Input("pulse", {"size": fmpq(2), "duration": fmpq(7, 10)}),
    "one_minus_cosine": Input("one_minus_cosine", {"size": fmpq(2), "duration": fmpq(5)}),
    "sine": Input("sine", {"amplitude": fmpq(2), "frequency": fmpq(3, 2)}),
}


def course(given: Input, t: mpmath.mpf) -> mpmath.mpf:
    """Return the input itself at a time."""
    t = t - number(given.begin)
    of = {name: number(value) for name, value in given.quantities.items()}
    if t < 0:
        return mpmath.mpf(0)
    match given.kind:
        case "step":
            return of["size"]
        case "ramp":
            return of["slope"] * t
        case "parabola":
            return of["curvature"] * t * t / 2
        case "ramp_and_hold":
            return min(of["slope"] * t, of["size"])
        case "pulse":
            return of["size"] if t < of["duration"] else mpmath.mpf(0)
        case "one_minus_cosine":
            inside = t < of["duration"]
            return of["size"] / 2 * (1 - mpmath.cos(2 * mpmath.pi * t / of["duration"])) if inside else mpmath.mpf(0)
        case "sine":
            return of["amplitude"] * mpmath.sin(of["frequency"] * t)
        case kind:
            raise ValueError(kind)


def number(value: fmpq) -> mpmath.mpf:
    return mpmath.mpf(int(value.p)) / int(value.q)


def impulse_response(channel: TransferFunction, t: mpmath.mpf) -> mpmath.mpf:
    """Return the sum of residues at the poles, which are simple and known."""
    swing = mpmath.sqrt(mpmath.mpf(63)) / 4
    known = {1: [mpmath.mpc(-1)], 3: [mpmath.mpc(-3), mpmath.mpc(-0.25, swing), mpmath.mpc(-0.25, -swing)]}
    poles = known[channel.denominator.degree()]
    slope = channel.denominator.derivative()
    return mpmath.re(sum(at(channel.numerator, p) / at(slope, p) * mpmath.exp(p * t) for p in poles))


def at(polynomial: fmpq_poly, s: mpmath.mpc) -> mpmath.mpc:
    value = mpmath.mpc(0)
    for c in reversed(polynomial.coeffs()):
        value = value * s + number(c)
    return value


def convolved(channel: TransferFunction, given: Input, t: fmpq) -> mpmath.mpf:
    """Return the response by the convolution integral."""
    end = number(t)
    begin = number(given.begin)
    edges = [begin, begin + mpmath.mpf(7) / 10, begin + mpmath.mpf(3) / 2, begin + 5]
    nodes = sorted({edge for edge in edges if 0 <= edge < end} | {end})
    return mpmath.quad(lambda tau: course(given, tau) * impulse_response(channel, end - tau), nodes)


def asked(channel: TransferFunction, given: Input) -> TimeResponse:
    """Return a response that exists."""
    response = respond([(channel, given)])
    assert not isinstance(response, Absent)
    return response


@pytest.mark.parametrize("kind", [kind for kind in INPUTS if kind != "impulse"])
def test_values_are_those_of_the_convolution(kind: str) -> None:
    with mpmath.workdps(30):
        for channel in (PAIR, LAG):
            response = asked(channel, INPUTS[kind])
            for time in (fmpq(3, 10), fmpq(2), fmpq(13, 2)):
                expected = convolved(channel, INPUTS[kind], time)
                found = mpmath.mpf(response.enclose(time, 100).str(25, radius=False))
                assert abs(found - expected) < mpmath.mpf(10) ** -12 * max(1, abs(expected))


def test_an_impulse_gives_the_impulse_response() -> None:
    with mpmath.workdps(30):
        response = asked(PAIR, INPUTS["impulse"])
        found = mpmath.mpf(response.enclose(fmpq(2), 100).str(25, radius=False))
        assert abs(found - 3 * impulse_response(PAIR, mpmath.mpf(2))) < mpmath.mpf(10) ** -20


def test_an_impulse_does_not_pass_straight_through() -> None:
    through = TransferFunction(fmpq_poly([1, 2]), fmpq_poly([1, 1]))
    assert isinstance(respond([(through, INPUTS["impulse"])]), Absent)
    assert not isinstance(respond([(through, INPUTS["pulse"])]), Absent)


@pytest.mark.parametrize("kind", INPUTS)
def test_a_sum_of_inputs_gives_the_sum_of_the_responses(kind: str) -> None:
    other = Input("step", {"size": fmpq(-1)}, begin=fmpq(3, 2))
    together = respond([(PAIR, INPUTS[kind]), (LAG, other)])
    assert not isinstance(together, Absent)
    parts = [asked(PAIR, INPUTS[kind]), asked(LAG, other)]
    for time in (fmpq(1), fmpq(3, 2), fmpq(4), fmpq(11)):
        whole = together.enclose(time, 100)
        assert whole.overlaps(parts[0].enclose(time, 120) + parts[1].enclose(time, 120))
        assert whole.rad() < 1e-20


def answers(response: TimeResponse) -> list[Answer]:
    """Return some of all kinds of answers."""
    extremes = (response.greatest(), response.least(), response.peak_rate())
    values = [extreme.value for extreme in extremes]
    times = [extreme.time for extreme in extremes]
    return [*values, response.settling(fmpq(1, 10)), *times]


@pytest.mark.parametrize("kind", ["pulse", "ramp_and_hold", "one_minus_cosine"])
def test_time_and_size_scale(kind: str) -> None:
    """A channel and an input that are k times slower, and an input m times as large, scale every answer."""
    k, m = fmpq(5, 3), fmpq(7)
    of = dict(INPUTS[kind].quantities)
    of["size"] = of["size"] * m
    if "duration" in of:
        of["duration"] = of["duration"] * k
    if "slope" in of:
        of["slope"] = of["slope"] * m / k
    slower = [fmpq_poly([c * k**n for n, c in enumerate(p.coeffs())]) for p in (PAIR.numerator, PAIR.denominator)]
    scaled = asked(TransferFunction(*slower), Input(INPUTS[kind].kind, of))
    plain = asked(PAIR, INPUTS[kind])
    for one, other in ((plain.greatest(), scaled.greatest()), (plain.least(), scaled.least())):
        assert (one.value.enclose(80) * m).overlaps(other.value.enclose(80))
        if one.time.absent is None:
            assert (one.time.enclose(80) * k).overlaps(other.time.enclose(80))
    assert (plain.settling(fmpq(1, 10)).enclose(80) * k).overlaps(scaled.settling(m / 10).enclose(80))
    assert (plain.peak_rate().value.enclose(80) * m / k).overlaps(scaled.peak_rate().value.enclose(80))
    if kind != "ramp_and_hold":
        assert (plain.absolute_integral().enclose(60) * m * k).overlaps(scaled.absolute_integral().enclose(60))
        assert (plain.squared_integral().enclose(60) * m * m * k).overlaps(scaled.squared_integral().enclose(60))


def test_times_may_count_from_the_end_of_the_ramp() -> None:
    plain, counted = (
        asked(PAIR, Input("ramp_and_hold", INPUTS["ramp_and_hold"].quantities, from_end=from_end))
        for from_end in (False, True)
    )
    shift = fmpq(3, 2)
    assert (plain.settling(fmpq(1, 10)).enclose(80) - shift).overlaps(counted.settling(fmpq(1, 10)).enclose(80))
    assert counted.settling(fmpq(10)).enclose(60) == 0
    assert plain.enclose(fmpq(4), 80).overlaps(counted.enclose(fmpq(4) - shift, 80))
    assert plain.greatest().value.enclose(60).overlaps(counted.greatest().value.enclose(60))

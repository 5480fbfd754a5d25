"""Responses to pulses, held ramps and bumps against exponentials of the system matrix, in 400 bits.

The input is made by a small system of its own, whose state is changed at its kinks. What is claimed is checked where it
is claimed and on both sides of it: an extreme is the value at its time and no sample exceeds it; a settling time lies
on the edge of the band, the response is outside just before it and inside after it.
"""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import arb, arb_mat, fmpq, fmpq_poly

from specgate.response.answers import Absent
from specgate.response.inputs import Input, respond
from specgate.response.questions import TimeResponse
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction
from specgate.terms.precision import working_precision

BITS = 500
S = fmpq_poly([0, 1])
LAG = fmpq_poly([1, 1])


def pair(damping: fmpq, frequency: int = 2) -> fmpq_poly:
    """Return s^2 + 2 damping frequency s + frequency^2."""
    return highest_first([1, 2 * damping * frequency, frequency * frequency])


SYSTEMS = {
    "plain": (S + 3, pair(fmpq(3, 10)) * (S + 5)),
    "stiff": ((S + 3) * 10**6, pair(fmpq(1, 2)) * (S + 10**6)),
    "light": (fmpq_poly([4]), pair(fmpq(1, 500)) * LAG),
    "repeated": (S * -2 + 1, LAG**5),
    "slow tail": (S + fmpq(99, 1000), pair(fmpq(7, 10)) * (S + fmpq(1, 10))),
    "feed-through": (S * S + S * 4 + 1, (S + 1) * (S + 2)),
    "worked off": (S * 3, pair(fmpq(1, 5)) * LAG),
}
INPUTS = {
    "pulse": Input("pulse", {"size": fmpq(3, 2), "duration": fmpq(7, 10)}),
    "ramp_and_hold": Input("ramp_and_hold", {"size": fmpq(-2), "slope": fmpq(-3)}),
    "one_minus_cosine": Input("one_minus_cosine", {"size": fmpq(2), "duration": fmpq(17, 10)}),
}


def stages(given: Input) -> tuple[fmpq, list[list[arb]], Callable[[bool], list[arb]], list[arb]]:
    """Return when an input changes, and w' = W w with u = c w, and w just after the start and after the change."""
    of = {name: arb(value) for name, value in given.quantities.items()}
    zero, one = arb(0), arb(1)
    if given.kind == "pulse":
        return given.quantities["duration"], [[zero]], lambda late: [zero if late else of["size"]], [one]
    if given.kind == "ramp_and_hold":
        change = given.quantities["size"] / given.quantities["slope"]
        first, second = [zero, of["slope"]], [of["size"], zero]
        return change, [[zero, one], [zero, zero]], lambda late: second if late else first, [one, zero]
    rate = 2 * arb.pi() / of["duration"]
    turning = [[zero, zero, zero], [zero, zero, -rate], [zero, rate, zero]]
    half = of["size"] / 2
    return (
        given.quantities["duration"],
        turning,
        lambda late: [zero, zero, zero] if late else [half, -half, zero],
        [one, one, zero],
    )


class Simulated:
    """The response by matrix exponentials."""

    def __init__(self, numerator: fmpq_poly, denominator: fmpq_poly, given: Input) -> None:
        with working_precision(BITS):
            lead = denominator.leading_coefficient()
            numerator, denominator = numerator / lead, denominator / lead
            n = denominator.degree()
            direct = numerator[n]
            rest = numerator - denominator * direct
            self._change, turning, self._start, read = stages(given)
            m = len(turning)
            rows = [[arb(0)] * (n + m) for _ in range(n + m)]
            for i in range(n - 1):
                rows[i][i + 1] = arb(1)
            for j in range(n):
                rows[n - 1][j] = -arb(denominator[j])
            for j in range(m):
                rows[n - 1][n + j] = read[j]
                for i in range(m):
                    rows[n + i][n + j] = turning[i][j]
            self._n, self._matrix = n, arb_mat(rows)
            self._out = [arb(rest[j]) for j in range(n)] + [arb(direct) * c for c in read]
            begin = [arb(0)] * n + self._start(False)
            at_change = self._moved(begin, self._change)
            self._states = (begin, at_change[:n] + self._start(True))

    def _moved(self, state: list[arb], time: fmpq | arb) -> list[arb]:
        moved = (self._matrix * arb(time)).exp() * arb_mat(len(state), 1, state)
        return moved.entries()

    def at(self, time: fmpq) -> arb:
        """Return y at an instant, just after it where the input changes."""
        with working_precision(BITS):
            late = time >= self._change
            state = self._moved(self._states[late], time - self._change if late else time)
            return sum((c * x for c, x in zip(self._out, state, strict=True)), arb(0))


def answered(name: str, kind: str) -> tuple[TimeResponse, Simulated]:
    numerator, denominator = SYSTEMS[name]
    response = respond([(TransferFunction(numerator, denominator), INPUTS[kind])])
    assert not isinstance(response, Absent)
    return response, Simulated(numerator, denominator, INPUTS[kind])


@pytest.mark.parametrize("kind", INPUTS)
@pytest.mark.parametrize("name", SYSTEMS)
def test_claims_hold_where_they_are_made_and_beside_it(name: str, kind: str) -> None:
    response, simulated = answered(name, kind)
    final = response.final_value().exact
    assert final is not None
    times = [fmpq(k * k, 40) for k in range(40)] + [fmpq(1, 10**k) for k in range(1, 8)]
    values = {time: simulated.at(time) for time in times}
    for time in (fmpq(1, 3), fmpq(2), fmpq(9)):
        assert response.enclose(time, 100).overlaps(simulated.at(time))
    peak = fmpq(0)
    for extreme, sign in ((response.greatest(), 1), (response.least(), -1)):
        ball = sign * extreme.value.enclose(100)
        peak = max(peak, abs(ball).mid().fmpq())
        assert all((sign * value).lower() <= ball.upper() for value in values.values())
        if extreme.time.absent is None:
            place = extreme.time.enclose(200).mid().fmpq()
            near = [simulated.at(max(fmpq(0), place + side * fmpq(1, 10**30))) for side in (-1, 1)]
            assert min(abs(sign * value - ball).lower() for value in near) < 1e-20
    band = abs(peak - abs(final)) / 7 + peak / 50
    settled = response.settling(band)
    assert settled.absent is None
    place, step = settled.enclose(200).mid().fmpq(), fmpq(1, 10**12)
    before, after = (abs(simulated.at(place + side * step) - final) for side in (-1, 1))
    assert before > arb(band)
    assert after <= arb(band)
    assert all(abs(value - final).lower() <= arb(band) for time, value in values.items() if time > place)


@pytest.mark.parametrize("kind", ["pulse", "one_minus_cosine"])
@pytest.mark.parametrize("name", ["plain", "repeated", "worked off"])
def test_integrals_are_those_of_a_fine_sum(name: str, kind: str) -> None:
    """Trapezoids on 400 points err by a few parts in 1e4; it is the pieces and signs that they check."""
    response, simulated = answered(name, kind)
    last, count = fmpq(24), 400
    values = [simulated.at(last * k / count).mid() for k in range(count + 1)]
    width = float(last.p) / float(last.q) / count
    heights = [float(value) for value in values]
    absolute = width * (sum(map(abs, heights)) - abs(heights[0]) / 2)
    squared = width * (sum(h * h for h in heights) - heights[0] ** 2 / 2)
    assert abs(float(response.absolute_integral().enclose(60)) / absolute - 1) < 0.02
    assert abs(float(response.squared_integral().enclose(60)) / squared - 1) < 0.02

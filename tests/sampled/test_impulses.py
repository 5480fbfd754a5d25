"""Impulses on sampled loops: what a block in s makes of one is an initial state, and nothing else has a meaning."""

from __future__ import annotations

import pytest
from flint import arb, fmpq

from specgate.response.inputs import Input
from specgate.response.piecewise import PiecewiseResponse
from specgate.sampled.channel import channel, pieces
from specgate.sampled.drive import drive
from specgate.sampled.pieces import SampledPieces
from specgate.sampled.solution import solve_sampled
from specgate.terms.precision import working_precision

from .conftest import Case, form

LAG = Case(([2], [1, 3]), (["1/2"], [1, -1]), "1/5", "1/10")
SMOOTH = Case(([4], [1, 2, 4]), (["1/4"], [1, -1]), "1/4")
THROUGH = Case(([1, 2], [2, 1]), (["1/5"], [1, -1]), "1/3")


def response(case: Case, kind: str, size: fmpq, duration: fmpq | None, begin: fmpq, source: str) -> SampledPieces:
    given = {"area": size} if duration is None else {"size": size, "duration": duration}
    found = drive([(source, Input(kind, given, begin))])  # type: ignore[arg-type]
    return pieces(channel(solve_sampled(case.wiring()), [source], form(place=1)), found)


def impulse(case: Case, begin: fmpq, source: str = "load") -> SampledPieces:
    return response(case, "impulse", fmpq(3), None, begin, source)


@pytest.mark.parametrize("case", [LAG, SMOOTH])
@pytest.mark.parametrize("begin", [fmpq(1, 20), fmpq(7, 11)])
def test_short_pulses_of_the_same_area_tend_to_it(case: Case, begin: fmpq) -> None:
    """Between two samples: a pulse of the duration h differs by h/2 times a derivative, to the first order."""
    exactly = PiecewiseResponse(impulse(case, begin))
    for time in (fmpq(4, 5), fmpq(5, 3), fmpq(4), fmpq(11, 2)):
        wide, narrow = (
            PiecewiseResponse(response(case, "pulse", 3 / h, h, begin - h / 2, "load")).enclose(time, 128)
            for h in (fmpq(1, 500), fmpq(1, 1000))
        )
        with working_precision(160):
            right = exactly.enclose(time, 128)
            assert abs(wide - right) < arb(fmpq(1, 10**4))
            # a pulse about the same middle differs in the second order
            assert abs((4 * narrow - wide) / 3 - right) < arb(fmpq(1, 10**9))


def test_a_lag_jumps_by_its_rate_times_the_area() -> None:
    assert impulse(LAG, fmpq(0)).jump(0) == 6
    assert impulse(SMOOTH, fmpq(0)).jump(0) == 0
    late = impulse(LAG, fmpq(1, 20))
    assert late.jump(1) is None
    before, after = (late.derivatives(index, arb(fmpq(1, 20)), 96)[0] for index in (0, 1))
    assert before.is_zero()
    assert after.overlaps(arb(6))


def test_an_impulse_at_a_sample_is_seen_by_it() -> None:
    """The held answer to it arrives a delay later: 6 after the jump, decayed, less what the sample makes of it."""
    found = PiecewiseResponse(impulse(LAG, fmpq(0)))
    held = -fmpq(1, 2) * 6
    with working_precision(128):
        since = arb(fmpq(1, 20))
        expected = 6 * (-3 * arb(fmpq(3, 20))).exp() + arb(held) * 2 / 3 * (1 - (-3 * since).exp())
        # the numerator of the law is 1/2 with the denominator z - 1: its answer to sample 0 is sent at sample 1
        assert not found.enclose(fmpq(3, 20), 96).overlaps(expected)
        assert found.enclose(fmpq(3, 20), 96).overlaps(6 * (-3 * arb(fmpq(3, 20))).exp())
        later = 6 * (-3 * arb(fmpq(7, 20))).exp() + arb(held) * 2 / 3 * (1 - (-3 * since).exp())
        assert found.enclose(fmpq(7, 20), 96).overlaps(later)


def test_what_has_no_meaning_is_said() -> None:
    asked = impulse(LAG, fmpq(0), "ask").undefined
    assert asked is not None
    assert asked.reason == "an impulse reaches a sampler directly, and a sample of it means nothing"
    assert impulse(THROUGH, fmpq(0)).undefined is not None
    assert impulse(LAG, fmpq(0)).undefined is None
    assert PiecewiseResponse(impulse(LAG, fmpq(0))).final_value().exact == 0

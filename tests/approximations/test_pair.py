"""The closed forms of a pair alone, against the proved response of the same pair."""

from __future__ import annotations

from typing import Any

import pytest
from flint import fmpq
from hypothesis import given, settings
from hypothesis import strategies as st

from specgate.approximations import pair
from specgate.approximations.features import Features
from specgate.response.step import StepResponse


def response(features: Features) -> StepResponse:
    assert isinstance(features.subject.response, StepResponse)
    return features.subject.response


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 980), st.integers(1, 300))
def test_against_the_proved_response(build: Any, damping: int, band: int) -> None:
    features = build.pair(fmpq(damping, 1000))
    found, true, inside = features.pair, response(features), fmpq(band, 1000)
    assert pair.overshoot(found).enclose(96).overlaps(true.greatest().value.enclose(160) - 1)
    assert pair.peak_time(found).enclose(96).overlaps(true.greatest().time.enclose(160))
    assert pair.settling_time(found, inside).enclose(96).overlaps(true.settling(inside).enclose(160))
    rise = pair.rise_time(found, fmpq(1, 10), fmpq(9, 10)).enclose(96)
    start, end = true.first_arrival(fmpq(1, 10)).enclose(160), true.first_arrival(fmpq(9, 10)).enclose(160)
    assert abs(rise - (end - start)) < 1e-12


def test_more_bits_give_a_narrower_ball(build: Any) -> None:
    answer = pair.settling_time(build.pair("0.3").pair, fmpq(1, 50))
    coarse, fine = answer.enclose(64), answer.enclose(256)
    assert coarse.overlaps(fine)
    assert float(fine.rad()) < 1e-60 < float(coarse.rad())


@pytest.mark.parametrize("damping", ["0.7796", "0.7797", "0.77970"])
def test_next_to_the_jump(build: Any, damping: str) -> None:
    """At zeta = 0.779703 the first peak just touches the 2 % band and the settling time jumps."""
    late = pair.settling_time(build.pair(damping).pair, fmpq(1, 50)).enclose(64)
    early = pair.settling_time(build.pair("0.77971").pair, fmpq(1, 50)).enclose(64)
    assert late > 5
    assert early < 3.7

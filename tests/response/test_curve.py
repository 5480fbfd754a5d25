"""Points for drawing: within the count, in order, true to the response, with what matters among them."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import pytest
from flint import fmpq

from specgate.response.step import StepResponse

Make = Callable[..., StepResponse]

SYSTEMS = {
    "plain": ([4], [1, "1.2", 4]),
    "stiff": ([1], [1, 1000001, 1000000]),
    "twelve lags": ([1], [1, 12, 66, 220, 495, 792, 924, 792, 495, 220, 66, 12, 1]),
    "light": ([1], [1, "0.0002", 1]),
    "next to no damping": ([1], [1, "2e-12", 1]),
    "returns to zero": ([1, 0], [1, 2, 5]),
    "feed-through": ([2, 1], [1, 1]),
    "integrator": ([1], [1, 1, 0]),
    "growing": ([1], [1, "-0.1", 1]),
    "swing": ([1], [1, 0, 1]),
    "negative": ([-3], [1, 1, 3]),
}


@pytest.mark.parametrize("name", SYSTEMS)
@pytest.mark.parametrize("count", [400, 60])
def test_points(name: str, count: int, respond: Make) -> None:
    response = respond(*SYSTEMS[name])
    points = response.curve(count)
    assert 0.5 * count < len(points) <= count
    assert points[0][0] == 0
    assert points[0][1].contains(response.initial_value().exact)
    assert all(one[0] < other[0] for one, other in pairwise(points))
    for time, value in points[1 :: len(points) // 9]:
        true = response.enclose(time, 128)
        assert value.overlaps(true)
        assert value.rad() < 1e-20 * max(1e-6, abs(float(value)))


@pytest.mark.parametrize("name", ["plain", "light", "next to no damping", "returns to zero", "negative"])
def test_extremes_are_among_them(name: str, respond: Make) -> None:
    response = respond(*SYSTEMS[name])
    points = response.curve()
    for extreme in (response.greatest(), response.least()):
        if extreme.time.absent is None:
            time, value = float(extreme.time.enclose(64)), float(extreme.value.enclose(64))
            assert min(abs(float(y) - value) for t, y in points if abs(_float(t) - time) <= 1e-9 * time) < 1e-9


def test_crossings_that_were_asked_for_are_among_them(respond: Make) -> None:
    response = respond(*SYSTEMS["plain"])
    asked = [response.settling(fmpq(1, 20)), response.first_arrival(fmpq(1, 2))]
    times = [_float(time) for time, _ in response.curve()]
    for answer in asked:
        time = float(answer.enclose(64))
        assert min(abs(other - time) for other in times) < 1e-12


def test_the_window_ends_when_it_has_settled(respond: Make) -> None:
    response = respond(*SYSTEMS["plain"])
    settled, last = float(response.settling(fmpq(1, 50)).enclose(64)), _float(response.curve()[-1][0])
    assert settled < last < 2.0 * settled


def test_dense_periods_are_drawn_by_their_edges(respond: Make) -> None:
    points = respond(*SYSTEMS["light"]).curve()
    values = [float(value) for time, value in points if 1000 < _float(time) < 2000]
    assert all((one - 1.0) * (other - 1.0) < 0.0 for one, other in pairwise(values))
    assert max(values) > 1.7
    assert min(values) < 0.3


def _float(value: fmpq) -> float:
    return int(value.p) / int(value.q)

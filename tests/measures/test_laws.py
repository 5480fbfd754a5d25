"""Laws of the measures on random stable responses: scaling of the step, scaling of time, more digits."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from flint import fmpq, fmpq_poly
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from specgate.measures.measure import Band
from specgate.measures.subjects import ResponseSubject
from specgate.response.answers import Absent, Answer
from specgate.response.step import StepResponse
from specgate.systems.transfer import TransferFunction

TIMES = {
    "settling_time": {"band": Band(fmpq(1, 50), relative=True)},
    "rise_time": {},
    "delay_time": {},
    "peak_time": {},
}
RATIOS = ("overshoot", "undershoot")
VALUES = ("final_value", "initial_value", "maximum_value", "minimum_value", "peak_deviation")
Read = Callable[..., Answer]

real = st.integers(-60, -2).map(lambda n: fmpq_poly([fmpq(-n, 10), 1]))
pair = st.tuples(st.integers(1, 30), st.integers(1, 60)).map(
    lambda p: fmpq_poly([fmpq(p[0] ** 2 + p[1] ** 2, 100), fmpq(2 * p[0], 10), 1])
)
zero = st.integers(-80, 80).filter(lambda n: n != 0).map(lambda n: fmpq_poly([1, fmpq(1, n)]))


@st.composite
def systems(draw: Any) -> tuple[fmpq_poly, fmpq_poly]:
    """Draw a stable proper fraction with a final value."""
    factors = draw(st.lists(st.one_of(real, pair), min_size=1, max_size=3))
    denominator = fmpq_poly([1])
    for factor in factors:
        denominator *= factor
    numerator = fmpq_poly([1])
    for factor in draw(st.lists(zero, max_size=min(2, denominator.degree()))):
        numerator *= factor
    return numerator, denominator


def subject(numerator: fmpq_poly, denominator: fmpq_poly, size: fmpq) -> ResponseSubject:
    return ResponseSubject(
        TransferFunction(numerator, denominator),
        size,
        StepResponse(numerator, denominator, size),
        Absent("no reference is named"),
    )


def same(first: Answer, second: Answer, factor: fmpq) -> bool:
    """Whether second is factor times first, as far as two balls can tell; or both have no value."""
    if first.absent is not None or second.absent is not None:
        return (first.absent is None) is (second.absent is None)
    return bool((first.enclose(96) * factor).overlaps(second.enclose(96)))


quick = settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])


@quick
@given(systems(), st.integers(1, 400), st.booleans())
def test_a_larger_step_scales_values_and_no_times(
    read: Read, system: tuple[fmpq_poly, fmpq_poly], size: int, down: bool
) -> None:
    factor = fmpq(-size if down else size, 7)
    one, other = subject(*system, fmpq(1)), subject(*system, factor)
    for name, arguments in TIMES.items():
        assert same(read(name, one, **arguments), read(name, other, **arguments), fmpq(1)), name
    for name in RATIOS:
        assert same(read(name, one), read(name, other), fmpq(1)), name
        assert same(read(name, one, absolute=True), read(name, other, absolute=True), abs(factor)), name
    swapped = {"maximum_value": "minimum_value", "minimum_value": "maximum_value"} if down else {}
    for name in VALUES:
        scale = abs(factor) if name == "peak_deviation" else factor
        assert same(read(name, one), read(swapped.get(name, name), other), scale), name


@quick
@given(systems(), st.integers(1, 900))
def test_slower_by_a_factor(read: Read, system: tuple[fmpq_poly, fmpq_poly], slowness: int) -> None:
    factor = fmpq(slowness, 30)
    slower = tuple(polynomial(fmpq_poly([0, factor])) for polynomial in system)
    one, other = subject(*system, fmpq(1)), subject(slower[0], slower[1], fmpq(1))
    for name, arguments in TIMES.items():
        assert same(read(name, one, **arguments), read(name, other, **arguments), factor), name
    for name in (*RATIOS, *VALUES):
        assert same(read(name, one), read(name, other), fmpq(1)), name


@quick
@given(systems())
def test_more_digits_agree_with_fewer(read: Read, system: tuple[fmpq_poly, fmpq_poly]) -> None:
    one = subject(*system, fmpq(1))
    for name in (*TIMES, *RATIOS, *VALUES):
        answer = read(name, one, **TIMES.get(name, {}))
        if answer.absent is None:
            coarse, fine = answer.enclose(64), answer.enclose(512)
            assert coarse.overlaps(fine), name
            assert float(fine.rad()) <= float(coarse.rad()), name

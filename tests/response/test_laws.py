"""Laws that hold for every response: scaling of time, of size and of sign, order of bands, precision, known forms."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import pytest
from flint import arb, fmpq, fmpq_poly
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from specgate.response.answers import Answer
from specgate.response.step import StepResponse
from specgate.systems.polynomials import highest_first
from specgate.terms.precision import working_precision

Make = Callable[..., StepResponse]
BITS = 100

number = st.fractions(min_value="1/20", max_value=20, max_denominator=50).map(
    lambda q: fmpq(q.numerator, q.denominator)
)
damping = st.fractions(min_value="1/50", max_value=2, max_denominator=50).map(
    lambda q: fmpq(q.numerator, q.denominator)
)
lag = number.map(lambda p: highest_first([fmpq(1), p]))
pair = st.builds(lambda w, z: highest_first([fmpq(1), 2 * z * w, w * w]), number, damping)
poles = st.lists(st.one_of(lag, pair), min_size=1, max_size=3)
zeros = st.lists(st.tuples(number, st.sampled_from([1, 1, 1, -1])), max_size=1)


def fraction(parts: list[fmpq_poly], tops: list[tuple[fmpq, int]]) -> tuple[fmpq_poly, fmpq_poly]:
    numerator, denominator = fmpq_poly([1]), fmpq_poly([1])
    for part in parts:
        denominator *= part
    for zero, sign in tops:
        numerator *= highest_first([fmpq(1), zero * sign])
    assume(denominator.degree() > numerator.degree() or numerator != denominator)
    return numerator, denominator


def answers(response: StepResponse) -> dict[str, Answer]:
    final = response.final_value().exact
    assert final is not None
    found = {"ts": response.settling(abs(final) / 50), "t50": response.first_arrival(final / 2)}
    for name, extreme in (("greatest", response.greatest()), ("least", response.least())):
        found[name], found[f"t {name}"] = extreme.value, extreme.time
    return found


def same(one: Answer, other: Answer, factor: fmpq) -> bool:
    """Whether `other` is `factor` times `one`, as far as their balls tell."""
    if one.absent is not None or other.absent is not None:
        return (one.absent is None) == (other.absent is None)
    if one.exact is not None and other.exact is not None:
        return bool(other.exact == one.exact * factor)
    with working_precision(2 * BITS):
        return bool((one.enclose(BITS) * arb(factor)).overlaps(other.enclose(BITS)))


@settings(max_examples=30, deadline=None)
@given(poles, zeros, st.integers(-40, 40).map(lambda k: fmpq(3) ** k if k >= 0 else 1 / fmpq(3) ** -k))
def test_time_scales_with_the_poles(parts: list[fmpq_poly], tops: list[tuple[fmpq, int]], factor: fmpq) -> None:
    numerator, denominator = fraction(parts, tops)

    def stretched(p: fmpq_poly) -> fmpq_poly:
        return fmpq_poly([c * factor**k for k, c in enumerate(p.coeffs())])

    one = answers(StepResponse(numerator, denominator, fmpq(1)))
    other = answers(StepResponse(stretched(numerator), stretched(denominator), fmpq(1)))
    for name, answer in one.items():
        assert same(answer, other[name], factor if name.startswith("t") else fmpq(1)), name


@settings(max_examples=30, deadline=None)
@given(poles, zeros, number)
def test_values_scale_with_the_size(parts: list[fmpq_poly], tops: list[tuple[fmpq, int]], size: fmpq) -> None:
    numerator, denominator = fraction(parts, tops)
    one = answers(StepResponse(numerator, denominator, fmpq(1)))
    other = answers(StepResponse(numerator, denominator, size))
    for name, answer in one.items():
        assert same(answer, other[name], fmpq(1) if name.startswith("t") else size), name


@settings(max_examples=20, deadline=None)
@given(poles, zeros)
def test_a_negative_step_is_a_mirror(parts: list[fmpq_poly], tops: list[tuple[fmpq, int]]) -> None:
    numerator, denominator = fraction(parts, tops)
    one, other = StepResponse(numerator, denominator, fmpq(1)), StepResponse(numerator, denominator, fmpq(-1))
    assert same(one.greatest().value, other.least().value, fmpq(-1))
    assert same(one.greatest().time, other.least().time, fmpq(1))
    assert same(one.peak_deviation().value, other.peak_deviation().value, fmpq(1))


@settings(max_examples=20, deadline=None)
@given(poles, zeros)
def test_a_narrower_band_takes_longer(parts: list[fmpq_poly], tops: list[tuple[fmpq, int]]) -> None:
    response = StepResponse(*fraction(parts, tops), fmpq(1))
    final = response.final_value().exact
    assert final is not None
    times = [response.settling(abs(final) / share) for share in (5, 10, 50, 1000, 10**6, 10**20)]
    with working_precision(BITS):
        assert all(not earlier.enclose(BITS) > later.enclose(BITS) for earlier, later in pairwise(times))
    levels = [response.first_arrival(final * k / 10) for k in range(1, 10)]
    with working_precision(BITS):
        assert all(not earlier.enclose(BITS) > later.enclose(BITS) for earlier, later in pairwise(levels))


@settings(max_examples=20, deadline=None)
@given(poles, zeros)
def test_more_bits_give_a_narrower_ball_of_the_same_number(
    parts: list[fmpq_poly], tops: list[tuple[fmpq, int]]
) -> None:
    for name, answer in answers(StepResponse(*fraction(parts, tops), fmpq(1))).items():
        if answer.absent is None:
            balls = [answer.enclose(bits) for bits in (64, 128, 300, 1000)]
            with working_precision(1100):
                assert all(one.overlaps(other) for one, other in pairwise(balls)), name
                assert all(not other.rad() > one.rad() for one, other in pairwise(balls)), name
            assert balls[-1].rel_accuracy_bits() >= 990, name


def test_refined_to_the_highest_precision(respond: Make) -> None:
    """Peak time and height of an undisturbed pair are pi / (w sqrt(1 - z^2)) and 1 + exp(-pi z / sqrt(1 - z^2))."""
    response = respond([4], [1, "1.2", 4])
    extreme = response.greatest()
    with working_precision(4200):
        root = (1 - arb(fmpq(9, 100))).sqrt()
        assert extreme.time.enclose(4096).overlaps(arb.pi() / (2 * root))
        assert extreme.value.enclose(4096).overlaps(1 + (-arb.pi() * arb(fmpq(3, 10)) / root).exp())
    assert extreme.time.enclose(4096).rel_accuracy_bits() >= 4090
    assert extreme.value.enclose(4096).rel_accuracy_bits() >= 4090


@pytest.mark.parametrize(("pole", "share"), [("0.25", 50), ("1e-9", 20), ("3e7", 1000)])
def test_one_pole(pole: str, share: int, respond: Make, rational: Callable[[str], fmpq]) -> None:
    """A lag settles at ln(1/band) T and arrives at a share x at -ln(1 - x) T; its extremes are exact."""
    response, rate = respond([pole], [1, pole]), rational(pole)
    with working_precision(300):
        assert response.settling(fmpq(1, share)).enclose(200).overlaps(arb(share).log() / arb(rate))
        assert response.first_arrival(fmpq(9, 10)).enclose(200).overlaps(arb(10).log() / arb(rate))
    assert (response.greatest().value.exact, response.least().value.exact) == (1, 0)
    assert response.greatest().time.absent is not None


def test_multiplicity_thirteen(respond: Make) -> None:
    """1/(s+1)^13 at t: 1 - exp(-t) times the first 13 terms of the exponential series (all of its 13 terms matter)."""
    response = respond([1], [*_binomials(13)])
    time = response.settling(fmpq(1, 50))
    with working_precision(300):
        t = time.enclose(128)
        series, term = arb(1), arb(1)
        for k in range(1, 13):
            term = term * t / k
            series = series + term
        assert ((-t).exp() * series).overlaps(arb(fmpq(1, 50)))


def _binomials(order: int) -> list[int]:
    row = [1]
    for _ in range(order):
        row = [1, *(a + b for a, b in pairwise(row)), 1]
    return row

"""Measures against limits: precision rises until decided, equality goes to the exact predicate, else stays open."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from flint import arb, fmpq
from hypothesis import given
from hypothesis import strategies as st

from specgate.compliance.compare import Limits, compare, sign, worst
from specgate.response.answers import Absent, Answer
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Proof, Verdict


def ball_of(value: fmpq, asked: list[int] | None = None) -> Answer:
    """An enclosed answer whose balls are as wide as the precision says, and never exact."""

    def refine(bits: int) -> arb:
        if asked is not None:
            asked.append(bits)
        with working_precision(bits):
            return arb(value) + arb(0, arb(fmpq(1, 2**bits)))

    return Answer.of_ball(refine)


MORE, LESS = fmpq(6, 5) + fmpq(1, 10**100), fmpq(6, 5) - fmpq(1, 10**100)


@pytest.mark.parametrize(
    ("value", "limits", "verdict"),
    [
        (fmpq(1), Limits(most=fmpq(6, 5)), Verdict.COMPLIANT),
        (MORE, Limits(most=fmpq(6, 5)), Verdict.NON_COMPLIANT),
        (LESS, Limits(most=fmpq(6, 5)), Verdict.COMPLIANT),
        (LESS, Limits(least=fmpq(6, 5)), Verdict.NON_COMPLIANT),
        (MORE, Limits(least=fmpq(1), most=fmpq(6, 5)), Verdict.NON_COMPLIANT),
        (LESS, Limits(least=fmpq(1), most=fmpq(6, 5)), Verdict.COMPLIANT),
    ],
)
def test_a_difference_at_the_hundredth_digit_decides(value: fmpq, limits: Limits, verdict: Verdict) -> None:
    assert compare(ball_of(value), limits).verdict is verdict
    assert compare(Answer.of_exact(value), limits).verdict is verdict


def test_touching_a_limit_complies_where_it_is_proved_and_stays_open_where_it_is_not() -> None:
    limit = fmpq(1, 2)
    assert compare(Answer.of_exact(limit), Limits(most=limit)).verdict is Verdict.COMPLIANT
    assert compare(ball_of(limit), Limits(most=limit), lambda _: 0).verdict is Verdict.COMPLIANT
    assert compare(ball_of(limit), Limits(least=limit), lambda _: 0).verdict is Verdict.COMPLIANT
    undecided = compare(ball_of(limit), Limits(most=limit))
    assert undecided.verdict is Verdict.OPEN
    assert undecided.reason == "the value cannot be told from the limit at 4096 bits"


def test_the_exact_predicate_is_asked_only_where_a_128_bit_ball_holds_the_limit() -> None:
    asked: list[int] = []
    assert sign(ball_of(fmpq(1), asked), fmpq(2), _refuse) == -1
    assert asked == [64]
    asked.clear()
    assert sign(ball_of(fmpq(2), asked), fmpq(2), lambda _: 1) == 1
    assert asked == [64, 128]


def test_an_answer_can_bring_its_own_exact_predicate() -> None:
    limit = fmpq(2)
    own = replace(ball_of(limit), against=lambda _: 0)
    assert compare(own, Limits(most=limit)).verdict is Verdict.COMPLIANT
    assert sign(own, limit, lambda _: 1) == 1


def _refuse(_: fmpq) -> None:
    raise AssertionError("no need to ask")


def test_no_value() -> None:
    most, least = Limits(most=fmpq(1)), Limits(least=fmpq(1))
    assert compare(Answer.nothing("it does not settle"), most).verdict is Verdict.NON_COMPLIANT
    assert compare(Answer.nothing("it does not settle"), most).reason == "it does not settle"
    assert compare(Answer.undecided("work limit"), most).verdict is Verdict.OPEN
    unlimited = Answer.nothing("an integrator", infinite=True)
    assert compare(unlimited, least).verdict is Verdict.COMPLIANT
    assert compare(unlimited, most).verdict is Verdict.NON_COMPLIANT
    assert compare(unlimited, Limits(least=fmpq(1), most=fmpq(2))).verdict is Verdict.NON_COMPLIANT


def test_yes_and_no() -> None:
    assert compare(Answer.of_truth(True), Limits(truth=True)).verdict is Verdict.COMPLIANT
    assert compare(Answer.of_truth(False), Limits(truth=True)).verdict is Verdict.NON_COMPLIANT
    assert compare(Answer.of_truth(False), Limits(truth=False)).verdict is Verdict.COMPLIANT
    with pytest.raises(ValueError, match="yes/no"):
        compare(Answer.of_truth(True), Limits(most=fmpq(1)))


rationals = st.fractions(max_denominator=10**6).map(lambda f: fmpq(f.numerator, f.denominator))


@given(rationals, rationals, rationals, st.booleans())
def test_a_looser_limit_never_turns_compliant_into_non_compliant(
    value: fmpq, limit: fmpq, looser: fmpq, enclosed: bool
) -> None:
    make: Callable[[fmpq], Answer] = ball_of if enclosed else Answer.of_exact
    for tight, loose in (
        (Limits(most=limit), Limits(most=limit + abs(looser))),
        (Limits(least=limit), Limits(least=limit - abs(looser))),
    ):
        if compare(make(value), tight).verdict is Verdict.COMPLIANT:
            assert compare(make(value), loose).verdict is not Verdict.NON_COMPLIANT


def test_an_answer_that_stops_refining_stays_open() -> None:
    stuck = Answer(Proof.ENCLOSED, refine=lambda bits: arb(1, fmpq(1, 10)))
    assert compare(stuck, Limits(most=fmpq(21, 20))).verdict is Verdict.OPEN
    assert compare(stuck, Limits(most=fmpq(2))).verdict is Verdict.COMPLIANT


def test_the_worst_of_several() -> None:
    assert worst([Verdict.COMPLIANT, Verdict.OPEN]) is Verdict.OPEN
    assert worst([Verdict.OPEN, Verdict.NON_COMPLIANT]) is Verdict.NON_COMPLIANT
    assert Absent("x").proved

"""What is fragile stays so in what is made of it, with the other candidate of the whole and not of the part."""

from __future__ import annotations

from dataclasses import replace

import pytest
from flint import arb, fmpq

from specgate.measures.reading import affine, difference, positive_part
from specgate.response.answers import Answer, Fragile


def fragile(value: int, other: int) -> Answer:
    return replace(Answer.of_ball(lambda bits: arb(value)), fragile=Fragile("near", lambda bits: arb(other)))


def candidate(answer: Answer) -> float:
    assert answer.fragile is not None
    assert answer.fragile.other is not None
    return float(answer.fragile.other(64))


@pytest.mark.parametrize(
    ("made", "other"),
    [
        (difference(fragile(9, 5), Answer.of_exact(2)), 3.0),
        (difference(Answer.of_exact(9), fragile(2, 4)), 5.0),
        (affine(fragile(9, 5), fmpq(-2), fmpq(1)), -9.0),
        (positive_part(fragile(9, 5)), 5.0),
    ],
)
def test_the_other_candidate_of_the_whole(made: Answer, other: float) -> None:
    assert candidate(made) == other

"""Formulas in a Review: in which order they stand, and that they survive writing and reading."""

from __future__ import annotations

from pathlib import Path

import pytest

from specgate.exchange import json
from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import FormulaReview, Review
from specgate.review.wanted import Wanted

SPEC_FORMAT = Path(__file__).resolve().parents[1] / "examples" / "spec_format"


@pytest.fixture(scope="module")
def found() -> Review:
    project = load(SPEC_FORMAT)
    assert not isinstance(project, Problems)
    return review(project, Wanted(formulas=True))


@pytest.fixture(scope="module")
def rows(found: Review) -> tuple[FormulaReview, ...]:
    formulas = found.loops["gate_position"].responses["follow"].formulas
    assert formulas is not None
    return formulas.rows


def test_those_that_hold_come_first_each_by_the_size_of_its_error(rows: tuple[FormulaReview, ...]) -> None:
    states = [row.applies for row in rows]
    assert states == sorted(states, key=(True, None, False).index)
    for state in (True, False):
        sizes = [abs(row.error.relative) for row in rows if row.applies is state and row.error and row.error.relative]
        assert sizes == sorted(sizes)
    assert [row.formula is None for row in rows] == sorted(row.formula is None for row in rows)


def test_four_over_sigma_is_what_the_claim_in_this_project_was_read_from(
    found: Review, rows: tuple[FormulaReview, ...]
) -> None:
    # 4/sigma = 0.7079 s beside a pole at -0.4637 1/s, where the response settles in 3.2184 s.
    (row,) = (one for one in rows if one.approximation == "second_order_settling")
    basis = found.requirements["GH-SYS-031"].criteria[0].basis
    assert row.formula == basis.formula
    assert row.error == basis.error
    assert {one.key for one in row.failing} == {one.key for one in basis.conditions if one.holds is False}


def test_an_error_in_decibels_is_a_ratio(rows: tuple[FormulaReview, ...]) -> None:
    (row,) = (one for one in rows if (one.approximation, one.variant) == ("resonance_from_damping", "short"))
    assert row.formula is not None
    assert row.formula.value is not None
    assert row.error is not None
    assert row.error.absolute is not None
    assert row.error.absolute.value == pytest.approx(row.formula.value - float(row.proved.value or 0))


def test_they_are_written_and_read_back(found: Review) -> None:
    assert json.read(json.write(found)) == found


def test_they_stand_there_only_where_they_were_asked_for() -> None:
    project = load(SPEC_FORMAT)
    assert not isinstance(project, Problems)
    plain = review(project)
    assert all(one.formulas is None for loop in plain.loops.values() for one in loop.responses.values())

"""What pictures of an audit are drawn from, in the review of the worked example of the format."""

from __future__ import annotations

from pathlib import Path

from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import BasisReview
from specgate.review.wanted import Wanted

EXAMPLE = Path(__file__).resolve().parents[1] / "examples" / "spec_format"


def basis(*, drawn: bool = True) -> BasisReview:
    project = load(EXAMPLE)
    assert not isinstance(project, Problems)
    return review(project, Wanted(drawn)).requirements["GH-SYS-031"].criteria[0].basis


def test_the_error_over_damping_and_this_loop_on_it() -> None:
    found = basis()
    curve = found.error_curve
    assert curve is not None
    assert found.error is not None
    assert (curve.lower, curve.upper) == (0.1, 0.9)
    assert len(curve.damping) == len(curve.error)
    assert list(curve.damping) == sorted(curve.damping)
    assert abs(curve.here.damping - 0.7067) < 0.0001
    assert curve.here.error == found.error.relative
    assert max(curve.error) > 0.42


def test_the_separation_is_five_decay_rates() -> None:
    found = basis().separation
    assert found is not None
    assert found.real_part is not None
    assert found.distance is not None
    assert abs(found.real_part - 5 * found.real) < 1e-4
    assert abs(found.distance + 5 * found.real) < 1e-4
    assert not found.poles_too
    assert [pole.imaginary for pole in found.poles if pole.real == found.poles[-1].real] == [0.0]
    assert len(found.poles) == 3
    assert len(found.zeros) == 1


def test_what_is_only_drawn_is_left_out_where_nothing_is_drawn() -> None:
    found = basis(drawn=False)
    assert found.error_curve is None
    assert found.separation is None

"""Pictures of the range of a formula: the error over damping ratio, and how far from a pair everything has to be."""

from __future__ import annotations

import dataclasses
import xml.etree.ElementTree as ElementTree

import pytest

from specgate.report.figures import error, poles
from specgate.report.figures.error import ErrorFigure
from specgate.report.figures.poles import Point, PoleFigure, Separation
from specgate.report.parts import validity
from specgate.review.types import BasisReview, ErrorCurveReview, PointReview, Pole, SeparationReview

SVG = "{http://www.w3.org/2000/svg}"
CURVE = ErrorCurveReview((0.1, 0.4, 0.6, 0.98), (0.0, 0.4, -0.05, -0.3), 0.1, 0.6, PointReview(0.707, -0.78))
BASIS = BasisReview(
    "approximation", "out_of_range", ("dominant_pair", "second_order_rise"), variant="linear", error_curve=CURVE
)
MAP = SeparationReview(
    -1.0, 2.0, (Pole(-1.0, 2.0, 1, 1e-12), Pole(-1.0, -2.0, 1, 1e-12), Pole(-3.0, 0.0, 1, 1e-12)), (), -5.0, 5.0, False
)


def of(basis: BasisReview) -> ErrorFigure:
    figure = validity.error_figure(basis, "a")
    assert figure is not None
    return figure


def elements(text: str, name: str) -> list[ElementTree.Element]:
    return list(ElementTree.fromstring(text).iter(f"{SVG}{name}"))


def test_this_loop_is_a_ring_where_it_stands() -> None:
    figure = of(BASIS)
    x, y = error.axes(figure)
    (ring,) = elements(error.draw(figure), "circle")
    assert float(ring.get("cx", "0")) == pytest.approx(x(0.707), abs=0.1)
    assert float(ring.get("cy", "0")) == pytest.approx(y(-78), abs=0.1)
    assert y.holds(-78)
    assert "second order rise (linear)" in figure.title
    assert "−78 %" in figure.title


def test_without_a_proved_value_there_is_a_line_and_no_ring() -> None:
    bare = dataclasses.replace(BASIS, error_curve=dataclasses.replace(CURVE, here=PointReview(0.707, None)))
    assert elements(error.draw(of(bare)), "circle") == []


def test_what_is_out_of_range_is_hatched() -> None:
    figure = of(BASIS)
    x, _ = error.axes(figure)
    (hatched,) = [one for one in elements(error.draw(figure), "rect") if one.get("fill", "").startswith("url(#")]
    assert float(hatched.get("x", "0")) == pytest.approx(x(0.6), abs=0.1)
    nowhere = dataclasses.replace(BASIS, error_curve=dataclasses.replace(CURVE, lower=None, upper=None))
    (everywhere,) = [
        one for one in elements(error.draw(of(nowhere)), "rect") if one.get("fill", "").startswith("url(#")
    ]
    assert float(everywhere.get("width", "0")) == pytest.approx(x.end - x.start, abs=0.1)


def test_an_exact_formula_has_a_scale_of_its_own() -> None:
    flat = dataclasses.replace(CURVE, error=(0.0, 0.0, 0.0, 0.0), here=PointReview(0.5, 0.0))
    _, y = error.axes(of(dataclasses.replace(BASIS, error_curve=flat)))
    assert y.low < -1 < 1 < y.high


def test_the_separation_is_drawn_to_scale() -> None:
    figure = validity.map_figure(dataclasses.replace(BASIS, separation=MAP), "a")
    assert figure is not None
    assert figure.separation == Separation(-5.0, 5.0, "", -1.0, 2.0)  # no zeros: no circle is asked of anything
    text = poles.draw(figure)
    assert "other poles" in text
    assert "outside" not in text
    assert len(elements(text, "line")) == 2  # the real axis and the line of the separation


def test_a_circle_for_zeros_and_for_everything() -> None:
    pair = (Point("pole", -1.0, 2.0), Point("pole", -1.0, -2.0))
    for outside in ("zeros", "other poles and zeros"):
        figure = PoleFigure("m", "Map", pair, Separation(None, 8.0, outside, -1.0, 2.0))
        text = poles.draw(figure)
        assert f"outside: {outside}" in text
        assert "◁ other poles" not in text


def test_what_lies_far_out_is_named_at_the_edge() -> None:
    points = (Point("pole", -1.0, 2.0), Point("pole", -1.0, -2.0), Point("pole", -900.0, 0.0))
    text = poles.draw(PoleFigure("m", "Map", points, Separation(-5.0, None, "", -1.0, 2.0)))
    assert "✕ −900" in text


def test_a_basis_without_a_pair_has_no_pictures() -> None:
    plain = BasisReview("approximation", "sound", ("first_order_settling",))
    assert validity.error_figure(plain, "a") is None
    assert validity.map_figure(plain, "a") is None

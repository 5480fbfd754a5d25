"""The table of what the models take for granted."""

from __future__ import annotations

from dataclasses import replace
from types import ModuleType

import pytest

from specgate.exchange import json
from specgate.report import html
from specgate.report.parts.models import rows
from specgate.report.parts.trace import open_points
from specgate.review.types import Amount, FigureReview, Location, ModelAssumptionReview, Review

NAME, OTHER = "BD-SYS-11", "BD-SYS-12"


def assumption(**changed: object) -> ModelAssumptionReview:
    plain = ModelAssumptionReview(
        kind="valid_to",
        on="duct_pressure.follow",
        subsystem="damper",
        holds=False,
        standing="out_of_range",
        words="the bandwidth of follow is at 9.2 rad/s, and the model of damper holds to 8 rad/s",
        figures=(FigureReview("valid_to", Amount(8.0, "rad/s", "8")),),
        location=Location("specgate.yaml", 12, 5),
    )
    return replace(plain, **changed)


@pytest.fixture
def whole(sample: ModuleType) -> Review:
    found = sample.review()
    assert isinstance(found, Review)
    return found


def resting(whole: Review, **by: tuple[ModelAssumptionReview, ...]) -> Review:
    changed = {
        name: replace(whole.requirements[name], assumptions=found, standing=found[0].standing)
        for name, found in ((key.replace("_", "-"), value) for key, value in by.items())
    }
    return replace(whole, requirements={**whole.requirements, **changed})


def test_each_assumption_stands_once_the_broken_first(whole: Review) -> None:
    holding = assumption(kind="pedigree", holds=True, standing="sound", words="the model of damper is identified")
    found = rows(resting(whole, **{NAME: (holding, assumption()), OTHER: (assumption(),)}))
    assert [(row.what, row.state.word) for row in found] == [
        ("Valid to a frequency", "violated"),
        ("Kind of knowledge", "holds"),
    ]
    assert [name for name, _ in found[0].requirements] == [NAME, OTHER]


def test_the_page_shows_it_only_where_there_is_any(whole: Review) -> None:
    assert 'id="models"' not in html.render(whole)
    page = html.render(resting(whole, **{NAME: (assumption(),)}))
    assert 'id="models"' in page
    assert "holds to 8 rad/s" in page


def test_what_nobody_can_tell_is_an_open_point(whole: Review) -> None:
    untold = assumption(holds=None, standing="inconclusive", words="whether the bandwidth is above 8 rad/s is not told")
    points = [one for one in open_points(resting(whole, **{NAME: (untold,)})) if one.subject == NAME]
    assert any("whether the bandwidth is above" in one.words for one in points)


def test_it_is_written_and_read_back_beside_ranges(whole: Review) -> None:
    found = resting(whole, **{NAME: (assumption(),)})
    assert json.read(json.write(found)) == found

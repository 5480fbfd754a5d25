"""The table of ranges, and what page one says of a signal that leaves its own."""

from __future__ import annotations

from dataclasses import replace
from types import ModuleType

import pytest

from specgate.report import html
from specgate.report.parts.front import front
from specgate.report.parts.ranges import Range, ranges
from specgate.report.parts.trace import open_points
from specgate.report.parts.trust import cautions
from specgate.review.types import Amount, AssumptionReview, Result, Review

NAME = "BD-SYS-11"
GROWS = "the response grows without bound"


def assumption(**changed: object) -> AssumptionReview:
    plain = AssumptionReview(
        kind="linear_range",
        response="duct_pressure.follow",
        signal="opening",
        subsystem="damper",
        side="input",
        port="input",
        rest=Amount(20.0, "%"),
        low=Amount(0.0, "%", "0", "0 %"),
        high=Amount(90.0, "%", "90", "90 %"),
        peak=Result(27.3456789012, 27.3456789011, 27.3456789012, unit="%", proof="enclosed"),
        allowed=Amount(20.0, "%"),
        holds=False,
        largest_size=Amount(36.5688799999, "Pa"),
        largest_factor=0.731377599998,
    )
    return replace(plain, **changed)


@pytest.fixture
def whole(sample: ModuleType) -> Review:
    found = sample.review()
    assert isinstance(found, Review)
    return found


def resting(whole: Review, *assumptions: AssumptionReview) -> Review:
    changed = replace(whole.requirements[NAME], assumptions=assumptions, standing="out_of_range")
    held = replace(whole.gate, outcome="hold", reasons=(*whole.gate.reasons, f"{NAME} rests on a linear model"))
    return replace(whole, requirements={**whole.requirements, NAME: changed}, gate=held)


def only(whole: Review, assumption: AssumptionReview) -> Range:
    (row,) = ranges(resting(whole, assumption))
    return row


def test_a_row_says_what_is_allowed_what_is_proved_and_what_would_hold(whole: Review) -> None:
    row = only(whole, assumption())
    assert (row.signal, row.port, row.what) == ("opening", "the input of damper", "0 % … 90 %, from 20 %")
    assert (row.allowed, row.goes, row.state.word) == ("20 %", "27.35 %", "violated")
    assert row.size == "36.56 Pa"  # rounded down: 36.57 would not hold
    assert row.requirements == ((NAME, "row-BD-SYS-11"),)


@pytest.mark.parametrize(
    ("changed", "goes", "size"),
    [
        ({"peak": Result(None, reason=GROWS), "reason": GROWS}, GROWS, ""),
        ({"peak": None, "holds": True}, "", ""),
    ],
)
def test_a_row_without_a_peak(whole: Review, changed: dict[str, object], goes: str, size: str) -> None:
    row = only(whole, assumption(**changed, largest_size=None, largest_factor=None))
    assert (row.goes, row.size) == (goes, size)


def test_an_input_without_one_size_is_scaled_by_a_factor(whole: Review) -> None:
    assert only(whole, assumption(largest_size=None)).size == "0.7313 times"


def test_a_signal_without_a_name_is_its_port(whole: Review) -> None:
    row = only(whole, assumption(signal=None, side="output", port="torque"))
    assert (row.signal, row.port) == ("the output torque of damper", "")


def test_broken_ranges_come_first_and_each_once(whole: Review) -> None:
    kept = assumption(signal="speed", holds=True)
    rows = ranges(resting(whole, kept, assumption(), kept))
    assert [row.signal for row in rows] == ["opening", "speed"]


def test_page_one_names_the_signal_the_peak_and_the_size(whole: Review) -> None:
    (hold,) = [one for one in front(resting(whole, assumption())).holds if one.requirement == NAME]
    assert "opening goes 27.35 % where its range leaves 20 % (kept up to 36.56 Pa)" in hold.words
    outside = resting(whole, assumption(allowed=Amount(-5.0, "%")), assumption(signal="speed"))
    (hold,) = [one for one in front(outside).holds if one.requirement == NAME]
    assert "opening rests at 20 %, outside its range; speed too" in hold.words


def test_page_one_names_the_size_that_keeps_all_ranges_and_each_signal_once(whole: Review) -> None:
    tighter = assumption(signal="speed", largest_size=Amount(7.25, "Pa"), largest_factor=0.145)
    rate = replace(tighter, kind="rate_range")
    (hold,) = [one for one in front(resting(whole, assumption(), tighter, rate)).holds if one.requirement == NAME]
    assert "(kept up to 7.25 Pa); speed too" in hold.words
    never = replace(tighter, largest_size=None, largest_factor=None)
    (hold,) = [one for one in front(resting(whole, assumption(), never)).holds if one.requirement == NAME]
    assert "kept up to" not in hold.words


def test_a_reason_has_the_width_of_a_sentence(whole: Review) -> None:
    grows = assumption(
        peak=Result(None, reason=GROWS), reason=GROWS, holds=None, largest_size=None, largest_factor=None
    )
    assert only(whole, grows).worded
    assert not only(whole, assumption()).worded
    text = html.render(resting(whole, grows))
    assert f'<td colspan="2">{GROWS}</td>' in text
    assert '<div class="scroll" tabindex="0" role="region" aria-labelledby="ranges">' in text


def test_what_is_not_decided_is_an_open_point_and_a_caution(whole: Review) -> None:
    open_range = resting(whole, assumption(holds=None, peak=None, reason="not searched"))
    item = replace(open_range.requirements[NAME], standing="inconclusive", criteria=())
    open_range = replace(open_range, requirements={**open_range.requirements, NAME: item})
    said = [point.words for point in open_points(open_range) if point.kind == "inconclusive" and point.subject == NAME]
    assert said == ["whether opening stays in range is not decided"]
    assert any("1 range is not kept, or not shown to be kept" in caution for caution in cautions(open_range))


def test_without_ranges_the_cautions_say_so(whole: Review) -> None:
    assert any("No range is stated" in caution for caution in cautions(whole))
    kept = resting(whole, assumption(holds=True))
    assert not any("range is" in caution for caution in cautions(kept))

"""The measures of a loop's responses side by side."""

from __future__ import annotations

from dataclasses import replace
from types import ModuleType

from specgate.report.parts.measures import COLUMNS_AT_MOST, comparisons, table


def test_responses_stand_side_by_side(sample: ModuleType) -> None:
    review = sample.review()
    (found,) = comparisons(review.loops["duct_pressure"].responses, review.definitions)
    assert found.columns == (("follow", "Pa"), ("reject", "Pa"))
    rows = {head: tuple(cell.strip("\u2007\u2008") for cell in cells) for head, cells in found.rows}
    assert rows["Final value"] == ("= 400", "= 0")
    assert rows["Settling time (band 2 % of the change), s"] == ("5.037", "")
    assert rows["Peak time"] == ("none [a]", "")
    assert found.reasons == (("a", "the greatest value is only approached, never reached"),)


def test_a_number_in_another_unit_says_so(sample: ModuleType) -> None:
    review = sample.review()
    responses = dict(review.loops["duct_pressure"].responses)
    last = responses["reject"]
    odd = tuple(replace(m, unit="kPa") if m.measure == "final_value" else m for m in last.measures)
    responses["reject"] = replace(last, measures=odd)
    (found,) = comparisons(responses, review.definitions)
    rows = dict(found.rows)
    assert rows["Final value, kPa"] == ("= 400\u2008\u2007\u2007\u2007 Pa", "= 0\u2008\u2007\u2007\u2007")


def test_many_responses_make_several_tables(sample: ModuleType) -> None:
    review = sample.review()
    one = review.loops["duct_pressure"].responses["follow"]
    many = {f"r{k}": one for k in range(2 * COLUMNS_AT_MOST + 1)}
    assert [len(found.columns) for found in comparisons(many, review.definitions)] == [
        COLUMNS_AT_MOST,
        COLUMNS_AT_MOST,
        1,
    ]


def test_measures_without_a_value_are_told_together_by_their_reason(sample: ModuleType) -> None:
    review = sample.review()
    found = table(review.loops["grain_temperature"].responses["warm_up"].measures, review.definitions)
    assert [row.name for row in found.rows] == ["Poles at origin"]
    assert ("Settling time and Overshoot", "the response has no final value") in found.absent

"""The tables of formulas: what a row says, which fit on paper, and what the terminal prints of them."""

from __future__ import annotations

from dataclasses import replace
from types import ModuleType

import pytest

from specgate.report import html, terminal
from specgate.report.parts import formulas
from specgate.report.parts.formulas import FormulaTable, printed, tables
from specgate.review.types import (
    Amount,
    ConditionReview,
    ErrorReview,
    FormulaReview,
    FormulasReview,
    Result,
    Review,
)

LOOP, RESPONSE = "duct_pressure", "follow"
SEPARATION = ConditionReview(
    "separation", "other poles at least 5 times faster", "common practice", ">= 5", 0.0820612, False, "dominant_pair"
)
DAMPING = ConditionReview("damping", "damping ratio of the pair", "derived", "0.4 to 0.6", 0.707107, False, "x")


def row(**changed: object) -> FormulaReview:
    plain = FormulaReview(
        approximation="second_order_settling",
        measure="settling_time",
        arguments={"band": "2 % of the change"},
        formula_text="4/sigma",
        formula=Amount(0.8, "s", "4/5"),
        proved=Result(5.03725766514, 5.03725766513, 5.03725766514, unit="s", proof="enclosed"),
        error=ErrorReview(-0.841183424, "unsafe", Amount(-4.23725766514, "s")),
        applies=False,
        failing=(SEPARATION,),
    )
    return replace(plain, **changed)


@pytest.fixture
def whole(sample: ModuleType) -> Review:
    found = sample.review()
    assert isinstance(found, Review)
    return found


def put(whole: Review, *rows: FormulaReview, reason: str | None = None, **absent: str) -> Review:
    loop = whole.loops[LOOP]
    response = replace(loop.responses[RESPONSE], formulas=FormulasReview(rows, absent, reason))
    loop = replace(loop, responses={**loop.responses, RESPONSE: response})
    return replace(whole, loops={**whole.loops, LOOP: loop})


def only(review: Review) -> FormulaTable:
    (table,) = tables(review)
    return table


def test_a_row_says_what_the_formula_gives_what_is_true_and_what_fails(whole: Review) -> None:
    table = only(put(whole, row(failing=(SEPARATION, DAMPING)), row(variant="short", failing=(DAMPING,))))
    first, second = table.rows
    assert (first.name, first.measure) == ("second order settling", "settling time (2 %)")
    assert (first.gives, first.proved, first.error, first.side) == ("0.8 s", "5.037 s", "−84 %", "unsafe")
    assert (first.state.word, first.fails, first.notable) == ("out of range", "a b", True)
    assert (second.name, second.fails) == ("second order settling (short)", "b")
    assert table.conditions == (
        ("a", "other poles at least 5 times faster (required ≥ 5, found 0.0821)"),
        ("b", "damping ratio of the pair (required 0.4 to 0.6, found 0.707)"),
    )
    assert table.sentence == (
        "0 of 2 formulas hold. Furthest off on the unsafe side: second order settling, −84 % in settling time."
    )
    assert table.asked


@pytest.mark.parametrize(
    ("error", "said"),
    [
        (ErrorReview(0.0, "none", Amount(0.0, "s")), "none"),
        (ErrorReview(1.2e-8, "safe", Amount(6e-8, "s")), "+0.00 %"),
        (ErrorReview(-1.2e-8, "unsafe", Amount(-6e-8, "s")), "−0.00 %"),
        (ErrorReview(0.0123, "safe", Amount(0.06, "s")), "+1.2 %"),
        (ErrorReview(None, "safe", Amount(4.33791782, "%")), "+4.338 %"),
        (None, "–"),
    ],
)
def test_errors_have_a_sign_and_no_more_digits_than_matter(whole: Review, error: ErrorReview | None, said: str) -> None:
    assert only(put(whole, row(error=error, applies=True, failing=()))).rows[0].error == said


def test_what_has_no_value_is_said_by_its_reason(whole: Review) -> None:
    silent = row(formula=None, error=None, reason="there is no complex pair")
    table = only(
        put(
            whole,
            row(applies=True, failing=()),
            silent,
            replace(silent, approximation="dominant_pair"),
            peak_time="it is approached",
        )
    )
    assert [each.name for each in table.rows] == ["second order settling"]
    assert table.silent == (("second order settling and dominant pair", "there is no complex pair"),)
    assert table.absent == (("peak time", "it is approached"),)
    assert table.sentence == "1 of 1 formula holds."


def test_a_response_of_another_kind_says_so(whole: Review) -> None:
    table = only(put(whole, reason="it is driven by a ramp"))
    assert table.sentence == "No formula of the catalogue is for it: it is driven by a ramp."
    assert printed((table,)) == ()


def test_paper_takes_the_responses_that_requirements_are_on_first(
    whole: Review, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked = only(put(whole, row(), row(), row()))
    other = replace(asked, anchor="formulas-other", asked=False)
    assert printed((other, asked)) == (other, asked)
    monkeypatch.setattr(formulas, "ROWS_AT_MOST", 4)
    assert printed((other, asked)) == (asked,)


def test_nothing_is_shown_where_nothing_was_asked(whole: Review) -> None:
    assert tables(whole) == ()
    assert 'id="formulas"' not in html.render(whole)
    assert "Formulas on" not in terminal.render(whole, width=120, colour=False)


@pytest.mark.parametrize("width", [60, 90, 120, 200])
def test_the_terminal_fits(whole: Review, width: int) -> None:
    text = terminal.render(put(whole, row(), row(applies=True, failing=())), width=width, colour=False)
    section = text[text.index("Formulas on") :].splitlines()
    assert max(map(len, section)) <= max(width, 90)
    assert "duct_pressure.follow" in section[0]
    assert any("second order settling" in line and "−84 %" in line for line in section) or width < 90
    assert any(line.strip().startswith("a other poles") for line in section)


def test_the_page_names_every_row_and_leads_back_to_the_response(whole: Review) -> None:
    page = html.render(put(whole, row()))
    assert 'id="formulas-duct_pressure~2e~follow"' in page
    assert 'href="#response-duct_pressure~2e~follow"' in page
    assert "Which formulas hold" in page

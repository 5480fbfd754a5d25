"""Chains: the worst standing, all conditions, accuracies that multiply; variants; bounds that support no limit."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest
from flint import fmpq

from specgate.approximations.approximation import Accuracy
from specgate.approximations.table import APPROXIMATIONS, chain
from specgate.compliance.assessment import Assessment, Audit
from specgate.compliance.chains import together
from specgate.terms.verdicts import Standing, Trilean

Judge = Callable[[str], Mapping[str, Assessment]]

# s^2 + s + 1 with a pole at -0.05 and a zero at -0.0501002 beside it: 4/sigma of the rest is 8 s, the truth 8.176 s.
NEAR = "{numerator: [19.96, 1], denominator: [20, 21, 21, 1]}"
# The same with a zero at -0.0525: 18.2 s.
APART = "{numerator: [19.047619, 1], denominator: [20, 21, 21, 1]}"
PAIR = "{numerator: [1], denominator: [1, 1, 1]}"
# A pair of zeta = 0.5 with a zero at -20.
DISTANT = "{numerator: [0.05, 1], denominator: [1, 1, 1]}"
# A zero right of the axis at 1 1/s beside a pair of zeta = 0.7: undershoot 24.9 %, bound 0.11 %.
WRONG_WAY = "{numerator: [-1, 1], denominator: [1, 1.4, 1]}"

PROJECT = """
    specgate: 1
    project: {{id: B-1, title: Bases, revision: A}}
    subsystems:
      block: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {model}}}
    loops:
      loop:
        inputs: {{u: {{unit: 1}}}}
        signals: {{y: block(u)}}
        responses: {{r: {{from: u, to: y, input: step, size: 1}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: loop.r, measure: {measure}, {limit}, basis: {{approximation: {basis}}}}}
    """


@pytest.fixture
def audited(judge: Judge) -> Callable[..., Audit]:
    def audit(model: str, limit: str, basis: str, measure: str = "settling_time, band: 2 %") -> Audit:
        text = PROJECT.format(model=model, measure=measure, limit=limit, basis=basis)
        return judge(text)["R"].criteria[0].audit

    return audit


def owners(audit: Audit) -> list[str]:
    return list(dict.fromkeys(one.approximation for one in audit.conditions))


# --- a chain of a reduction and a formula ---


def test_a_formula_of_what_a_link_before_it_leaves(audited: Callable[..., Audit]) -> None:
    alone = audited(NEAR, "at_most: 9 s", "second_order_settling, claimed: 8.0 s")
    assert alone.standing is Standing.OUT_OF_RANGE
    chained = audited(NEAR, "at_most: 9 s", "[near_cancellation, second_order_settling], claimed: 8.0 s")
    assert chained.standing is Standing.SOUND
    assert chained.formula is not None
    assert chained.formula.exact == 8
    assert owners(chained) == ["near_cancellation", "dominant_pair", "second_order_settling"]
    assert chained.error is not None
    assert chained.error.relative is not None
    assert float(chained.error.relative.enclose(64)) == pytest.approx(8 / 8.1760 - 1, abs=1e-4)


def test_a_premise_named_between_changes_nothing(audited: Callable[..., Audit]) -> None:
    short = audited(NEAR, "at_most: 9 s", "[near_cancellation, second_order_settling], claimed: 8.0 s")
    long = audited(NEAR, "at_most: 9 s", "[near_cancellation, dominant_pair, second_order_settling], claimed: 8.0 s")
    assert (long.standing, long.accuracy) == (short.standing, short.accuracy)
    assert [one.condition.key for one in long.conditions] == [one.condition.key for one in short.conditions]


def test_the_worst_standing_of_a_chain(audited: Callable[..., Audit]) -> None:
    chained = audited(APART, "at_most: 9 s", "[near_cancellation, second_order_settling], claimed: 8.0 s")
    assert chained.standing is Standing.OUT_OF_RANGE
    assert [one.condition.key for one in chained.conditions if one.found.holds is Trilean.NO] == ["tail_in_band"]


def test_accuracies_multiply(audited: Callable[..., Audit]) -> None:
    """-7.2 to +42.5 % of the formula on what about 2 % of the tail leave."""
    chained = audited(NEAR, "at_most: 9 s", "[near_cancellation, second_order_settling], claimed: 8.0 s")
    assert chained.accuracy is not None
    assert "together" in chained.accuracy
    assert chained.implied is not None
    low, high = (float(end.enclose(64).mid()) for end in chained.implied)
    assert 8 / (1.425 * 1.03) < low < 8 / 1.425
    assert 8 / 0.928 < high < 8 / (0.928 * 0.97)
    undecided = audited(NEAR, "at_most: 8.5 s", "[near_cancellation, second_order_settling], claimed: 8.0 s")
    assert undecided.standing is Standing.INCONCLUSIVE


def test_zeros_dropped_before_a_formula(audited: Callable[..., Audit]) -> None:
    chained = audited(
        DISTANT, "at_most: 40 %", "[distant_zero, second_order_overshoot], claimed: 16.3 %", measure="overshoot"
    )
    assert chained.standing is Standing.SOUND
    assert owners(chained) == ["dominant_pair", "distant_zero"]  # the last has no conditions beside its premise
    keys = [one.condition.key for one in chained.conditions if one.approximation == "dominant_pair"]
    assert len(keys) == len(set(keys))


def test_a_link_that_leaves_nothing(audited: Callable[..., Audit]) -> None:
    chained = audited(PAIR, "at_most: 9 s", "[near_cancellation, second_order_settling], claimed: 8.0 s")
    assert chained.standing is Standing.OUT_OF_RANGE
    assert owners(chained) == ["near_cancellation"]
    assert chained.formula is not None
    assert chained.formula.absent is not None
    assert chained.implied is None


def test_errors_of_links_together() -> None:
    half, tenth = Accuracy(fmpq(-1, 2), fmpq(1, 2), "a"), Accuracy(fmpq(-1, 10), fmpq(1, 10), "b")
    both = together([half, tenth])
    assert both is not None
    assert (both.lower, both.upper) == (fmpq(-55, 100), fmpq(65, 100))
    assert both.text == "a; then b; together -55 to +65 %"
    assert together([half]) == half
    assert together([half, None]) is None
    assert together([]) is None


# --- variants ---


@pytest.mark.parametrize(
    ("basis", "value", "standing"),
    [
        ("second_order_rise, claimed: 1.64 s", fmpq(163525, 100000), Standing.SOUND),
        ("second_order_rise, variant: cubic, claimed: 1.64 s", fmpq(163525, 100000), Standing.SOUND),
        ("second_order_rise, variant: linear, claimed: 1.68 s", fmpq(168, 100), Standing.SOUND),
        ("second_order_rise, variant: constant, claimed: 1.8 s", fmpq(9, 5), Standing.SOUND),
        ("second_order_rise, variant: quadratic, claimed: 1.52 s", fmpq(1520900, 1000000), Standing.SOUND),
        ("[dominant_pair, second_order_rise], variant: linear_wide, claimed: 2.05 s", fmpq(205, 100), Standing.SOUND),
    ],
)
def test_a_variant_is_named_beside_the_approximation(
    audited: Callable[..., Audit], basis: str, value: fmpq, standing: Standing
) -> None:
    found = audited(PAIR, "at_most: 4 s", basis, measure="rise_time")
    assert found.formula is not None
    assert found.formula.exact == value
    assert found.standing is standing
    assert found.agrees is True
    assert owners(found) == ["dominant_pair", "second_order_rise"]


def test_another_variant_is_what_to_use_instead(audited: Callable[..., Audit]) -> None:
    model = "{numerator: [1], denominator: [1, 0.5, 1]}"  # zeta = 0.25: below the line's 0.3
    found = audited(model, "at_most: 4 s", "second_order_rise, variant: linear, claimed: 1.14 s", measure="rise_time")
    assert found.standing is Standing.OUT_OF_RANGE
    assert found.instead is not None
    assert found.instead.value is not None
    assert (found.instead.name, found.instead.variant) in {("second_order_rise", "cubic"), ("dominant_pair", None)}


# --- bounds ---


def test_a_lower_bound_supports_no_limit_from_above(audited: Callable[..., Audit]) -> None:
    found = audited(WRONG_WAY, "at_most: 30 %", "right_half_plane_undershoot, claimed: 0.11 %", measure="undershoot")
    assert all(one.found.holds is Trilean.YES for one in found.conditions)
    assert found.standing is Standing.OUT_OF_RANGE
    assert found.reason == "it is a lower bound, and no lower bound shows that a limit from above is met"
    assert found.instead is not None
    assert found.instead.name == "computed"


def test_a_lower_bound_supports_a_limit_from_below(audited: Callable[..., Audit]) -> None:
    met = audited(WRONG_WAY, "at_least: 0.1 %", "right_half_plane_undershoot, claimed: 0.11 %", measure="undershoot")
    assert met.standing is Standing.SOUND
    open_ = audited(WRONG_WAY, "at_least: 5 %", "right_half_plane_undershoot, claimed: 0.11 %", measure="undershoot")
    assert open_.standing is Standing.INCONCLUSIVE


def test_a_two_sided_limit_has_an_upper_end(audited: Callable[..., Audit]) -> None:
    found = audited(
        WRONG_WAY, "between: [0 %, 40 %]", "right_half_plane_undershoot, claimed: 0.11 %", measure="undershoot"
    )
    assert found.standing is Standing.OUT_OF_RANGE


# --- rules that rest on rules ---


def test_every_rule_for_a_pair_rests_on_the_pair_dominating() -> None:
    rules = [name for name in APPROXIMATIONS if name.startswith("second_order_")]
    assert len(rules) == 6
    assert all("dominant_pair" in [row.name for row in chain(name)] for name in rules)


SERVO = """
    specgate: 1
    project: {{id: B-2, title: Chains, revision: A}}
    subsystems:
      drive: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {model}}}
    loops:
      loop:
        inputs: {{u: {{unit: 1}}}}
        signals: {{y: drive(u - y)}}
        breaks: {{b: y}}
        responses: {{r: {{from: u, to: y, input: step, size: 1}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: loop.r, measure: overshoot, at_most: {most}}}
        basis: {{approximation: {basis}}}
    """


@pytest.mark.parametrize(
    "basis", ["overshoot_from_phase_margin", "[damping_from_phase_margin, overshoot_from_phase_margin]"]
)
def test_overshoot_by_way_of_the_damping_ratio(judge: Judge, basis: str) -> None:
    """The conditions are those of all links; the accuracy is what both errors make together."""
    text = SERVO.format(model="{numerator: [1], denominator: [1, 0.8, 0]}", most="30 %", basis=basis)
    audit = judge(text)["R"].criteria[0].audit
    assert audit.standing is Standing.SOUND
    assert owners(audit) == ["damping_from_phase_margin", "dominant_pair"]
    assert audit.implied is not None
    low, high = (float(end.enclose(64).mid()) for end in audit.implied)
    assert low < 0.2538 < high  # exp(-0.4 pi/sqrt(0.84))
    assert (low, high) == (pytest.approx(0.2228 / 1.081, abs=1e-3), pytest.approx(0.2228 / 0.877, abs=1e-3))


@pytest.mark.parametrize(
    ("model", "broken"),
    [
        # a pair that is heavily damped: 70 deg of phase margin, and nothing wrong with the pair
        ("{numerator: [1], denominator: [1, 1.6, 0]}", {"damping_from_phase_margin"}),
        # a pole near the crossover: L is of another kind, and the pair does not dominate either
        ("{numerator: [1], denominator: [0.3, 1.24, 0.8, 0]}", {"damping_from_phase_margin", "dominant_pair"}),
    ],
)
def test_one_broken_link_breaks_the_chain(judge: Judge, model: str, broken: set[str]) -> None:
    text = SERVO.format(model=model, most="60 %", basis="overshoot_from_phase_margin")
    audit = judge(text)["R"].criteria[0].audit
    assert audit.standing is Standing.OUT_OF_RANGE
    assert {one.approximation for one in audit.conditions if one.found.holds is Trilean.NO} == broken


def test_what_the_combined_accuracy_leaves_open(judge: Judge) -> None:
    """22.3 % by the rules, 20.6 to 25.4 % with their errors: 24 % lies between."""
    text = SERVO.format(
        model="{numerator: [1], denominator: [1, 0.8, 0]}", most="24 %", basis="overshoot_from_phase_margin"
    )
    assert judge(text)["R"].criteria[0].audit.standing is Standing.INCONCLUSIVE

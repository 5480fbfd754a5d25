"""The five questions that are asked of a basis, on loops whose answers are known in closed form."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest
from flint import arb, fmpq

from specgate.compliance.assessment import Assessment, Audit
from specgate.terms.precision import working_precision
from specgate.terms.verdicts import Standing, Trilean, Verdict

Judge = Callable[[str], Mapping[str, Assessment]]

# A lag of 1 s settles into 2 % at ln 50 = 3.912 s; four time constants are 4 s.
LAG = "{numerator: [1], denominator: [1, 1]}"
# A pair of wn = 1 rad/s, zeta = 0.5: 4/sigma = 8 s, the truth is 8.076 s (numerics of the reference cases).
PAIR = "{numerator: [1], denominator: [1, 1, 1]}"
# The same pair with a pole at -0.25.
SLOW = "{numerator: [0.25], denominator: [1, 1.25, 1.25, 0.25]}"

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
        criterion: {{response: loop.r, measure: {measure}, {limit}, basis: {basis}}}
    {policy}
    """


@pytest.fixture
def audited(judge: Judge) -> Callable[..., Audit]:
    def audit(model: str, limit: str, basis: str, measure: str = "settling_time, band: 2 %", policy: str = "") -> Audit:
        text = PROJECT.format(model=model, measure=measure, limit=limit, basis=basis, policy=policy)
        return judge(text)["R"].criteria[0].audit

    return audit


def basis(name: str, claimed: str) -> str:
    return f"{{approximation: {name}, claimed: {claimed}}}"


def test_in_range_and_decided(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "at_most: 5 s", basis("first_order_settling", "4.0 s"))
    assert found.standing is Standing.SOUND
    assert found.reason is None
    assert found.instead is None
    assert found.agrees is True
    assert found.formula is not None
    assert found.formula.exact == 4
    assert all(one.found.holds is Trilean.YES for one in found.conditions)
    assert found.error is not None
    assert found.error.side == "safe"
    assert found.error.relative is not None
    assert float(found.error.relative.enclose(64)) == pytest.approx(4 / 3.912023005428146 - 1)


def test_one_violated_condition_is_out_of_range_and_names_what_to_use(audited: Callable[..., Audit]) -> None:
    found = audited(SLOW, "at_most: 20 s", basis("second_order_settling", "8.0 s"))
    assert found.standing is Standing.OUT_OF_RANGE
    broken = {one.condition.key for one in found.conditions if one.found.holds is Trilean.NO}
    assert "separation" in broken
    assert found.instead is not None
    assert found.error is not None
    assert found.error.side == "unsafe"
    assert {one.approximation for one in found.conditions} == {"dominant_pair", "second_order_settling"}


@pytest.mark.parametrize(
    ("limit", "standing"),
    [
        ("at_most: 8.2 s", Standing.INCONCLUSIVE),  # claim/(1+e): 8/1.424 = 5.62 s to 8/0.928 = 8.62 s
        ("at_most: 8.7 s", Standing.SOUND),
        ("at_most: 5.5 s", Standing.SOUND),
        ("at_least: 5.5 s", Standing.SOUND),
        ("at_least: 6 s", Standing.INCONCLUSIVE),
        ("between: [6 s, 9 s]", Standing.INCONCLUSIVE),
    ],
)
def test_inconclusive_where_the_limit_lies_in_what_the_accuracy_leaves(
    audited: Callable[..., Audit], limit: str, standing: Standing
) -> None:
    found = audited(PAIR, limit, basis("second_order_settling", "8.0 s"))
    assert found.standing is standing
    assert found.implied is not None
    low, high = (end.exact for end in found.implied)
    assert low is not None
    assert high is not None
    assert low < fmpq(8) < high


@pytest.mark.parametrize(
    ("claimed", "limit", "agrees", "slip"),
    [
        ("4.0 s", "at_most: 5 s", True, None),
        ("4 s", "at_most: 5 s", True, None),
        ("4.05 s", "at_most: 5 s", False, "safe"),  # half a unit of the last digit is 5 ms
        ("4.0 s", "at_least: 1 s", True, None),
        ("4.1 s", "at_least: 1 s", False, "unsafe"),
        ("3.9 s", "at_most: 5 s", False, "unsafe"),
        ("3900 ms", "at_most: 5 s", False, "unsafe"),
        ("4000 ms", "at_most: 5 s", True, None),
        ("3.95 s", "at_most: 5 s", False, "unsafe"),
        ("5 s", "at_most: 9 s", False, "safe"),
    ],
)
def test_a_claim_stands_for_half_a_unit_of_its_last_digit(
    audited: Callable[..., Audit], claimed: str, limit: str, agrees: bool, slip: str | None
) -> None:
    found = audited(LAG, limit, basis("first_order_settling", claimed))
    assert found.agrees is agrees
    assert (None if found.slip is None else found.slip.side) == slip


def test_a_claim_at_exactly_half_a_unit_agrees(audited: Callable[..., Audit]) -> None:
    # 4.5 s and 3.5 s are half a unit of `4 s` away from it: model with a lag of 9/8 s
    found = audited("{numerator: [1], denominator: [1.125, 1]}", "at_most: 5 s", basis("first_order_settling", "4 s"))
    assert found.agrees is True


def test_a_project_may_tighten_a_threshold(audited: Callable[..., Audit]) -> None:
    model = "{numerator: [4], denominator: [1, 5, 5, 4]}"  # the pair with a pole at -4, eight times faster
    policy = "approximations: {dominant_pair: {separation: 10}}"
    loose = audited(model, "at_most: 20 s", basis("second_order_settling", "8.0 s"))
    tight = audited(model, "at_most: 20 s", basis("second_order_settling", "8.0 s"), policy=policy)
    assert (loose.standing, tight.standing) == (Standing.SOUND, Standing.OUT_OF_RANGE)
    separation = next(one for one in tight.conditions if one.condition.key == "separation")
    assert separation.threshold == 10
    assert separation.policy == "tightened by the project to 10"


def test_what_only_a_loosened_threshold_lets_in_is_never_sound(audited: Callable[..., Audit]) -> None:
    model = "{poles: [{real: -1, imaginary: 1}, -4.5], leading_coefficient: 9}"  # 4.5 times faster
    claim = basis("second_order_settling", "4.0 s")
    own = audited(model, "at_most: 20 s", claim)
    loosened = audited(model, "at_most: 20 s", claim, policy="approximations: {dominant_pair: {separation: 4}}")
    assert (own.standing, loosened.standing) == (Standing.OUT_OF_RANGE, Standing.INCONCLUSIVE)
    separation = next(one for one in loosened.conditions if one.condition.key == "separation")
    assert separation.found.holds is Trilean.YES
    assert separation.policy == "loosened by the project to 4"
    assert loosened.implied is None
    unneeded = audited(
        model.replace("-4.5", "-20").replace("9}", "40}"),
        "at_most: 20 s",
        claim,
        policy="approximations: {dominant_pair: {separation: 4}}",
    )
    assert unneeded.standing is Standing.SOUND


@pytest.mark.parametrize(
    ("claimed", "limit", "standing"),
    [
        ("16.3 %", "at_most: 17 %", Standing.SOUND),
        ("16.3 %", "at_most: 16.302 %", Standing.INCONCLUSIVE),  # the formula, and the truth, are 16.3034 %
        ("16.3 %", "at_most: 16.3 %", Standing.INCONCLUSIVE),
        ("16.303 %", "at_most: 16.3034 %", Standing.SOUND),
        ("16.3 %", "at_most: 16 %", Standing.SOUND),  # claim and truth agree that it is not met
        ("20 %", "at_most: 17 %", Standing.INCONCLUSIVE),  # the claim says that it is not met
    ],
)
def test_between_a_claim_and_its_formula_nothing_is_decided(
    audited: Callable[..., Audit], claimed: str, limit: str, standing: Standing
) -> None:
    found = audited(PAIR, limit, basis("second_order_overshoot", claimed), measure="overshoot")
    assert found.standing is standing
    assert found.implied is not None
    low, high = found.implied
    with working_precision(128):
        truth = (-arb.pi() / arb(3).sqrt()).exp()
        assert not low.enclose(128) > truth
        assert not high.enclose(128) < truth


def test_a_chain_names_its_premises_and_nothing_else(audited: Callable[..., Audit]) -> None:
    chained = audited(PAIR, "at_most: 9 s", basis("[dominant_pair, second_order_settling]", "8.0 s"))
    assert chained.standing is Standing.SOUND
    dropped = audited(PAIR, "at_most: 9 s", basis("[distant_zero, second_order_settling]", "8.0 s"))
    assert dropped.standing is Standing.OUT_OF_RANGE  # there is no zero to drop


def test_the_limit_theorem_on_a_response_that_does_not_settle(judge: Judge) -> None:
    text = PROJECT.format(
        model="{numerator: [1], denominator: [1, -2]}",
        measure="final_value",
        limit="within: 1, of: 0",
        basis=basis("final_value_theorem", "-0.5"),
        policy="",
    )
    (criterion,) = judge(text)["R"].criteria
    assert criterion.verdict is Verdict.NON_COMPLIANT
    assert criterion.audit.standing is Standing.OUT_OF_RANGE
    assert criterion.audit.formula is not None
    assert criterion.audit.formula.exact == fmpq(-1, 2)
    assert criterion.audit.agrees is True
    assert criterion.audit.error is None
    assert criterion.audit.instead is not None
    assert criterion.audit.instead.value is None


def test_a_row_of_the_catalogue_that_is_not_audited_yet(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "at_most: 3 s", basis("inner_loop_as_lag", "2.2 s"), measure="rise_time")
    assert found.standing is Standing.INCONCLUSIVE
    assert found.reason == "inner_loop_as_lag is in the catalogue and not audited by this version"


def test_a_row_of_the_catalogue_that_a_rule_audits(audited: Callable[..., Audit]) -> None:
    found = audited(LAG, "at_most: 3 s", basis("linear_range", "2.2 s"), measure="rise_time")
    assert found.standing is Standing.INCONCLUSIVE
    assert found.reason is not None
    assert "the rule range-exceeded audits it" in found.reason


def test_the_alternative_errs_on_the_safe_side(audited: Callable[..., Audit]) -> None:
    model = "{numerator: [6], denominator: [1, 5, 6]}"  # poles at -2 and -3
    found = audited(model, "at_most: 5 s", basis("slowest_pole_settling", "2.0 s"))
    assert found.standing is Standing.OUT_OF_RANGE
    assert found.instead is not None
    assert found.instead.name == "real_poles_settling"
    assert found.instead.value is not None
    # [ln 50 + ln(3/(3-2))]/2 s = 2.505 s, above the truth for distinct real poles
    assert float(found.instead.value.enclose(64)) == pytest.approx(2.5053176470)

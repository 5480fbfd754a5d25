"""The hold of a sampled gain as a dead time: published figures, a search of its accuracy, and what is out of range."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from math import atan, degrees, hypot, pi

import pytest
from scipy.optimize import minimize

from specgate.compliance.assessment import Assessment, Audit
from specgate.response.answers import Answer
from specgate.terms.verdicts import Standing, Trilean

Judge = Callable[[str], Mapping[str, Assessment]]
Audited = Callable[..., Audit]

PROJECT = """
    specgate: 1
    project: {{id: H-1, title: Holds, revision: A}}
    subsystems:
      law:
        input: {{unit: 1}}
        output: {{unit: 1}}
        model: {{sampled: {{period: {period} s, numerator: {above}, denominator: {below}{late}}}}}
      body:
        input: {{unit: 1}}
        output: {{unit: 1}}
        model: {{gain: {gain}, integrators: {integrators}, lags: {lags}}}
    loops:
      loop:
        inputs: {{r: {{unit: 1}}}}
        signals: {{u: law(r - y), y: body(u)}}
        breaks: {{b: y}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{break: loop.b, measure: phase_margin, at_least: 0 deg, basis: {{approximation: hold_as_delay}}}}
    """


@pytest.fixture
def audited(judge: Judge) -> Audited:
    def audit(
        ratio: float,
        lags: Sequence[float] = (),
        integrators: int = 1,
        late: float = 0,
        law: str = "[1]",
        over: str = "[1]",
    ) -> Audit:
        """Return the audit of a loop that crosses one at 1 rad/s and is sampled so many times as fast."""
        gain = 1.0
        for lag in lags:
            gain *= hypot(1, lag)
        period = 2 * pi / ratio
        text = PROJECT.format(
            period=f"{period:.12f}",
            above=law,
            below=over,
            late=f", delay: {late * period:.12f} s" if late else "",
            gain=f"{gain:.12f}" if integrators == 1 else "2",
            integrators=integrators,
            lags=[f"{lag:.9f} s" for lag in lags],
        ).replace("'", "")
        return judge(text)["R"].criteria[0].audit

    return audit


def figures(audit: Audit) -> tuple[float, float]:
    """Return what the rule promises and the truth, deg."""
    assert audit.formula is not None
    assert audit.error is not None

    def shown(value: Answer) -> float:
        return degrees(float(value.enclose(64).mid()))

    return shown(audit.formula), shown(audit.error.truth)


def test_one_integrator(audited: Audited) -> None:
    """Ten times: 72.0 promised, 71.7 true; four times: 45.0 and 38.2, which is out of range."""
    promised, true = figures(audited(10))
    assert (promised, true) == (pytest.approx(72.0, abs=0.001), pytest.approx(71.690, abs=0.001))
    far = audited(4)
    assert figures(far) == (pytest.approx(45.0, abs=0.001), pytest.approx(38.243, abs=0.001))
    assert far.standing is Standing.OUT_OF_RANGE
    assert [one.condition.key for one in far.conditions if one.found.holds is Trilean.NO] == ["sampling"]


def test_the_promise_is_the_continuous_margin_less_half_a_period(audited: Audited) -> None:
    promised, _ = figures(audited(20, [0.5], late=0.25))
    by_hand = 90 - degrees(atan(0.5)) - degrees(0.75 * 2 * pi / 20)
    assert promised == pytest.approx(by_hand, abs=1e-6)


def error(audited: Audited, lags: Sequence[float], late: float = 0) -> float:
    """Return promise minus truth in degrees at ten times; the truth lies in what the accuracy leaves."""
    found = audited(10.000001, lags, late=late)
    if found.standing is Standing.OUT_OF_RANGE:
        return 0.0
    assert found.implied is not None
    promised, true = figures(found)
    low, high = (degrees(float(end.enclose(64).mid())) for end in found.implied)
    assert low <= true <= high
    return promised - true


@pytest.mark.parametrize(("late", "low", "high"), [(False, -0.9, 0.4), (True, -1.6, 1.0)])
def test_the_accuracy_is_reached_and_never_left(audited: Audited, late: bool, low: float, high: float) -> None:
    """The extremes over lags (equal ones err most) and delays of up to a period are searched."""

    def found(count: int) -> float:
        def at(point: Sequence[float]) -> float:
            return error(audited, [10 ** point[0]] * count, min(abs(point[1]), 1.0) if late else 0)

        start = (-0.9, 0.95) if late else (-0.5, 0.0)
        best = minimize(at, start, method="Nelder-Mead", options={"maxfev": 14})
        return float(best.fun)

    safest = min(found(count) for count in (1, 3))
    riskiest = max(error(audited, lags, 1.0 if late else 0) for lags in ([], [0.01], [0.1]))
    slack = (high - low) / 10
    assert low <= safest <= low + slack
    assert high - slack <= riskiest <= high


def test_more_than_a_period_of_computation_has_no_stated_accuracy(audited: Audited) -> None:
    found = audited(20, late=1.01)
    assert found.standing is Standing.INCONCLUSIVE
    assert found.implied is None


@pytest.mark.parametrize(("ratio", "holds"), [(10.000001, True), (9.999999, False)])
def test_ten_times_from_either_side(audited: Audited, ratio: float, holds: bool) -> None:
    sampling = next(one for one in audited(ratio).conditions if one.condition.key == "sampling")
    assert sampling.found.holds is Trilean.of(holds)


def test_a_gain_that_waits_a_period_is_a_delay(audited: Audited) -> None:
    waiting, late = audited(20, law="[1]", over="[1, 0]"), audited(20, late=1.0)
    assert figures(waiting) == pytest.approx(figures(late), abs=1e-9)


@pytest.mark.parametrize(
    ("law", "over", "lags", "integrators"),
    [
        ("[1, -0.5]", "[1, 0]", [], 1),
        ("[1]", "[1]", [0.1, 0.2], 0),
        ("[1]", "[1]", [0.1, 0.2, 0.3, 0.4], 1),
    ],
    ids=["a law with a zero", "no integrator", "four lags"],
)
def test_other_loops_are_out_of_range(
    audited: Audited, law: str, over: str, lags: Sequence[float], integrators: int
) -> None:
    found = audited(40, lags, integrators=integrators, law=law, over=over)
    assert found.standing is Standing.OUT_OF_RANGE
    assert "kind" in [one.condition.key for one in found.conditions if one.found.holds is Trilean.NO]

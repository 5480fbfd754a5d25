"""What verdicts rest on beside the ranges of signals: numbers in closed form, and what they do to a standing."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

import pytest

from specgate.compliance.assessment import Assessment
from specgate.compliance.model.fact import ModelAssumption
from specgate.frequency.rational_gain import RationalGain
from specgate.response.answers import Answer
from specgate.response.budget import OutOfWork
from specgate.terms.verdicts import Standing, Trilean, Verdict

Judge = Callable[[str], Mapping[str, Assessment]]

PROJECT = """
    specgate: 1
    project: {{id: M-1, title: Models, revision: A}}
    subsystems:
      law: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {law}}}
      plant: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {plant}, {said}}}
      display: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{gain: 1, lags: [9 s]}}, valid_to: 0.001 rad/s}}
    loops:
      loop:
        inputs: {{u: {{unit: 1}}}}
        signals: {{y: plant(law(u - y)), shown: display(y)}}
        breaks: {{b: y}}
        responses: {{r: {{from: u, to: y, input: step, size: 1}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{{criterion}}}
    """
INTEGRATOR = "{gain: 1, integrators: 1}"
SETTLING = "response: loop.r, measure: settling_time, band: 2 %, at_most: 100 s"
MARGIN = "break: loop.b, measure: phase_margin, at_least: 1 deg"


@pytest.fixture
def found(judge: Judge) -> Callable[..., tuple[Assessment, dict[str, ModelAssumption]]]:
    def make(
        criterion: str, law: str = "{gain: 2}", plant: str = INTEGRATOR, said: str = "title: Plant"
    ) -> tuple[Assessment, dict[str, ModelAssumption]]:
        text = PROJECT.format(criterion=criterion, law=law, plant=plant, said=said)
        assessment = judge(text)["R"]
        return assessment, {one.kind: one for one in assessment.criteria[0].model}

    return make


def numbers(of: ModelAssumption) -> dict[str, float]:
    return {one.name: float(one.reading.in_unit(one.unit).enclose(64).mid()) for one in of.figures}


@pytest.mark.parametrize(
    ("limit", "standing"),
    [("2.000001 rad/s", Standing.SOUND), ("2 rad/s", Standing.SOUND), ("1.999999 rad/s", Standing.OUT_OF_RANGE)],
)
def test_a_crossover_at_two_against_what_the_plant_is_valid_to(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]], limit: str, standing: Standing
) -> None:
    assessment, model = found(MARGIN, said=f"valid_to: {limit}")
    assert assessment.standing is standing
    assert assessment.verdict is Verdict.COMPLIANT
    assert numbers(model["valid_to"])["a gain crossover at b"] == pytest.approx(2)


def test_a_limit_in_cycles_is_told_with_both_decimals_for_pi(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    # A gain of 2 pi rad/s over s crosses at 1 Hz: exactly there no decimal for pi tells, and nothing is above it.
    for limit, holds in (("0.999999 Hz", Trilean.NO), ("1.000001 Hz", Trilean.YES)):
        _, model = found(MARGIN, law="{gain: 2 * pi}", said=f"valid_to: {limit}")
        assert model["valid_to"].holds is holds


def test_a_block_off_the_path_is_not_asked(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    assessment, model = found(SETTLING)
    assert model == {}
    assert assessment.standing is Standing.SOUND


def test_a_fast_mode_of_small_amplitude_does_not_count(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    # 2/(s (s/400 + 1)) closed: modes near 2 and 398 1/s, the fast one with 0.5 % of the change.
    small = found(SETTLING, law="{gain: 2, lags: [2.5 ms]}", said="valid_to: 10 rad/s")[1]["valid_to"]
    assert small.holds is Trilean.YES
    # 2/(s (s/20 + 1)): modes at 2.2540 and 17.746 1/s, the fast one with 2.254/15.49 = 14.5 %.
    large = found(SETTLING, law="{gain: 2, lags: [50 ms]}", said="valid_to: 10 rad/s")[1]["valid_to"]
    assert large.holds is Trilean.NO
    assert numbers(large)["the fastest mode that counts"] == pytest.approx(10 + math.sqrt(60))


def test_what_is_assumed_is_said_and_leaves_the_standing(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    assessment, model = found(SETTLING, said="pedigree: {kind: assumed}")
    assert model["pedigree"].holds is Trilean.UNKNOWN
    assert assessment.standing is Standing.SOUND


def test_hold_and_computation_lag_by_half_a_period_and_all_of_it(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    # Crossover at 2 rad/s: 10 ms of hold and 8 ms of computation turn it by 2 * 0.018 rad, the block by nothing.
    _, model = found(SETTLING, said="stands_for: {sampled: 20 ms, by: hold_as_delay, delay: 8 ms}")
    stands = model["stands_for"]
    assert stands.holds is Trilean.YES
    read = numbers(stands)
    assert read["phase that it lags less"] == pytest.approx(math.degrees(2 * 0.018))
    assert read["sampling frequency over it"] == pytest.approx(2 * math.pi / 0.02 / 2)


def test_a_stand_in_beyond_its_range_leaves_a_compliant_requirement_out_of_range(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    assessment, _ = found(SETTLING, said="stands_for: {sampled: 1 s, by: hold_as_delay}")
    assert assessment.verdict is Verdict.COMPLIANT
    assert assessment.standing is Standing.OUT_OF_RANGE


def test_a_fraction_stands_for_no_start_of_a_response(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    late = "{numerator: [-10 ms, 1], denominator: [10 ms, 1]}"
    for criterion, standing in (
        (SETTLING, Standing.SOUND),
        ("response: loop.r, measure: undershoot, at_most: 50 %", Standing.INCONCLUSIVE),
    ):
        assessment, model = found(criterion, law=late)
        assert assessment.standing is standing
        assert numbers(model["dead_time"])["equivalent dead time"] == pytest.approx(0.02)


def test_a_hidden_mode_fills_the_band_once_it_is_so_far_off(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    # L = 2/s with a cancelled pole at -0.1: the response shows 2/(s + 2), whose F(-0.1) is 2/1.9.
    _, model = found(SETTLING, law="{gain: 2, lags: [10 s], leads: [10 s]}")
    read = numbers(model["hidden_slow_mode"])
    assert read["decay rate of the hidden mode"] == pytest.approx(0.1)
    assert read["distance of pole and zero that fills the band"] == pytest.approx(100 * 0.02 / (2 / 1.9))


def test_an_integrator_that_is_none_names_what_stays(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    leaking = "{numerator: [1], denominator: [1, 0.001]}"
    _, model = found("response: loop.r, measure: final_value, within: 0.01, of: 1", plant=leaking)
    read = numbers(model["quasi_integrator"])
    assert read["gain of the loop at zero frequency"] == pytest.approx(2000)
    assert read["crossover of the loop through it"] == pytest.approx(math.sqrt(4 - 1e-6))
    assert "quasi_integrator" not in found(SETTLING, plant=leaking)[1]
    assert "quasi_integrator" not in found("response: loop.r, measure: final_value, within: 0.01, of: 1")[1]


@pytest.mark.parametrize(("limit", "holds"), [("1.9 rad/s", Trilean.NO), ("2.1 rad/s", Trilean.YES)])
def test_the_stability_of_a_loop_rests_on_its_models_at_the_crossovers(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]], limit: str, holds: Trilean
) -> None:
    assessment, _ = found("loop: loop, measure: stable, equals: true", said=f"valid_to: {limit}")
    states = {one.subsystem: one.holds for one in assessment.criteria[0].model}
    assert states == {"plant": holds, "display": Trilean.NO}


def test_a_crossover_at_infinite_frequency_is_above_every_limit(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]],
) -> None:
    # L = (s + 2)/(s + 1) comes down to a gain of one and never below.
    plant = "{numerator: [1, 2], denominator: [1, 1]}"
    criterion = "break: loop.b, measure: gain_margin, at_least: 1"
    _, model = found(criterion, law="{gain: 1}", plant=plant, said="valid_to: 1e9 rad/s")
    assert model["valid_to"].holds is Trilean.NO
    assert "without limit" in model["valid_to"].words


def test_a_bandwidth_that_is_not_found_leaves_the_standing_open(
    found: Callable[..., tuple[Assessment, dict[str, ModelAssumption]]], monkeypatch: pytest.MonkeyPatch
) -> None:
    def gives_up(_: RationalGain) -> Answer:
        raise OutOfWork("the search was given up")

    monkeypatch.setattr(RationalGain, "bandwidth", gives_up)
    assessment, model = found(SETTLING, said="valid_to: 100 rad/s")
    assert model["valid_to"].holds is Trilean.UNKNOWN
    assert "the search was given up" in model["valid_to"].words
    assert assessment.standing is Standing.INCONCLUSIVE

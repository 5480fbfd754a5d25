"""Numbers that rest on pi or on a ratio in dB: identities stay exact, everything else carries its doubt."""

from __future__ import annotations

from collections.abc import Callable, Mapping

import pytest
from flint import arb, fmpq

from specgate.compliance.assessment import Assessment
from specgate.compliance.readings import PI_DECIDES, Reading
from specgate.response.answers import Answer
from specgate.terms.enclosed import printed
from specgate.terms.units import PI, PRECISE_PI, UnitTable
from specgate.terms.verdicts import Verdict

Judge = Callable[[str], Mapping[str, Assessment]]
UNITS = UnitTable.standard()


def twice(of_pi: Callable[[fmpq], fmpq]) -> Reading:
    return Reading(Answer.of_exact(of_pi(PI)), Answer.of_exact(of_pi(PRECISE_PI)))


def test_an_angle_given_in_degrees_comes_back_as_the_number_of_degrees() -> None:
    reading = twice(lambda pi: 45 * pi / 180)
    assert reading.in_unit(UNITS.parse("deg")).exact == 45
    assert reading.in_unit(UNITS.parse("rad")).exact is None


def test_a_plain_rational_in_a_unit_with_pi_is_enclosed() -> None:
    shown = Reading.once(Answer.of_exact(10)).in_unit(UNITS.parse("Hz"))
    assert shown.exact is None
    assert printed(shown.enclose).value == 1.59154943092  # 10/(2 pi)


def test_the_enclosure_holds_pi_itself() -> None:
    shown = twice(lambda pi: pi * pi).in_unit(UNITS.parse("rad"))
    assert shown.enclose(300).contains(arb.pi() ** 2) or shown.enclose(300).overlaps(arb.pi() ** 2)
    assert float(shown.enclose(300).rad()) < 1e-55


def test_an_answer_that_turns_on_the_last_digit_of_pi_is_undecided() -> None:
    for first, second in (
        (Answer.of_truth(True), Answer.of_truth(False)),
        (Answer.of_exact(1), Answer.nothing("it does not settle")),
    ):
        settled = Reading(first, second).settled
        assert settled.absent is not None
        assert settled.absent.reason == PI_DECIDES
        assert not settled.absent.proved


PROJECT = """
    specgate: 1
    project: {{id: P-1, title: Pi, revision: A}}
    subsystems:
      turn: {{input: {{unit: V}}, output: {{unit: deg}}, model: {{numerator: [{gain}], denominator: [1 s, 1]}}}}
    loops:
      loop:
        inputs: {{u: {{unit: V}}}}
        signals: {{y: turn(u)}}
        responses: {{r: {{from: u, to: y, input: step, size: 3 V}}}}
    requirements:
      R:
        text: It shall.
        verification: analysis
        criterion: {{response: loop.r, measure: final_value, {limit}}}
    """


@pytest.mark.parametrize(
    ("gain", "limit", "verdict"),
    [
        ("15 deg/V", "between: [45 deg, 50 deg]", Verdict.COMPLIANT),
        ("15 deg/V", "between: [40 deg, 45 deg]", Verdict.COMPLIANT),
        ("15 deg/V", "between: [45.0000000001 deg, 50 deg]", Verdict.NON_COMPLIANT),
        ("pi/12 * 1 rad/V", "between: [45 deg, 50 deg]", Verdict.COMPLIANT),
        ("15 deg/V", "between: [pi/4 * 1 rad, 50 deg]", Verdict.COMPLIANT),
        # pi/4 to 60 digits against pi/4: on which side of it the truth lies is decided twice, and the answers differ
        (
            "15 deg/V",
            "between: [0 rad, 0.785398163397448309615660845819875721049292349843776455243735 rad]",
            Verdict.OPEN,
        ),
    ],
)
def test_touching_a_limit_in_degrees(judge: Judge, gain: str, limit: str, verdict: Verdict) -> None:
    (criterion,) = judge(PROJECT.format(gain=gain, limit=limit))["R"].criteria
    assert criterion.verdict is verdict
    if verdict is Verdict.OPEN:
        assert criterion.reason == PI_DECIDES


def test_a_frequency_limit_in_hertz_against_a_rational_one(judge: Judge) -> None:
    text = """
        specgate: 1
        project: {id: P-2, title: Pi, revision: A}
        subsystems:
          swing: {input: {unit: 1}, output: {unit: 1}, model: {numerator: [1], denominator: [1, 1, 100]}}
        loops:
          loop:
            inputs: {u: {unit: 1}}
            signals: {y: swing(u)}
        requirements:
          R1: {text: It shall., criterion: {loop: loop, measure: natural_frequency, at_least: 1.5915 Hz}}
          R2: {text: It shall., criterion: {loop: loop, measure: natural_frequency, at_least: 1.5916 Hz}}
          R3: {text: It shall., criterion: {loop: loop, measure: natural_frequency, at_least: 10 rad/s}}
        """
    found = judge(text)
    assert [one.verdict for one in found.values()] == [Verdict.COMPLIANT, Verdict.NON_COMPLIANT, Verdict.COMPLIANT]

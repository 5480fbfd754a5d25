"""Closed forms through the whole line, from YAML to verdict: a limit 1e-6 to either side of the truth decides.

The channel is a lag of one second, or what is said; the values are elementary and are computed with 40 digits.
"""

from __future__ import annotations

from pathlib import Path

import mpmath
import pytest

from specgate.intake.load import Problems, load
from specgate.review.build import review

mpmath.mp.dps = 40
E1 = mpmath.e

RESPONSES = {
    "step": "{from: order, to: way, input: step, size: 2 mm}",
    "ramp": "{from: order, to: way, input: ramp, slope: 2 mm/s}",
    "impulse": "{from: order, to: way, input: impulse, area: 2 mm*s, reference: 0}",
    "pulse": "{from: order, to: way, input: pulse, size: 1 mm, duration: 2 s, reference: 0}",
    "hold": "{from: order, to: way, input: ramp_and_hold, size: 2 mm, slope: 1 mm/s}",
    "held": "{from: order, to: way, input: ramp_and_hold, size: 2 mm, slope: 1 mm/s, count_from: end_of_ramp}",
    "bump": "{from: order, to: way, input: one_minus_cosine, size: 1 mm, duration: 2 s, reference: 0}",
    "sine": "{from: order, to: way, input: sine, amplitude: 1 mm, frequency: 1 rad/s}",
    "noise": "{from: order, to: way, input: white_noise, density: 1 mm**2*s}",
    "two": "{inputs: [{from: order, input: step, size: 1 mm}, {from: push, input: step, size: 1 mm, at: 1 s}], "
    "to: way, reference: 0}",
}

CASES = [
    ("step", "deviation_after, time: 1 s", "mm", 2 / E1),
    ("step", "value_at, time: 3 s", "mm", 2 - 2 * mpmath.exp(-3)),
    ("step", "integral_absolute_error", "mm*s", mpmath.mpf(2)),
    ("step", "integral_squared_error", "mm**2*s", mpmath.mpf(2)),
    ("step", "peak_rate", "mm/s", mpmath.mpf(2)),
    ("ramp", "steady_state_error", "mm", mpmath.mpf(2)),
    ("ramp", "value_at, time: 1 s", "mm", 2 / E1),
    ("impulse", "maximum_value", "mm", mpmath.mpf(2)),
    ("impulse", "settling_time, band: 0.1 mm", "s", mpmath.log(20)),
    ("impulse", "integral_squared_error", "mm**2*s", mpmath.mpf(2)),
    ("pulse", "maximum_value", "mm", 1 - mpmath.exp(-2)),
    ("pulse", "settling_time, band: 0.1 mm", "s", mpmath.log(10 * (mpmath.exp(2) - 1))),
    ("pulse", "integral_absolute_error", "mm*s", mpmath.mpf(2)),
    ("pulse", "integral_squared_error", "mm**2*s", 1 + mpmath.exp(-2)),
    ("pulse", "peak_rate", "mm/s", mpmath.mpf(1)),
    ("hold", "settling_time, band: 5 %", "s", 2 + mpmath.log(10 * (1 - mpmath.exp(-2)))),
    ("held", "settling_time, band: 5 %", "s", mpmath.log(10 * (1 - mpmath.exp(-2)))),
    ("hold", "integral_absolute_error", "mm*s", mpmath.mpf(2)),
    ("bump", "integral_absolute_error", "mm*s", mpmath.mpf(1)),
    ("bump", "value_at, time: 2 s", "mm", (1 - mpmath.exp(-2)) / 2 * (1 - 1 / (1 + mpmath.pi**2))),
    ("sine", "steady_state_amplitude", "mm", 1 / mpmath.sqrt(2)),
    ("noise", "standard_deviation", "mm", mpmath.mpf(1) / 2),
    ("two", "value_at, time: 2 s", "mm", 2 - 1 / E1 - mpmath.exp(-2)),
    ("two", "settling_time, band: 0.02 mm", "s", mpmath.log(50 * (1 + E1))),
]


def text() -> str:
    """Return a project with every case twice: a limit that is met by a millionth, and one that is missed by it."""
    criteria = []
    for number, (response, measure, unit, truth) in enumerate(CASES):
        for side, factor in (("M", 1 + mpmath.mpf(10) ** -6), ("X", 1 - mpmath.mpf(10) ** -6)):
            limit = mpmath.nstr(truth * factor, 25, strip_zeros=False)
            signed = f"between: [-9 {unit}, {limit} {unit}]" if "value" in measure else f"at_most: {limit} {unit}"
            criterion = f"{{response: line.{response}, measure: {measure}, {signed}}}"
            criteria.append(
                f"  {side}-{number}: {{text: As computed., verification: analysis, criterion: {criterion}}}"
            )
    responses = "\n".join(f"      {name}: {body}" for name, body in RESPONSES.items())
    return "\n".join(
        [
            "specgate: 1",
            "project: {id: RF-IN, title: Closed forms, revision: A}",
            "subsystems:",
            "  lag: {input: {unit: mm}, output: {unit: mm}, model: {numerator: [1], denominator: [1 s, 1]}}",
            "loops:",
            "  line:",
            "    inputs: {order: {unit: mm}, push: {unit: mm}}",
            "    signals: {way: lag(order + push)}",
            "    responses:",
            responses,
            "requirements:",
            *criteria,
            "",
        ]
    )


@pytest.fixture(scope="module")
def verdicts(tmp_path_factory: pytest.TempPathFactory) -> dict[str, str]:
    path: Path = tmp_path_factory.mktemp("limits") / "specgate.yaml"
    path.write_text(text())
    project = load(path)
    assert not isinstance(project, Problems), [finding.message for finding in project.findings]
    return {name: str(one.verdict) for name, one in review(project).requirements.items()}


@pytest.mark.parametrize("number", range(len(CASES)), ids=lambda k: f"{CASES[k][0]}-{CASES[k][1]}")
def test_a_millionth_to_either_side_decides(number: int, verdicts: dict[str, str]) -> None:
    assert verdicts[f"M-{number}"] == "compliant"
    assert verdicts[f"X-{number}"] == "non_compliant"

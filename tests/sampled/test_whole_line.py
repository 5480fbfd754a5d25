"""Sampled loops from the file to the verdict: limits one part in a million to either side of the proved value."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from specgate.exchange.json import write
from specgate.intake.load import Problems, load
from specgate.review.build import review
from specgate.review.types import Review, Unusable

PROJECT = """\
specgate: 1
project: {{id: SL-1, title: Sampled loop, revision: A}}
subsystems:
  law:
    input: {{unit: mm}}
    output: {{unit: V}}
    model: {{sampled: {{{law}}}}}
  winder: {{input: {{unit: V}}, output: {{unit: mm/s}}, model: {{gain: 3 mm/s/V, lags: [0.1 s]}}}}
  dancer: {{input: {{unit: mm/s}}, output: {{unit: mm}}, model: {{gain: 1, integrators: 1}}}}
loops:
  tension:
    inputs: {{ask: {{unit: mm}}, slack: {{unit: mm/s}}}}
    signals:
      volt: law(ask - place)
      speed: winder(volt) - slack
      place: dancer(speed)
    breaks: {{main: place}}
    responses:
      follow: {{from: ask, to: place, input: step, size: 5 mm}}
      upset: {{from: slack, to: place, input: pulse, size: 5 mm/s, duration: 333 ms}}
      send: {{from: ask, to: volt, input: step, size: 5 mm}}
requirements:
{requirements}
"""

LAWS = {
    "polynomials": "period: 50 ms, numerator: [2 V/mm, -0.8 V/mm], denominator: [1, -0.5], delay: 20 ms",
    "controller": (
        "period: 40 ms, pid: {form: standard, gain: 0.5 V/mm, integral_time: 2 s, derivative_time: 50 ms, "
        "derivative_lag: 20 ms}, rule: backward, delay: 55 ms"
    ),
    "trapezoidal": (
        "period: 80 ms, pid: {form: parallel, proportional: 0.4 V/mm, integral: 0.1 V/mm/s}, rule: trapezoidal"
    ),
}

MEASURES = {
    ("response", "follow", "settling_time"): ", band: 2 %",
    ("response", "follow", "rise_time"): "",
    ("response", "follow", "overshoot"): "",
    ("response", "follow", "peak_time"): "",
    ("response", "upset", "peak_deviation"): "",
    ("response", "send", "maximum_value"): "",
    ("break", "main", "phase_margin"): "",
    ("break", "main", "sensitivity_peak"): "",
    ("break", "main", "crossover_frequency"): "",
}


def reviewed(folder: Path, law: str, requirements: str) -> Review:
    path = folder / "specgate.yaml"
    path.write_text(PROJECT.format(law=LAWS[law], requirements=requirements))
    loaded = load(path)
    assert not isinstance(loaded, Problems), [f.message for f in loaded.findings]
    found = review(loaded)
    assert not isinstance(found, Unusable)
    return found


def requirement(number: int, criterion: str) -> str:
    return f"  R-{number}: {{text: As asked., verification: analysis, criterion: {{{criterion}}}}}\n"


def figure(tree: dict[str, Any], kind: str, on: str, measure: str) -> dict[str, Any]:
    measures = tree["loops"]["tension"][f"{kind}s"][on]["measures"]
    return next(one for one in measures if one["measure"] == measure)


@pytest.mark.parametrize("law", LAWS)
def test_verdicts_turn_where_the_value_is(tmp_path: Path, law: str) -> None:
    first = json.loads(write(reviewed(tmp_path, law, requirement(1, "loop: tension, measure: stable, equals: true"))))
    lines, expected = [], {}
    for number, ((kind, on, measure), arguments) in enumerate(MEASURES.items()):
        found = figure(first, kind, on, measure)
        assert found["value"] is not None, (measure, found)
        value, unit = Fraction(repr(found["value"])), found["unit"]
        for side, factor in ((0, Fraction(10**6 - 1, 10**6)), (1, Fraction(10**6 + 1, 10**6))):
            name = 10 * number + side
            limit = f"{float(value * factor):.15g}" + ("" if unit == "1" else f" {unit}")
            words = f'{kind}: tension.{on}, measure: {measure}{arguments}, at_most: "{limit}"'
            lines.append(requirement(name, words))
            expected[f"R-{name}"] = "compliant" if (side == 1) == (value > 0) else "non_compliant"
    found_all = reviewed(tmp_path, law, "".join(lines))
    assert {name: one.verdict for name, one in found_all.requirements.items()} == expected


def test_what_is_in_the_result(tmp_path: Path) -> None:
    tree = json.loads(
        write(reviewed(tmp_path, "polynomials", requirement(1, "loop: tension, measure: stable, equals: true")))
    )
    loop = tree["loops"]["tension"]
    assert loop["in_z"]["period"] == "1/20"
    assert loop["characteristic_polynomial"] == []
    coefficients = loop["in_z"]["characteristic_polynomial"]
    assert coefficients[0] == {"value": 1.0, "lower": None, "upper": None}
    assert len(coefficients) == len(loop["poles"]) + 1
    assert all(one["real"] ** 2 + one["imaginary"] ** 2 < 1 for one in loop["poles"])
    main = loop["breaks"]["main"]
    assert len(main["in_z"]["denominator"]) == len(main["in_z"]["numerator"]) + 1
    assert loop["responses"]["follow"]["curve"]["time"][0] == 0.0


def test_a_formula_for_loops_in_s_is_out_of_range(tmp_path: Path) -> None:
    with_basis = (
        "  R-1:\n    text: As asked.\n    verification: analysis\n"
        "    criterion: {response: tension.follow, measure: settling_time, band: 2 %, at_most: 9 s}\n"
        "    basis: {approximation: second_order_settling, claimed: 1 s}\n"
    )
    found = reviewed(tmp_path, "polynomials", with_basis).requirements["R-1"]
    assert found.standing == "out_of_range"
    reasons = [str(one.found) + one.name for one in found.criteria[0].basis.conditions if one.holds is False]
    assert any("sampled" in reason for reason in reasons)

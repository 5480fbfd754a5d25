"""From YAML to verdicts: limits 1e-6 to either side of values obtained by other means."""

from __future__ import annotations

from fractions import Fraction
from functools import cache
from pathlib import Path

import mpmath
import pytest

from specgate.exchange import json as exchange
from specgate.intake.load import load
from specgate.review.build import review
from specgate.review.types import Review

from .series import Chain

HEAD = """
specgate: 1
project: {id: DT-1, title: Louvre, revision: A}
subsystems:
  tuner:
    input: {unit: mm}
    output: {unit: V}
    model: {pid: {form: parallel, proportional: 0.9 V/mm, integral: 0.5 V/mm/s}}
  vane: {input: {unit: V}, output: {unit: mm}, model: {gain: 1 mm/V, lags: [2 s], dead_time: 1 s}}
loops:
  louvre:
    inputs: {order: {unit: mm}, gust: {unit: mm}}
    signals: {drive: tuner(order - opening), opening: vane(drive) + gust}
    breaks: {here: opening}
    responses:
      open: {from: order, to: opening, input: step, size: 3 mm}
      puff: {from: gust, to: opening, input: pulse, size: 1 mm, duration: 2 s}
requirements:
"""


@cache
def truths() -> dict[str, tuple[str, mpmath.mpf]]:
    """Return criteria (with a gap for the limit) and true values, in the unit that they are asked in."""
    step = Chain(
        [
            ([Fraction(9, 10), Fraction(1, 2)], [Fraction(1), Fraction(0)], Fraction(0)),
            ([Fraction(1)], [Fraction(2), Fraction(1)], Fraction(1)),
        ],
        step=Fraction(1, 10),
    )

    def y(t: mpmath.mpf) -> mpmath.mpf:
        return step.at(Fraction(str(mpmath.nstr(t, 25))))

    with mpmath.workdps(30):
        peak = mpmath.findroot(lambda t: y(t + mpmath.mpf("1e-9")) - y(t - mpmath.mpf("1e-9")), (5.1, 5.4))
        settling = mpmath.findroot(lambda t: y(t) - mpmath.mpf("1.02"), (7.0, 8.0), solver="anderson")
        assert all(abs(y(mpmath.mpf(k) / 10) - 1) < 0.02 for k in range(78, 160))

        def opened(w: mpmath.mpf) -> mpmath.mpc:
            s = 1j * w
            return (mpmath.mpf("0.9") * s + mpmath.mpf("0.5")) / (s * (2 * s + 1)) * mpmath.exp(-s)

        crossing = mpmath.findroot(lambda w: opened(w).imag, (1.4, 1.6))
        unity = mpmath.findroot(lambda w: abs(opened(w)) - 1, (0.4, 0.6))
        lag = mpmath.arg(-opened(unity))
        pole = mpmath.findroot(
            lambda s: s * (2 * s + 1) + (mpmath.mpf("0.9") * s + mpmath.mpf("0.5")) * mpmath.exp(-s), -0.74 + 0.53j
        )
        return {
            "overshoot": ("{response: louvre.open, measure: overshoot, at_most: GAP %}", 100 * (y(peak) - 1)),
            "settling": ("{response: louvre.open, measure: settling_time, band: 2 %, at_most: GAP s}", settling),
            "value": (
                "{response: louvre.open, measure: value_at, time: 3.3 s, between: [0 mm, GAP mm]}",
                3 * y(mpmath.mpf("3.3")),
            ),
            "gain margin": (
                "{break: louvre.here, measure: gain_margin, at_most: GAP dB}",
                20 * mpmath.log10(-1 / opened(crossing).real),
            ),
            "phase margin": ("{break: louvre.here, measure: phase_margin, at_most: GAP deg}", lag * 180 / mpmath.pi),
            "delay margin": ("{break: louvre.here, measure: delay_margin, at_most: GAP s}", lag / unity),
            "decay": ("{loop: louvre, measure: decay_rate, between: [0 1/s, GAP 1/s]}", -pole.real),
        }


def reviewed(folder: Path, criteria: dict[str, str]) -> Review:
    rows = [
        f"  {name}: {{text: As asked., verification: analysis, criterion: {one}}}" for name, one in criteria.items()
    ]
    path = folder / "specgate.yaml"
    path.write_text(HEAD + "\n".join(rows) + "\n")
    project = load(path)
    return review(project)  # type: ignore[arg-type]


def test_verdicts_near_the_limits(tmp_path: Path) -> None:
    criteria, expected = {}, {}
    for number, (row, true) in enumerate(truths().values()):
        for sign, verdict in ((1, "compliant"), (-1, "non_compliant")):
            name = f"R-{number}-{'over' if sign > 0 else 'under'}"
            limit = true * (1 + sign * mpmath.mpf("1e-6"))
            criteria[name] = row.replace("GAP", mpmath.nstr(limit, 20))
            expected[name] = verdict
    found = reviewed(tmp_path, criteria)
    assert {name: one.verdict for name, one in found.requirements.items()} == expected


def test_the_record_of_a_delayed_loop(tmp_path: Path) -> None:
    """Terms in place of polynomials; written and read back unchanged."""
    found = reviewed(tmp_path, {"R": "{loop: louvre, measure: stable, equals: true}"})
    loop = found.loops["louvre"]
    assert loop.characteristic_polynomial == ()
    assert [(term.delay, term.coefficients) for term in loop.characteristic_terms or ()] == [
        ("0", ("1", "1/2", "0")),
        ("1", ("9/20", "1/4")),
    ]
    assert loop.responses["puff"].curve is not None
    assert exchange.read(exchange.write(found)) == found


def test_a_formula_for_rational_loops_is_out_of_range(tmp_path: Path) -> None:
    basis = "{approximation: second_order_overshoot, claimed: 4 %}"
    row = f"{{response: louvre.open, measure: overshoot, at_most: 9 %, basis: {basis}}}"
    found = reviewed(tmp_path, {"R": row})
    assert found.requirements["R"].standing == "out_of_range"
    assert "dead time" in str(found.requirements["R"].criteria[0].basis)


@pytest.mark.parametrize(("delay", "stable"), [("0.785398", True), ("0.785399", False)])
def test_stability_is_decided(tmp_path: Path, delay: str, stable: bool) -> None:
    """2/s with a dead time: pi/4 s is the limit."""
    text = f"""
specgate: 1
project: {{id: DT-2, title: Tank, revision: A}}
subsystems:
  tank: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{gain: 2 1/s, integrators: 1, dead_time: {delay} s}}}}
loops:
  level:
    inputs: {{wanted: {{unit: 1}}}}
    signals: {{filled: tank(wanted - filled)}}
requirements:
  R:
    text: The loop shall be stable.
    verification: analysis
    criterion: {{loop: level, measure: stable, equals: true}}
"""
    path = tmp_path / "specgate.yaml"
    path.write_text(text)
    found = review(load(path))  # type: ignore[arg-type]
    assert found.requirements["R"].verdict == ("compliant" if stable else "non_compliant")

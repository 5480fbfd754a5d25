"""The range of every entry of the catalogue, from YAML to audit: which conditions fail on which loop, and no others.

Each condition of each entry has a case that it lets in and one that it keeps out, a millionth apart where it is a
figure; and one exactly on the edge where a rational loop can be. See `README.md` for the keys.
"""

from __future__ import annotations

from collections.abc import Mapping
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import yaml

from specgate.analysis.analyse import analyse
from specgate.approximations.approximation import Approximation, Condition
from specgate.approximations.table import APPROXIMATIONS
from specgate.compliance.assess import assess
from specgate.compliance.assessment import Audit
from specgate.intake.load import Problems, load
from specgate.measures.table import MEASURES
from specgate.terms.verdicts import Standing, Trilean
from specgate.traceability.graph import trace

HERE = Path(__file__).parent
Case = Mapping[str, Any]

PROJECT = """
specgate: 1
project: {{id: RC-1, title: Edges of ranges, revision: A}}
subsystems:
  plant: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {plant}}}
  filter: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [1], denominator: [1, 1]}}}}
  law:
    input: {{unit: 1}}
    output: {{unit: 1}}
    model: {{sampled: {{period: {period}, numerator: [1], denominator: [1]}}}}
loops:
  bench:
    inputs: {{u: {{unit: 1}}}}
    signals: {signals}
    breaks: {{b: y}}
    responses: {{r: {{from: u, to: y, input: {driven}}}}}
requirements:
  R:
    text: The bench shall follow.
    verification: analysis
    criterion: {{{subject}, {ask}, {limit}, basis: {{approximation: {basis}}}}}
"""
SIGNALS = {
    "open": "{y: plant(u)}",
    "unity": "{y: plant(u - y)}",
    "filtered": "{y: plant(filter(u) - y)}",
    "sampled": "{f: law(u - y), y: plant(f)}",
}
INPUTS = {"step": "step, size: 1", "ramp": "ramp, slope: 1 1/s", "parabola": "parabola, curvature: 1 1/s^2"}
GENEROUS = {
    "final_value": "within: 1000000, of: 0",
    "steady_state_error": "at_most: 1000000",
    "overshoot": "at_most: 1000 %",
    "undershoot": "at_least: 0 %",
    "bandwidth": "at_least: 0 rad/s",
    "crossover_frequency": "at_most: 1000000 rad/s",
    "resonance_peak": "at_most: 1000 dB",
    "damping_ratio": "at_least: 0",
    "gain_margin": "at_least: 0 dB",
    "gain_margin_up": "at_least: 0 dB",
    "phase_margin": "at_least: 0 deg",
    "delay_margin": "at_least: 0 s",
}
"""Limits that every loop meets, so that only the range is at stake; of times, at most 1000000 s."""


@cache
def cases(name: str) -> tuple[Case, ...]:
    """Return the cases of an entry; every scalar is the text that it is written as."""
    return tuple(yaml.load((HERE / f"{name}.yaml").read_text(), Loader=yaml.BaseLoader))


EVERY = [(name, number) for name in APPROXIMATIONS for number in range(len(cases(name)))]


def flow(value: Any) -> str:
    if isinstance(value, dict):
        return "{" + ", ".join(f"{key}: {flow(one)}" for key, one in value.items()) + "}"
    return "[" + ", ".join(map(flow, value)) + "]" if isinstance(value, list) else str(value)


def audited(name: str, case: Case, folder: Path) -> Audit:
    measure = case["ask"]["measure"]
    kind = MEASURES[measure].subjects[0]
    path = folder / "specgate.yaml"
    path.write_text(
        PROJECT.format(
            plant=flow(case["plant"]),
            signals=SIGNALS[case.get("loop", "open")],
            period=case.get("period", "0.1 s"),
            driven=INPUTS[case.get("input", "step")],
            subject={"response": "response: bench.r", "break": "break: bench.b", "loop": "loop: bench"}[kind],
            ask=", ".join(f"{key}: {value}" for key, value in case["ask"].items()),
            limit=GENEROUS.get(measure, "at_most: 1000000 s"),
            basis=f"{name}, variant: {case['variant']}" if "variant" in case else name,
        )
    )
    project = load(path)
    assert not isinstance(project, Problems), [one.message for one in project.findings]
    return assess(project, analyse(project), trace(project))["R"].criteria[0].audit


@pytest.mark.parametrize(("name", "number"), EVERY, ids=[f"{name}-{number}" for name, number in EVERY])
def test_what_fails_and_nothing_else(name: str, number: int, tmp_path: Path) -> None:
    case = cases(name)[number]
    audit = audited(name, case, tmp_path)
    found: dict[Trilean, set[str]] = {truth: set() for truth in Trilean}
    for one in audit.conditions:
        found[one.found.holds].add(f"{one.approximation}.{one.condition.key}")
    fails, undecided = set(case.get("fails", ())), set(case.get("undecided", ()))
    if "more" in case:
        assert fails
        assert fails <= found[Trilean.NO]
    else:
        assert (found[Trilean.NO], found[Trilean.UNKNOWN]) == (fails, undecided)
    about, side = of_whom(name, case)
    if not (side == "on" and undecided):
        assert about in found[Trilean.of(about not in fails)]
    assert (audit.standing is Standing.OUT_OF_RANGE) is bool(fails)


def of_whom(name: str, case: Case) -> tuple[str, str]:
    """Return the condition that a case is about, with its owner, and the side of the edge."""
    about, side = case["edge"].split()
    return about if "." in about else f"{name}.{about}", side


def own(row: Approximation) -> list[tuple[str | None, Condition]]:
    if not row.variants:
        return [(None, one) for one in row.conditions]
    return [(variant.name, one) for variant in row.variants for one in variant.conditions]


# conditions of a figure that no rational loop puts exactly on the edge: it is a transcendental or an irrational number
NEVER_ON = {
    *("dominant_pair.dropped_amplitude", "dominant_pair.ringing", "dominant_pair.dropped_at_peak"),
    *("slowest_pole_settling.tail_growth", "near_cancellation.tail_in_band", "near_cancellation.tail"),
    *("pade_dead_time.phase_error", "hold_as_delay.sampling"),
}
ALIKE = ("stable", "dead_time")
"""Conditions that the variants of an entry share word for word: one of them has the cases."""


@pytest.mark.parametrize("name", APPROXIMATIONS)
def test_every_condition_has_a_case_on_either_side_and_on_its_edge(name: str) -> None:
    seen: dict[tuple[str | None, str], set[str]] = {}
    for case in cases(name):
        about, side = of_whom(name, case)
        for variant in (case.get("variant"), None):
            seen.setdefault((variant, about), set()).add(side)
    for variant, condition in own(APPROXIMATIONS[name]):
        about = f"{name}.{condition.key}"
        sides = seen[None if condition.key in ALIKE else variant, about]
        if about == "half_rule.purpose":  # no time of a response is what the rule is for
            assert sides == {"outside"}
            continue
        assert "outside" in sides, (variant, about)
        assert "inside" in sides or "on" in sides, (variant, about)
        if condition.threshold is not None and about not in NEVER_ON:
            assert sides == {"inside", "on", "outside"}, (variant, about)


def test_there_are_enough() -> None:
    assert len(EVERY) >= 60
    assert {path.stem for path in HERE.glob("*.yaml")} == set(APPROXIMATIONS)


@pytest.mark.parametrize("name", APPROXIMATIONS)
def test_every_entry_says_where_it_comes_from(name: str) -> None:
    """A source with author or year, "common practice", "derived" or "exact", of formulas and of ranges alike."""
    row = APPROXIMATIONS[name]
    sources = [row.source, *(one.source for one in row.variants)]
    sources += [condition.source for _, condition in own(row)]
    for source in sources:
        known = ("common practice", "derived", "exact")
        assert any(word in source for word in known) or ", " in source, source

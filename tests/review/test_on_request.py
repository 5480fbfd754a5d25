"""What is always reported, and what is searched for only where a requirement asks."""

from __future__ import annotations

from collections.abc import Callable

from specgate.review.types import Review

Reviewed = Callable[[str], Review]

PROJECT = """\
    specgate: 1
    project: {id: OR-1, title: Margins on request, revision: A}
    subsystems:
      law:
        input: {unit: mm}
        output: {unit: V}
        model: {sampled: {period: 50 ms, numerator: [0.5 V/mm], denominator: [1]}}
      slide: {input: {unit: V}, output: {unit: mm}, model: {gain: 4 mm/s/V, integrators: 1, lags: [0.1 s]}}
    loops:
      place:
        inputs: {ask: {unit: mm}}
        signals: {volt: law(ask - at), at: slide(volt)}
        breaks: {main: at}
    requirements:
      OR-001:
        text: The loop shall stand a dead time of at least 10 ms.
        criterion: {break: place.main, measure: delay_margin, at_least: 10 ms}
"""


def test_the_delay_margin_of_a_sampled_loop_is_searched_where_it_is_asked_for(reviewed: Reviewed) -> None:
    found = reviewed(PROJECT)
    reported = {one.measure for one in found.loops["place"].breaks["main"].measures}
    assert "phase_margin" in reported
    assert "delay_margin" not in reported
    result = found.requirements["OR-001"].criteria[0].result
    assert found.requirements["OR-001"].verdict == "compliant"
    assert result.lower is not None
    assert result.lower > 0.1

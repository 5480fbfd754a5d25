"""Reference loops: enclosures of 256 bits contain the truth and exclude what is a billionth beside it.

Truths: `tests/data/margin_cases.json` (exact rational algebra and ball arithmetic, 25 digits). The file also has loops
with dead time and sampled ones.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from flint import arb, fmpq

from specgate.frequency.rational_loop import RationalLoop
from specgate.response.answers import Answer
from specgate.terms.precision import working_precision
from tests.frequency.conftest import loop_of, rational

DATA = Path(__file__).resolve().parents[1] / "data" / "margin_cases.json"
CASES: dict[str, dict[str, Any]] = {
    case["id"]: case for case in json.loads(DATA.read_text()) if "Ts" not in case and "delay" not in case
}


@pytest.fixture(params=CASES)
def case(request: pytest.FixtureRequest) -> dict[str, Any]:
    return CASES[request.param]


def _loop(case: dict[str, Any]) -> RationalLoop:
    return loop_of([rational(c) for c in case["num"]], [rational(c) for c in case["den"]])


def _is(answer: Answer, truth: str, digits: int = 23) -> bool:
    with working_precision(256):
        expected = arb(rational(truth))
        ball = answer.enclose(128)
        return bool(abs(ball - expected) <= abs(expected) * arb(10) ** -digits)


def _frequency(answer: Answer) -> Answer:
    assert answer.at is not None
    found = answer.at["frequency"]
    assert isinstance(found, Answer)
    return found


def test_gain_margins(case: dict[str, Any]) -> None:
    loop = _loop(case)
    for key, answer in (("gm_up", loop.gain_margin_up()), ("gm_dn", loop.gain_margin_down())):
        if not case["stable_cl"]:
            assert answer.absent is not None
            assert answer.absent.proved
            assert not answer.absent.infinite
        elif case[key] is None:
            assert answer.absent is not None
            assert answer.absent.infinite
        else:
            truth = rational(case[key])
            assert _is(answer, str(truth if truth > 1 else 1 / truth)), key
            if _is_nearer(case, key):
                assert loop.gain_margin().enclose(128).overlaps(answer.enclose(128))
                _same_frequency(_frequency(loop.gain_margin()), case["w_gm"])


def _is_nearer(case: dict[str, Any], key: str) -> bool:
    return bool(case["gm"] == case[key])


def _same_frequency(found: Answer, truth: str) -> None:
    if truth == "inf":
        assert found.absent is not None
        assert found.absent.infinite
    elif truth == "0":
        assert found.exact == 0
    else:
        assert _is(found, truth)


def test_phase_margins(case: dict[str, Any]) -> None:
    loop = _loop(case)
    margin = loop.phase_margin()
    if not case["stable_cl"]:
        assert margin.absent is not None
        assert not margin.absent.infinite
        return
    if case["pm_deg"] is None:
        assert margin.absent is not None
        assert margin.absent.infinite
        assert loop.delay_margin().absent is not None
        return
    assert margin.at is not None
    degrees = rational(case["pm_deg"])
    assert margin.at["direction"] == ("lag" if degrees > 0 else "lead")
    with working_precision(256):
        found = margin.enclose(128) * 180 / arb.pi()
        assert abs(found - arb(abs(degrees))) <= abs(arb(degrees)) * arb(10) ** -22
    _same_frequency(_frequency(margin), case["w_pm"])


def test_gain_crossings_are_all_there(case: dict[str, Any]) -> None:
    found = [one.frequency for one in _loop(case).crossings() if one.kind == "gain"]
    assert len(found) == case["n_gc"]
    for frequency, truth in zip(found, case["gcs"], strict=True):
        assert _is(frequency, truth, 15)


def test_sensitivity_peak(case: dict[str, Any]) -> None:
    loop = _loop(case)
    peak = loop.sensitivity_peak()
    if case["ms"] is None:
        assert peak.absent is not None
        return
    assert _is(peak, case["ms"])
    _same_frequency(_frequency(peak), case["w_ms"])
    with working_precision(256):
        assert (loop.least_distance().enclose(128) * peak.enclose(128)).contains(fmpq(1))

"""Figures that the texts of the catalogue quote, recomputed."""

from __future__ import annotations

from typing import Any

import pytest
from flint import fmpq

from specgate.approximations.table import APPROXIMATIONS
from specgate.approximations.text import describe
from specgate.measures.measure import Arguments, Band
from specgate.measures.table import MEASURES

PEAK_TIME = Arguments(measure="peak_time")
RISE_TIME = Arguments(measure="rise_time")
OVERSHOOT = Arguments(measure="overshoot")


def settling(percent: int) -> Arguments:
    return Arguments(band=Band(fmpq(percent, 100), relative=True), measure="settling_time")


def error(name: str, features: Any, arguments: Arguments) -> float:
    """Return formula / true - 1 in per cent."""
    read = MEASURES[arguments.measure].read
    assert read is not None
    truth = read(features.subject, arguments).enclose(96)
    return 100 * float((APPROXIMATIONS[name].evaluate(features, arguments).enclose(96) / truth - 1).mid())


# zeta, pole in decay rates: overshoot in per cent, error of peak time, of rise time, of 4/sigma, in per cent
THIRD_POLE = {
    ("0.3", 3): (20.1, -25, -30, 12),
    ("0.3", 5): (29.4, -18, -18, 13),
    ("0.3", 10): (35.1, -10, -7, 15),
    ("0.5", 3): (12.2, -19, -18, 25),
    ("0.5", 5): (14.8, -11.5, -9, -5),
    ("0.5", 10): (15.9, -6, -3, -3),
    ("0.707", 5): (4.10, -7, -4, -9.5),
    ("0.707", 10): (4.27, -3, -1, -7.4),
}


@pytest.mark.parametrize(("damping", "ratio"), THIRD_POLE)
def test_a_third_pole_at_a_multiple_of_the_decay_rate(build: Any, damping: str, ratio: int) -> None:
    overshoot, peak, rise, time = THIRD_POLE[damping, ratio]
    system = build.pair(damping, [-ratio * fmpq(int(damping[2:]), 10 ** len(damping[2:]))])
    read = MEASURES["overshoot"].read
    assert read is not None
    assert abs(100 * float(read(system.subject, OVERSHOOT).enclose(64).mid()) - overshoot) < 0.06
    assert abs(error("second_order_peak_time", system, PEAK_TIME) - peak) < 0.6
    assert abs(error("dominant_pair", system, RISE_TIME) - rise) < 0.6
    assert abs(error("second_order_settling", system, settling(2)) - time) < 0.6


@pytest.mark.parametrize(("percent", "safe", "first_fails"), [(2, "0.4904", "0.4905"), (5, "0.0947", "0.0948")])
def test_where_the_formula_first_fails(build: Any, percent: int, safe: str, first_fails: str) -> None:
    assert error("second_order_settling", build.pair(safe), settling(percent)) > 0
    assert error("second_order_settling", build.pair(first_fails), settling(percent)) < 0


def test_the_envelope_never_guarantees_one_per_cent(build: Any) -> None:
    assert error("second_order_settling", build.pair("0.001"), settling(1)) < 0


@pytest.mark.parametrize(
    ("percent", "late", "early"), [(2, "0.7797", "0.7798"), (5, "0.6901", "0.6902"), (1, "0.8260", "0.8261")]
)
def test_where_the_settling_time_jumps(build: Any, percent: int, late: str, early: str) -> None:
    before, after = (
        error("second_order_settling", build.pair(damping), settling(percent)) for damping in (late, early)
    )
    assert before < 3
    assert after > 30


def test_peak_time_with_a_pole_at_five_natural_frequencies(build: Any) -> None:
    errors = [error("second_order_peak_time", build.pair(fmpq(k, 20), [-5]), PEAK_TIME) for k in range(1, 19)]
    assert -6.1 < min(errors) < -5.9


@pytest.mark.parametrize("name", ["second_order_rise", "second_order_delay"])
def test_the_text_says_the_accuracy_of_every_variant(build: Any, name: str) -> None:
    row = APPROXIMATIONS[name]
    words = " ".join(row.text.split())
    for one in row.variants:
        for poles in ([], [-5], [-5, -6]) if name == "second_order_rise" else ([],):
            stated = one.accuracy(build.pair("0.5", poles), RISE_TIME)
            assert stated is not None
            low, high = (f"{100 * int(end.p) / int(end.q):+g}" for end in (stated.lower, stated.upper))
            assert f"{low} to {high} %" in words, (one.name, poles)


def test_only_conditions_on_what_is_estimated_are_listed() -> None:
    text = describe("bandwidth_from_pair").text
    assert "settling_time" not in text
    assert "a complex pair and nothing else" in text
    assert "[for settling_time" not in describe("second_order_settling").text

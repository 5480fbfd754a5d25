"""Quantities, expressions, names in scope, tolerances, claims, units that were read."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from flint import fmpq

from specgate.project.percent import relative_to_change
from specgate.project.types import FactoredModel, Project
from specgate.terms.expressions import Name, Number, PercentOf, evaluate

LAG = "value: 0.4 s, tolerance: 10 %"
Read = Callable[..., Project]
Said = Callable[..., list[str]]


def test_a_value_keeps_what_was_written_and_where(project: Read, bench: str) -> None:
    lag = project(bench).subsystems["vent"].parameters["lag"]
    assert lag.name == "vent.lag"
    assert lag.value.as_written == "0.4 s"
    assert lag.value.source == "VB-DAT-1, table 3"
    assert str(lag.value.place) == "specgate.yaml:12:20"
    assert str(lag.place) == "specgate.yaml:12:12"
    assert evaluate(lag.value.expression, {}) == fmpq(2, 5)


@pytest.mark.parametrize(
    ("written", "lower", "upper", "relative"),
    [
        ("10 %", fmpq(-1, 10), fmpq(1, 10), True),
        ("[-10 %, +25 %]", fmpq(-1, 10), fmpq(1, 4), True),
        ("[0 %, 25 %]", fmpq(0), fmpq(1, 4), True),
        ("5 ms", fmpq(-1, 200), fmpq(1, 200), False),
        ("[-5 ms, 0 ms]", fmpq(-1, 200), fmpq(0), False),
    ],
)
def test_tolerances(project: Read, bench: str, written: str, lower: fmpq, upper: fmpq, relative: bool) -> None:
    found = project(bench, (LAG, f"value: 0.4 s, tolerance: {written}")).subsystems["vent"].parameters["lag"]
    tolerance = found.value.tolerance
    assert tolerance is not None
    assert (evaluate(tolerance.lower, {}), evaluate(tolerance.upper, {})) == (lower, upper)
    assert tolerance.relative is relative
    assert tolerance.as_written == written


@pytest.mark.parametrize(
    ("written", "message"),
    [
        ("[-10 %, 5 ms]", "both deviations are relative"),
        ("-10 %", "positive deviation"),
        ("[25 %, -10 %]", "first down, then up"),
        ("[10 %, 25 %]", "first down, then up"),
        ("[-10 %]", "a list of two"),
        ("10 parts", "`parts` is not a listed unit"),
    ],
)
def test_tolerances_that_are_none(said: Said, bench: str, written: str, message: str) -> None:
    assert any(message in line for line in said(bench, (LAG, f"value: 0.4 s, tolerance: {written}")))


def test_a_distribution_is_kept(project: Read, bench: str) -> None:
    edit = (LAG, f"{LAG}, distribution: normal, coverage_factor: 2")
    tolerance = project(bench, edit).subsystems["vent"].parameters["lag"].value.tolerance
    assert tolerance is not None
    assert tolerance.distribution == "normal"
    assert tolerance.coverage_factor == Number(fmpq(2))


def test_own_parameters_come_before_shared_ones(project: Read, bench: str) -> None:
    edits = [("  travel:", "  lag: 3 s\n  travel:"), ("lags: [lag]", "lags: [lag, vent.lag, 0.1 * lag]")]
    model = project(bench, *edits).subsystems["vent"].model
    assert isinstance(model, FactoredModel)
    assert [value.as_written for value in model.lags] == ["lag", "vent.lag", "0.1 * lag"]
    assert model.lags[1].expression == Name("vent.lag")


def test_parameters_of_another_subsystem_need_their_full_name(said: Said, bench: str) -> None:
    (line,) = said(bench, ("proportional: 0.05 V/mm", "proportional: 0.05 V/mm, derivative: 0 * lag * 1 V/mm"))
    assert line == "9:76 name-unknown: there is no parameter `lag`: did you mean `vent.lag`?"


def test_what_reads_a_broken_parameter_is_not_reported_again(said: Said, bench: str) -> None:
    edits = [("value: 0.4 s", "value: 0.4 sec"), ("lags: [lag]", "lags: [lag, 2 * lag]")]
    assert [line.split(":")[0] + line.split(":")[1] for line in said(bench, *edits)] == ["1224 unit-unknown"]


def test_formulas_that_read_a_broken_parameter_are_not_reported_either(said: Said, bench: str) -> None:
    edit = ("subsystems:", "  a: {formula: b}\n  b: {formula: c}\n  c: {formula: 2 * d}\nsubsystems:")
    assert said(bench, edit) == ["7:20 name-unknown: there is no parameter `d`: there is a, b, c, travel, vent.lag"]


@pytest.mark.parametrize("written", ["2 %", "2 % of change", "2 % of the change"])
def test_a_band_may_be_written_as_it_is_printed(project: Read, bench: str, written: str) -> None:
    (criterion,) = project(bench, ("band: 2 %", f"band: {written}")).requirements["VB-1-01"].criteria
    assert relative_to_change(criterion.arguments["band"]) == fmpq(1, 50)


def test_arrivals_may_be_written_as_they_are_printed(project: Read, bench: str) -> None:
    rise = "measure: rise_time, from: 10 % of the change, to: 90 % of the change"
    (criterion,) = project(bench, ("measure: settling_time, band: 2 %", rise)).requirements["VB-1-01"].criteria
    assert [relative_to_change(criterion.arguments[name]) for name in ("from", "to")] == [fmpq(1, 10), fmpq(9, 10)]


def test_per_cent_of_something(project: Read, bench: str) -> None:
    (criterion,) = project(bench, ("band: 2 %", "band: 2 % of travel")).requirements["VB-1-01"].criteria
    assert criterion.arguments["band"].expression == PercentOf(fmpq(2), "travel")


def test_per_cent_of_nothing(said: Said, bench: str) -> None:
    (line,) = said(bench, ("band: 2 %", "band: 2 % of travell"))
    assert "there is no parameter `travell`: did you mean `travel`?" in line


@pytest.mark.parametrize(
    ("written", "digits"),
    [("0.71 s", -2), ("700 ms", 0), ("1.20 s", -2), ("12e-1 s", -1), ("1.5e2 ms", 1), ("{value: 0.7 s}", -1)],
)
def test_the_last_digit_of_a_claim(project: Read, bench: str, written: str, digits: int) -> None:
    edit = ("basis: computed", f"basis: {{approximation: second_order_settling, claimed: {written}}}")
    basis = project(bench, edit).requirements["VB-1-01"].basis
    assert basis is not None
    assert basis.claimed is not None
    assert basis.claimed.digits == digits


def test_the_units_that_were_read(project: Read, bench: str) -> None:
    assert project(bench).units_read == ("%", "V", "V/mm", "mm", "mm/s/V", "s")


def test_own_units(project: Read, bench: str) -> None:
    edits = [("revision: A,", "revision: A, units: {notch: 1/8 turn_of_it, turn_of_it: 40 mm},")]
    found = project(bench, *edits, ("size: 100 mm", "size: 20 notch"))
    assert found.units.parse("notch").si_factor == fmpq(5, 1000)
    assert "notch" in found.units_read


def test_plain_numbers_by_fit_are_listed(project: Read, bench: str) -> None:
    edit = ("{gain: 30 mm/s/V, integrators: 1, lags: [lag]}", "{numerator: [30], denominator: [0.4, 1, 0]}")
    assert project(bench, edit).units_by_fit == ("vent",)
    assert project(bench).units_by_fit == ()

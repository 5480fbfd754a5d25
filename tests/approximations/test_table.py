"""The catalogue: one file a row, the file's docstring the user's text, names of the format."""

from __future__ import annotations

from importlib import import_module
from pathlib import Path

import pytest
from flint import fmpq

from specgate import approximations
from specgate.approximations.table import APPROXIMATIONS, BY_RULE, LATER, chain, conditions
from specgate.approximations.text import describe
from specgate.measures.table import MEASURES
from specgate.rules.table import RULES

CATALOGUE = """
    final_value_theorem first_order_settling first_order_rise second_order_settling settling_envelope
    slowest_pole_settling real_poles_settling second_order_overshoot second_order_peak_time second_order_rise
    second_order_rise_full second_order_delay dominant_pair distant_zero near_cancellation right_half_plane_undershoot
    damping_from_phase_margin overshoot_from_phase_margin bandwidth_from_pair rise_from_bandwidth
    resonance_from_damping margins_from_sensitivity delay_margin_from_phase_margin static_error_constants
    pade_dead_time half_rule hold_as_delay fast_sampling_as_continuous dead_time_limit right_half_plane_zero_limit
    unstable_pole_limit inner_loop_as_lag desired_lag linear_range small_tail
""".split()  # noqa: SIM905

ROWS = list(APPROXIMATIONS)


def test_every_name_of_the_catalogue_is_known_once() -> None:
    assert sorted([*APPROXIMATIONS, *LATER, *BY_RULE]) == sorted(CATALOGUE)


def test_every_file_with_a_row_is_in_the_table() -> None:
    folder = Path(approximations.__path__[0])
    with_row = {path.stem for path in folder.glob("*.py") if "\nROW = " in path.read_text()}
    assert with_row == set(APPROXIMATIONS)


@pytest.mark.parametrize("name", ROWS)
def test_the_docstring_is_the_text(name: str) -> None:
    row = APPROXIMATIONS[name]
    assert row.name == name
    assert row.text == import_module(f"specgate.approximations.{name}").__doc__
    assert row.text.strip() in describe(name).text
    assert row.formula in describe(name).text
    assert all(measure in MEASURES and MEASURES[measure].read is not None for measure in row.estimates)
    assert all(premise in APPROXIMATIONS for premise in row.premises)
    assert all(other in APPROXIMATIONS for other in row.alternatives)


@pytest.mark.parametrize("name", ROWS)
def test_conditions_are_told_apart_by_their_keys(name: str) -> None:
    for measure in APPROXIMATIONS[name].estimates:
        keys = [(row.name, condition.key) for row, condition in conditions(name, measure)]
        assert len(keys) == len(set(keys))
    for condition in APPROXIMATIONS[name].conditions:
        assert set(condition.concerns) <= set(APPROXIMATIONS[name].estimates)
        assert condition.source


@pytest.mark.parametrize("name", sorted(LATER))
def test_later_names_say_so(name: str) -> None:
    assert "does not audit it yet" in describe(name).text


@pytest.mark.parametrize(("name", "rule"), BY_RULE.items())
def test_what_a_rule_audits_is_told_with_the_rule(name: str, rule: str) -> None:
    assert rule in RULES
    assert f"the rule {rule} audits it for every response" in describe(name).text


def test_an_unknown_name() -> None:
    with pytest.raises(KeyError):
        describe("third_order_settling")


def test_premises_come_first() -> None:
    assert [row.name for row in chain("second_order_settling")] == ["dominant_pair", "second_order_settling"]
    first, *_ = conditions("second_order_settling", "settling_time")
    assert (first[0].name, first[1].key) == ("dominant_pair", "stable")


def test_conditions_for_one_measure_only() -> None:
    settling = {condition.key for _, condition in conditions("dominant_pair", "settling_time")}
    overshoot = {condition.key for _, condition in conditions("dominant_pair", "overshoot")}
    assert "separation" in settling - overshoot
    assert "distance" in overshoot - settling
    assert {"stable", "pair"} <= settling & overshoot


def test_thresholds_in_words() -> None:
    separation = next(c for c in APPROXIMATIONS["dominant_pair"].conditions if c.key == "separation")
    assert separation.threshold == 5
    assert separation.named(fmpq(5)) == "other poles at least 5 times faster"
    assert separation.asked(fmpq(5)) == ">= 5"
    assert separation.asked(fmpq(15, 2)) == ">= 7.5"


def test_which_thresholds_are_stricter() -> None:
    by_key = {c.key: c for c in APPROXIMATIONS["dominant_pair"].conditions}
    assert by_key["separation"].stricter(fmpq(10))
    assert by_key["separation"].stricter(fmpq(5))
    assert not by_key["separation"].stricter(fmpq(3))
    assert by_key["crowding"].stricter(fmpq(1, 10))
    assert not by_key["crowding"].stricter(fmpq(1, 2))
    assert not by_key["pair"].stricter(fmpq(1))

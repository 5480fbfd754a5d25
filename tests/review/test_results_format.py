"""The figures that the description of the results format prints, recomputed and compared digit by digit.

The project is the example of the specification format (`tests/examples/spec_format`); the figures stand here as they
are printed there. Shortened ones (0.082) are compared to the digits that they have.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from specgate.exchange.json import write
from specgate.intake.load import load
from specgate.project.types import Project
from specgate.review.build import review

FOLDER = Path(__file__).resolve().parents[1] / "examples" / "spec_format"


@pytest.fixture(scope="module")
def tree() -> dict[str, Any]:
    project = load(FOLDER)
    assert isinstance(project, Project)
    return dict(json.loads(write(review(project))))


def holds(part: Any, whole: Any) -> bool:
    """Whether every key of `part` is in `whole` with the same value."""
    if isinstance(part, dict):
        return isinstance(whole, dict) and all(key in whole and holds(value, whole[key]) for key, value in part.items())
    return bool(part == whole)


def test_head(tree: dict[str, Any]) -> None:
    assert tree["format"] == 1
    assert holds({"id": "GH-ANA-014", "revision": "A", "date": "2026-11-02", "stage": "CDR"}, tree["project"])
    assert tree["policy"] == {
        "hold_on": ["non_compliant", "out_of_range", "open"],
        "evaluate": "nominal",
        "changed_thresholds": [],
    }
    assert {"V", "V/m", "V/m/s", "dB", "deg", "m", "m/s"} <= set(tree["units"])
    (read,) = tree["inputs"]
    assert read["path"] == "specgate.yaml"


def test_specification(tree: dict[str, Any]) -> None:
    parameter = tree["specification"]["parameters"]["hoist_drive.lag"]
    assert holds({"value": 0.085, "exact": "17/200", "unit": "s", "as_written": "85 ms"}, parameter)
    assert parameter["tolerance"] == {"lower": "-10 %", "upper": "+25 %", "as_written": "[-10 %, +25 %]"}
    drive = tree["specification"]["subsystems"]["hoist_drive"]
    assert holds({"owner": "Drives", "reads": ["hoist_drive.gain", "hoist_drive.lag"]}, drive)


def test_loop(tree: dict[str, Any]) -> None:
    loop = tree["loops"]["gate_position"]
    assert loop["wiring"]["command"] == "compensator(demand - position)"
    pole = {"real": -0.463697378947, "imaginary": 0.0, "multiplicity": 1, "radius": 1e-12}
    assert pole in loop["poles"]
    assert loop["hidden_modes"] == []
    assert {"measure": "stable", "value": True, "proof": "exact"} in loop["measures"]
    assert {"measure": "loop_type", "value": 2, "proof": "exact"} in loop["breaks"]["main"]["measures"]


@pytest.mark.parametrize(
    "expected",
    [
        {"measure": "poles_at_origin", "value": 0, "proof": "exact"},
        {"measure": "final_value", "value": 0.05, "exact": "1/20", "unit": "m", "proof": "exact"},
        {
            "measure": "settling_time",
            "arguments": {"band": "2 % of the change"},
            "value": 3.21840084158,
            "lower": 3.21840084157,
            "upper": 3.21840084158,
            "unit": "s",
            "proof": "enclosed",
            "fragile": None,
        },
        {
            "measure": "overshoot",
            "value": 11.6184193709,
            "lower": 11.6184193709,
            "upper": 11.6184193710,
            "unit": "%",
            "proof": "enclosed",
        },
    ],
)
def test_measures(tree: dict[str, Any], expected: dict[str, Any]) -> None:
    assert expected in tree["loops"]["gate_position"]["responses"]["follow"]["measures"]


ALWAYS = [
    *("final_value", "initial_value", "maximum_value", "minimum_value", "peak_deviation"),
    *("overshoot", "undershoot", "settling_time", "rise_time", "delay_time", "peak_time"),
    *("steady_state_error", "poles_at_origin", "zeros_at_origin"),
]


@pytest.mark.parametrize("response", ["follow", "reject"])
def test_every_measure_is_there_or_says_why_not(tree: dict[str, Any], response: str) -> None:
    measures = tree["loops"]["gate_position"]["responses"][response]["measures"]
    assert sorted(one["measure"] for one in measures) == sorted(ALWAYS)
    assert all(one["value"] is not None or one["reason"] for one in measures)


def test_curve(tree: dict[str, Any]) -> None:
    curve = tree["loops"]["gate_position"]["responses"]["follow"]["curve"]
    assert 100 < len(curve["time"]) == len(curve["value"]) <= 400
    assert (curve["time"][0], curve["value"][0]) == (0.0, 0.0)
    assert 0.0558092 in curve["value"]  # the greatest value
    assert all(float(f"{value:.6g}") == value for value in (*curve["time"], *curve["value"]))


def test_requirement(tree: dict[str, Any]) -> None:
    found = tree["requirements"]["GH-SYS-031"]
    assert (found["verdict"], found["standing"], found["decided_by"]) == ("non_compliant", "out_of_range", "criteria")
    assert found["derived_from"] == ["GH-STK-004"]
    assert found["methods"] == [
        {"method": "analysis", "stage": "CDR", "outcome": "non_compliant"},
        {"method": "test", "stage": "acceptance", "outcome": "due_later"},
    ]
    rests = ["hoist_drive.gain", "hoist_drive.lag", "compensator", "gate", "gate_position.follow"]
    assert set(rests) <= set(found["rests_on"])
    assert tree["trace"]["GH-SYS-031"] == ["GH-STK-004"]


def test_criterion(tree: dict[str, Any]) -> None:
    (found,) = tree["requirements"]["GH-SYS-031"]["criteria"]
    assert found["on"] == "gate_position.follow"
    assert found["limit"] == {"at_most": {"value": 1.2, "exact": "6/5", "unit": "s", "as_written": "1.2 s"}}
    assert found["result"] == {
        "value": 3.21840084158,
        "lower": 3.21840084157,
        "upper": 3.21840084158,
        "unit": "s",
        "proof": "enclosed",
    }
    assert found["reserve"] == {"value": -2.01840084158, "unit": "s", "relative": -1.68200070132}


def test_basis(tree: dict[str, Any]) -> None:
    basis = tree["requirements"]["GH-SYS-031"]["criteria"][0]["basis"]
    assert (basis["kind"], basis["standing"]) == ("approximation", "out_of_range")
    assert basis["chain"] == ["dominant_pair", "second_order_settling"]
    assert holds({"value": 0.71, "unit": "s"}, basis["claimed"])
    assert basis["formula"]["value"] == pytest.approx(0.7079, abs=5e-5)
    assert basis["error"]["relative"] == pytest.approx(-0.78, abs=5e-3)
    assert basis["error"]["side"] == "unsafe"
    assert basis["instead"] == {"name": "computed", "value": 3.21840084158, "unit": "s"}
    separation = next(one for one in basis["conditions"] if one["key"] == "separation")
    assert separation["name"] == "other poles at least 5 times faster"
    assert (separation["required"], separation["holds"]) == (">= 5", False)
    assert separation["found"] == pytest.approx(0.082, abs=5e-4)


def test_crossings(tree: dict[str, Any]) -> None:
    (crossing,) = tree["loops"]["gate_position"]["breaks"]["main"]["crossings"]
    assert (crossing["kind"], crossing["direction"]) == ("gain", "lag")
    assert crossing["frequency"] == {"value": pytest.approx(5.36670, abs=5e-5), "unit": "rad/s"}
    assert crossing["margin"] == {"value": pytest.approx(60.9131, abs=5e-4), "unit": "deg"}


def test_margins(tree: dict[str, Any]) -> None:
    found = tree["requirements"]["GH-SYS-033"]
    assert (found["verdict"], [one["verdict"] for one in found["criteria"]]) == ("compliant", ["compliant"] * 2)
    gain, phase = (one["result"] for one in found["criteria"])
    assert holds({"value": None, "infinite": True}, gain)
    assert phase["value"] == pytest.approx(60.9, abs=0.05)
    assert phase["lower"] < phase["value"] <= phase["upper"]
    assert phase["at"]["direction"] == "lag"


def test_findings_gate_and_definitions(tree: dict[str, Any]) -> None:
    errors = [(one["rule"], one["requirement"]) for one in tree["findings"] if one["level"] == "error"]
    assert sorted(errors) == [
        ("approximation-out-of-range", "GH-SYS-031"),
        ("requirement-not-met", "GH-STK-004"),
        ("requirement-not-met", "GH-SYS-031"),
    ]
    assert tree["gate"]["outcome"] == "hold"
    used = {"settling_time", "second_order_settling", "dominant_pair", *(one["rule"] for one in tree["findings"])}
    assert used <= set(tree["definitions"])
    assert all(one["text"] for one in tree["definitions"].values())

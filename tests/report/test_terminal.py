"""What `check` prints."""

from __future__ import annotations

from types import ModuleType

import pytest

from specgate.report.columns import cells, folded
from specgate.report.terminal import render


def test_the_gate_stands_first(sample: ModuleType) -> None:
    assert render(sample.review(), width=120, colour=False).startswith("◆ The gate holds  BD-ANA-021 revision B\n")


def test_every_requirement_has_its_verdict_in_words(sample: ModuleType) -> None:
    text = render(sample.review(), width=120, colour=False)
    words = {
        "compliant": "compliant",
        "non_compliant": "non-compliant",
        "open": "open",
        "not_applicable": "not applicable",
    }
    for name, requirement in sample.review().requirements.items():
        line = next(line for line in text.splitlines() if line[:2].strip() and line[18:].startswith(name))
        assert line[2:].startswith(words[requirement.verdict])


def test_findings_can_be_followed(sample: ModuleType) -> None:
    lines = render(sample.review(), width=200, colour=False).splitlines()
    assert any(line.startswith("specgate.yaml:112:16: error: BD-SYS-11 rests on") for line in lines)
    assert "    subsystems/air.yaml:55:5: linkage is a pure gain of 1" in lines


@pytest.mark.parametrize("width", [80, 100, 110, 130, 200])
def test_the_table_fits_the_width(sample: ModuleType, width: int) -> None:
    lines = render(sample.review(), width=width, colour=False).splitlines()
    start = next(k for k, line in enumerate(lines) if line.startswith("verdict"))
    assert (
        max(
            cells(line)
            for line in lines[start : next(k for k, line in enumerate(lines) if line.startswith("Findings"))]
        )
        <= width
    )


def test_a_standing_that_has_no_column_is_said_below_the_line(sample: ModuleType) -> None:
    lines = render(sample.review(), width=80, colour=False).splitlines()
    assert "standing" not in next(line for line in lines if line.startswith("verdict"))
    assert sum("▲ out of range: " in line for line in lines) == 2
    assert any(line.strip() == "◧ inconclusive: slowest pole settling" for line in lines)


def test_decimal_signs_stand_in_one_column(sample: ModuleType) -> None:
    lines = render(sample.review(), width=130, colour=False).splitlines()
    points = {line.index("5.037") + 1 for line in lines if "  5.037" in line}
    points |= {line.index("2.067583") + 1 for line in lines if "2.067583" in line}
    assert len(points) == 1


def test_colour_adds_nothing_but_colour(sample: ModuleType) -> None:
    import re

    plain = render(sample.review(), width=100, colour=False)
    coloured = render(sample.review(), width=100, colour=True)
    assert "\x1b" not in plain
    assert "\x1b[31m" in coloured
    stripped = re.sub(r"\x1b\[\d+m", "", coloured)
    assert [line.rstrip() for line in stripped.splitlines()] == plain.splitlines()


def test_an_unusable_project_lists_its_findings(sample: ModuleType) -> None:
    lines = render(sample.unusable(), width=200, colour=False).splitlines()
    assert lines[0] == "◆ Input unusable  2 errors"
    assert lines[2].startswith("specgate.yaml:44:31: error: The unit `mm/ss` is unknown")
    assert lines[-1] == "    specgate.yaml:110:3: first defined here"


def test_control_characters_do_not_reach_the_terminal(sample: ModuleType) -> None:
    from dataclasses import replace

    review = sample.review()
    bad = replace(review, project=replace(review.project, title="wipe \x1b[2J and turn \u202e round"))
    text = render(bad, width=200, colour=False)
    assert "\x1b" not in text
    assert "wipe [U+001B][2J and turn [U+202E] round" in text


@pytest.mark.parametrize("width", [80, 90, 130])
def test_names_are_folded_and_never_cut(sample: ModuleType, width: int) -> None:
    lines = render(sample.review(), width=width, colour=False).splitlines()
    start = next(k for k, line in enumerate(lines) if line.startswith("verdict"))
    end = next(k for k, line in enumerate(lines) if line.startswith("Findings"))
    table = lines[start:end]
    assert not any(line.rstrip().endswith("…") or "…  " in line for line in table)


def test_a_long_name_is_broken_after_its_signs() -> None:
    assert folded("envelope_pressure.descend_flow", 18) == ["envelope_pressure.", "descend_flow"]
    assert folded("settling time of the pair", 10) == ["settling", "time of", "the pair"]
    assert folded("unbreakable", 4) == ["unbr", "eaka", "ble"]
    assert folded("", 4) == [""]
    assert folded("漢字漢", 4) == ["漢字", "漢"]

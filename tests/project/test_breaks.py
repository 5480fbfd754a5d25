"""Breaks of one use, and with other loops open: what they cut, and L by hand.

The cascade: command = 20 (2 (order - place) - speed), speed = command / (s + 1), place = speed / s.
"""

from __future__ import annotations

from pathlib import Path

import pytest

from specgate.analysis.analyse import analyse
from specgate.analysis.analyses import BreakAnalysis
from specgate.frequency.rational_loop import RationalLoop
from specgate.intake.load import Problems, load
from specgate.measures.subjects import BreakSubject
from specgate.systems.polynomials import highest_first
from specgate.systems.transfer import TransferFunction

CASCADE = """
specgate: 1
project: {{id: BR-1, title: Breaks, revision: A}}
subsystems:
  outer: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{gain: 2}}}}
  inner: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{gain: {gain}}}}}
  drive: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [1], denominator: [1, 1]}}}}
  drum: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [1], denominator: [1, 0]}}}}
loops:
  cascade:
    inputs: {{order: {{unit: 1}}}}
    signals:
      error: order - place
      command: inner(outer(error) - speed)
      speed: drive(command)
      place: drum(speed)
      shown: 3*place
    breaks:
      here: {opened}
"""


def opened_at(folder: Path, opened: str, gain: str = "20") -> BreakAnalysis | list[str]:
    """Return the break, or the messages where it is refused."""
    path = folder / "specgate.yaml"
    path.write_text(CASCADE.format(opened=opened, gain=gain))
    project = load(path)
    if isinstance(project, Problems):
        return [finding.message for finding in project.findings]
    return analyse(project).loops["cascade"].breaks["here"]


def subject(folder: Path, opened: str, gain: str = "20") -> BreakSubject:
    found = opened_at(folder, opened, gain)
    assert isinstance(found, BreakAnalysis)
    assert isinstance(found.subject, BreakSubject)
    return found.subject


@pytest.mark.parametrize(
    ("opened", "numerator", "denominator"),
    [
        ("place", [40], [1, 21, 0]),
        ("speed", [20, 40], [1, 1, 0]),
        ("{at: speed, into: command}", [20, 0], [1, 1, 40]),
        ("{at: speed, into: inner}", [20, 0], [1, 1, 40]),
        ("{at: speed, into: drum}", [40], [1, 21, 0]),
        ("{at: speed, into: place}", [40], [1, 21, 0]),
        ("{at: speed, with_open: [place]}", [20], [1, 1]),
        ("{at: speed, into: command, with_open: [place]}", [20], [1, 1]),
        ("{at: speed, into: command, with_open: [error]}", [20], [1, 1]),
        ("{at: place, into: error}", [40], [1, 21, 0]),
        ("{at: place, into: shown}", [0], [1]),
        ("{at: place, with_open: [speed]}", [0], [1]),
    ],
)
def test_the_loop_gain_by_hand(tmp_path: Path, opened: str, numerator: list[int], denominator: list[int]) -> None:
    wanted = TransferFunction(highest_first(numerator), highest_first(denominator)).reduced()
    assert subject(tmp_path, opened).open_loop.reduced() == wanted


@pytest.mark.parametrize(
    ("opened", "message"),
    [
        ("{at: place, into: drive}", "`drive` does not use `place`, so that there is nothing to cut: it is used by"),
        ("{at: place, into: command}", "it is used by `error`, `shown`"),
        ("{at: shown, into: command}", "nothing uses it"),
        ("{at: place, with_open: [place]}", "leave it out of `with_open`"),
        ("{at: place, into: drmu}", "drum"),
    ],
)
def test_a_user_that_does_not_use_the_signal_is_refused(tmp_path: Path, opened: str, message: str) -> None:
    found = opened_at(tmp_path, opened)
    assert isinstance(found, list)
    assert any(message in text for text in found), found


def test_stable_means_with_the_others_held_open(tmp_path: Path) -> None:
    """With an inner gain of -1.2 what is left with place held open is s - 0.2; with -0.5 it is s + 0.5.

    The whole, s^2 + (1 + gain) s + 2 gain, is stable with neither.
    """
    growing = subject(tmp_path, "{at: speed, into: command, with_open: [place]}", "-1.2")
    assert growing.stable.truth is False
    assert isinstance(growing.loop, RationalLoop)
    margin = growing.loop.gain_margin().absent
    assert margin is not None
    assert margin.reason.startswith("with place held open, the closed loop is not stable")
    assert subject(tmp_path, "{at: speed, into: command, with_open: [place]}", "-0.5").stable.truth is True
    assert subject(tmp_path, "{at: speed, into: command}", "-0.5").stable.truth is False


def test_the_order_of_blocks_and_lines_does_not_matter(tmp_path: Path) -> None:
    """A chain of blocks in either order, its lines upside down: the same L."""
    chain = "place: drum(drive(error))", "place: drive(drum(error))"
    found = []
    for place in chain:
        for lines in (["error: order - place", place], [place, "error: order - place"]):
            head, _, _ = CASCADE.format(opened="place", gain="20").partition("    signals:\n")
            body = "    signals:\n" + "".join(f"      {line}\n" for line in lines) + "    breaks: {here: place}\n"
            path = tmp_path / "specgate.yaml"
            path.write_text(head + body)
            project = load(path)
            assert not isinstance(project, Problems), [finding.message for finding in project.findings]
            opened = analyse(project).loops["cascade"].breaks["here"].subject
            assert isinstance(opened, BreakSubject)
            found.append(opened.open_loop.reduced())
    assert all(one == found[0] for one in found)
    assert found[0].denominator == highest_first([1, 1, 0])

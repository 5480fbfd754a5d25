"""The README shows what the tool says today."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from specgate.cli.main import main
from specgate.terms.cautions import CAUTIONS

ROOT = Path(__file__).resolve().parents[2]
README = (ROOT / "README.md").read_text()


def block(marker: str) -> str:
    found = re.search(rf"<!-- {marker} -->\n```[a-z]*\n(.*?)```\n", README, re.DOTALL)
    assert found, f"README.md marks no block `{marker}`"
    return found[1]


def test_the_verdict_shown_is_the_one_given(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsysbinary: pytest.CaptureFixture[bytes]
) -> None:
    (tmp_path / "specgate.yaml").write_text(block("example: spec"))
    monkeypatch.chdir(tmp_path)
    assert main(["check", "."]) == 1
    assert capsysbinary.readouterr().out.decode() == block("example: verdict")


def test_the_difference_shown_is_the_one_given(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsysbinary: pytest.CaptureFixture[bytes]
) -> None:
    old = block("example: spec")
    new = old.replace("revision: A", "revision: B").replace("integral: {value: 0.1 V", "integral: {value: 0.0001 V")
    new = new.replace("basis: {approximation: second_order_settling, claimed: 0.65 s}", "basis: computed")
    for name, text in (("rev_a", old), ("rev_b", new)):
        (tmp_path / name).mkdir()
        (tmp_path / name / "specgate.yaml").write_text(text)
    monkeypatch.chdir(tmp_path)
    assert main(["diff", "rev_a", "rev_b"]) == 0
    assert capsysbinary.readouterr().out.decode() == block("example: difference")


@pytest.mark.parametrize("marker", ["run: main job", "run: tests"])
def test_a_command_is_one_line(marker: str) -> None:
    assert len(block(marker).splitlines()) == 1


def test_every_caution_stands_in_it() -> None:
    assert all(caution in README for caution in CAUTIONS)


def test_every_picture_and_link_exists() -> None:
    for target in re.findall(r"\]\(([^)#:]+)\)", README):
        assert (ROOT / target).exists(), target

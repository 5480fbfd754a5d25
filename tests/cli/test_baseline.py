"""`freeze`, `check --baseline` and `--only-new` as a user runs them."""

from __future__ import annotations

import json
import shutil
from collections.abc import Callable
from pathlib import Path

import jsonschema
import pytest

from specgate.cli import schema
from specgate.cli.main import main
from specgate.exchange import baseline

ROOT = Path(__file__).resolve().parents[2]
HOIST = ROOT / "tests" / "examples" / "spec_format"
Said = tuple[int, str, str]
Run = Callable[..., Said]


@pytest.fixture
def run(capfdbinary: pytest.CaptureFixture[bytes]) -> Run:
    """Return a function from arguments to the exit status and what was printed on both streams."""

    def call(*arguments: str | Path) -> Said:
        status = main(list(map(str, arguments)))
        out, err = capfdbinary.readouterr()
        return status, out.decode(), err.decode()

    return call


@pytest.fixture
def frozen(run: Run, tmp_path: Path) -> Path:
    """Return the baseline of the project."""
    target = tmp_path / "baseline.json"
    assert run("freeze", HOIST, "-o", target) == (
        0,
        f"{target}: a baseline of GH-ANA-014 revision A with 3 links\n",
        "",
    )
    return target


def revised(folder: Path, *changes: tuple[str, str]) -> Path:
    shutil.copytree(HOIST, folder)
    text = (folder / "specgate.yaml").read_text()
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    (folder / "specgate.yaml").write_text(text)
    return folder


def test_a_baseline_reads_back_is_valid_and_is_the_same_again(run: Run, frozen: Path) -> None:
    text = frozen.read_text()
    assert baseline.write(baseline.read(text)) == text
    jsonschema.validate(json.loads(text), json.loads(schema.text("baseline")))
    assert run("freeze", HOIST, "-o", "-")[1] == text
    status, out, _ = run("diff", frozen, HOIST)
    assert (status, len(out.splitlines())) == (0, 2)


def test_a_link_is_stale_until_it_is_affirmed(run: Run, frozen: Path, tmp_path: Path) -> None:
    parent = ("The lock cycle shall", "The whole lock cycle shall")
    changed = revised(tmp_path / "changed", parent)
    status, out, _ = run("check", changed, "--baseline", frozen)
    assert status == 1
    assert "GH-SYS-031 is derived from GH-STK-004, which was changed since the baseline" in " ".join(out.split())
    assert out.count("[link-stale]") == 3
    assert "[link-stale]" not in run("check", changed)[1]
    found = json.loads(run("check", changed, "--baseline", frozen, "--format", "json")[1])
    stale = [one for one in found["findings"] if one["rule"] == "link-stale"]
    assert [one["related"][0]["message"] for one in stale] == ["GH-STK-004, changed since the baseline"] * 3
    jsonschema.validate(found, json.loads(schema.text("results")))


def test_the_gate_counts_from_the_baseline(run: Run, frozen: Path, tmp_path: Path) -> None:
    assert run("check", HOIST)[0] == 1
    status, out, _ = run("check", HOIST, "--baseline", frozen, "--only-new")
    assert status == 0
    assert "Nothing got worse since the baseline of GH-ANA-014 revision A" in " ".join(out.split())
    worse = revised(tmp_path / "worse", ("proportional: 140 V/m", "proportional: 14 V/m"))
    status, out, _ = run("check", worse, "--baseline", frozen, "--only-new", "--format", "json")
    found = json.loads(out)
    assert status == 1
    assert found["gate"]["since"] == "GH-ANA-014 revision A"
    assert found["gate"]["reasons"]
    jsonschema.validate(found, json.loads(schema.text("results")))
    target = tmp_path / "report.html"
    assert run("report", HOIST, "-o", target, "--baseline", frozen, "--only-new")[0] == 0
    assert "Nothing got worse since the baseline" in target.read_text()


@pytest.mark.parametrize(
    ("content", "said"),
    [(b"{", "Expecting"), (b"[]", "is not a baseline"), (b'{"baseline": 1}', "missing"), (b"\xff", "decode")],
)
def test_what_is_no_baseline_is_said(run: Run, tmp_path: Path, content: bytes, said: str) -> None:
    (tmp_path / "b.json").write_bytes(content)
    status, out, err = run("check", HOIST, "--baseline", tmp_path / "b.json")
    assert (status, out) == (2, "")
    assert said in err


def test_misuse_is_said(run: Run, frozen: Path, tmp_path: Path) -> None:
    assert "new since when" in run("check", HOIST, "--only-new")[2]
    assert "cannot be read" in run("check", HOIST, "--baseline", tmp_path / "none.json")[2]
    other = revised(tmp_path / "other", ("id: GH-ANA-014", "id: GH-ANA-015"))
    status, _, err = run("check", other, "--baseline", frozen)
    assert status == 2
    assert "the baseline is one of the project GH-ANA-014, not of GH-ANA-015" in err
    broken = revised(tmp_path / "broken", ("numerator: [gain]", "numerator: [gian]"))
    status, out, err = run("freeze", broken, "-o", tmp_path / "never.json")
    assert (status, out) == (2, "")
    assert "no baseline was written" in err
    assert not (tmp_path / "never.json").exists()
    assert run("freeze", HOIST, "-o", tmp_path / "no" / "folder.json")[0] == 3

"""`specgate diff`: what it reads, what it says, where, and with which exit status."""

from __future__ import annotations

import json
import shutil
from collections.abc import Callable
from pathlib import Path

import pikepdf
import pytest

from specgate.cli.main import main
from specgate.exchange.differences import read

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
def revised(tmp_path: Path) -> Callable[..., Path]:
    """Return a function that copies the project and replaces words in it."""

    def make(name: str, *changes: tuple[str, str]) -> Path:
        folder = tmp_path / name
        shutil.copytree(HOIST, folder)
        text = (folder / "specgate.yaml").read_text()
        for old, new in changes:
            assert text.count(old) == 1, old
            text = text.replace(old, new)
        (folder / "specgate.yaml").write_text(text)
        return folder

    return make


def test_nothing_differs_from_itself(run: Run) -> None:
    status, out, err = run("diff", HOIST, HOIST)
    assert (status, err) == (0, "")
    assert out.startswith("● Nothing got worse")
    assert len(out.splitlines()) == 2


def test_a_better_revision_exits_0_and_back_again_1(run: Run, revised: Callable[..., Path]) -> None:
    better = revised("better", ("at_most: 1.2 s", "at_most: 4 s"), ("no more than 1.2 s", "no more than 4 s"))
    status, out, _ = run("diff", HOIST, better)
    assert status == 0
    assert "loosened: at most 1.2 s → at most 4 s" in out
    assert "[−1.2] [+4]" in out
    status, out, _ = run("diff", better, HOIST)
    assert status == 1
    assert "verdict GH-SYS-031: compliant → non-compliant" in out
    assert "tightened: at most 4 s → at most 1.2 s" in out


def test_results_reports_and_folders_are_one(run: Run, revised: Callable[..., Path], tmp_path: Path) -> None:
    changed = revised("changed", ("lag:  {value: 85 ms", "lag:  {value: 90 ms"))
    result, report = tmp_path / "old.json", tmp_path / "old.pdf"
    assert run("check", HOIST, "--format", "json", "-o", result)[0] == 1
    assert run("report", HOIST, "-o", report)[0] == 1
    found = []
    for old in (HOIST, HOIST / "specgate.yaml", result, report):
        status, out, err = run("diff", old, changed, "--format", "json")
        assert err == ""
        found.append((status, read(out)))
    assert all(each == found[0] for each in found)
    differences = found[0][1]
    assert [(c.name, c.what, c.old, c.new) for c in differences.changes] == [
        ("hoist_drive.lag", "value", "85 ms", "90 ms")
    ]
    assert {each.because for each in differences.requirements} <= {("parameter hoist_drive.lag",)} | {
        each.because for each in differences.requirements if not each.criteria
    }
    assert not any(each.unexplained for each in differences.requirements)


def test_a_new_one_that_cannot_be_built_is_unusable(run: Run, revised: Callable[..., Path]) -> None:
    broken = revised("broken", ("numerator: [gain]", "numerator: [gian]"))
    status, out, err = run("diff", HOIST, broken)
    assert (status, out) == (2, "")
    assert "cannot be compared" in err
    assert "specgate.yaml:" in err
    assert "gian" in err


def test_other_formats_are_read_as_far_as_both_know_the_thing(run: Run, tmp_path: Path) -> None:
    result = tmp_path / "old.json"
    run("check", HOIST, "--format", "json", "-o", result)
    tree = json.loads(result.read_text())
    tree["format"] = 7
    tree["horoscope"] = {"sun": "in view"}
    for one in tree["requirements"].values():
        del one["owner"]
        one["criteria"] = [{**each, "mood": "good"} for each in one["criteria"]]
    result.write_text(json.dumps(tree))
    status, out, _ = run("diff", result, HOIST)
    assert status == 0
    said = " ".join(out.split())
    assert "format 7" in said
    assert "`horoscope` (Review)" in said
    assert "`mood` (CriterionReview)" in said
    assert "`owner` (RequirementReview)" in said
    assert "Changes" not in out


@pytest.mark.parametrize(
    ("name", "content", "said"),
    [
        ("broken.json", b"{", "broken.json: Expecting property name"),
        ("list.json", b"[]", "this is not a result of specgate"),
        ("other.json", b'{"format": 1}', "this is not a result of specgate"),
        ("half.json", b'{"format": 1, "gate": {}, "project": {}}', "`findings` is missing or of another kind"),
        ("deep.json", b'{"a":' * 5000, "deep.json"),
        ("text.json", b"\xff\xfe{", "text.json"),
        ("torn.pdf", b"%PDF-1.7\nnothing", "torn.pdf cannot be read as a PDF"),
        ("empty.pdf", b"", "empty.pdf cannot be read as a PDF"),
    ],
)
def test_what_cannot_be_read_is_said(run: Run, tmp_path: Path, name: str, content: bytes, said: str) -> None:
    (tmp_path / name).write_bytes(content)
    for sides in ((tmp_path / name, HOIST), (HOIST, tmp_path / name)):
        status, out, err = run("diff", *sides)
        assert (status, out) == (2, "")
        assert said in err
        assert "Traceback" not in err


def test_a_pdf_that_carries_nothing_is_said(run: Run, tmp_path: Path) -> None:
    with pikepdf.new() as pdf:
        pdf.add_blank_page()
        pdf.save(tmp_path / "bare.pdf")
    status, _, err = run("diff", tmp_path / "bare.pdf", HOIST)
    assert status == 2
    assert "carries no results.json" in err


def test_what_is_not_there_is_said(run: Run) -> None:
    status, _, err = run("diff", "nowhere", HOIST)
    assert status == 2
    assert "there is no nowhere" in err
    assert run("diff", HOIST, HOIST, "--format", "pdf")[0] == 2


def test_files_are_written_by_their_names(run: Run, revised: Callable[..., Path], tmp_path: Path) -> None:
    changed = revised("changed", ("lag:  {value: 85 ms", "lag:  {value: 90 ms"))
    for suffix, start in ((".html", b"<!doctype html>"), (".json", b"{\n"), (".txt", "◆".encode()), (".pdf", b"%PDF-")):
        target = tmp_path / f"differences{suffix}"
        status, out, _ = run("diff", HOIST, changed, "-o", target)
        assert out == f"{target}: {'something' if status else 'nothing'} got worse\n"
        assert target.read_bytes().lstrip().startswith(start)
    with pikepdf.open(tmp_path / "differences.pdf") as pdf:
        attached = pdf.attachments["differences.json"].get_file().read_bytes()
    assert attached == (tmp_path / "differences.json").read_bytes()

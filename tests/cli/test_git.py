"""Git revisions as sides: a history is compared pair by pair, and nothing in the work tree is touched."""

from __future__ import annotations

import os
import subprocess
from itertools import pairwise
from pathlib import Path

import pytest

from specgate.cli.git import revision
from specgate.cli.sides import side
from specgate.review.types import Review, ToolReview
from specgate.revisions.compare import differences
from specgate.terms.errors import UnusableProblem
from specgate.terms.sources import FolderSource, SourceError

TOOL = ToolReview("specgate", "0")
REVISIONS = 50
PROJECT = """\
specgate: 1
project: {{id: P-1, title: Fan speed, revision: "{number}"}}
include: [requirements/*.yaml]
parameters:
  lag: {{value: {lag} ms, source: data sheet}}
subsystems:
  fan: {{input: {{unit: V}}, output: {{unit: m/s}}, model: {{numerator: [2 m/s/V], denominator: [lag, 1]}}}}
loops:
  air:
    inputs: {{drive: {{unit: V}}}}
    signals: {{flow: fan(drive)}}
    responses:
      start: {{from: drive, to: flow, input: step, size: 1 V}}
"""
REQUIREMENTS = """\
requirements:
  R-1:
    text: The air flow shall settle within 5 % in no more than 0.5 s.
    allocated_to: [air]
    verification: analysis
    criterion: {response: air.start, measure: settling_time, band: 5 %, at_most: 0.5 s}
"""


def git(folder: Path, *arguments: str) -> str:
    who = {f"GIT_{role}_{part}": "someone" for role in ("AUTHOR", "COMMITTER") for part in ("NAME", "EMAIL")}
    command = ("git", "-c", "commit.gpgsign=false", "-c", "core.hooksPath=/dev/null", *arguments)
    done = subprocess.run(command, cwd=folder, env=os.environ | who, capture_output=True, text=True, check=True)
    return done.stdout


def lag(number: int) -> int:
    """The lag that is committed at a revision, ms: three times it is the settling time, and crosses 0.5 s often."""
    return 150 + 7 * (number % 5)


@pytest.fixture(scope="module")
def history(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A repository with a project of 50 revisions, and changes in the work tree that were never committed."""
    root = tmp_path_factory.mktemp("history")
    git(root, "init", "--quiet", "--initial-branch=main")
    (root / "fan" / "requirements").mkdir(parents=True)
    (root / "fan" / "requirements" / "flow.yaml").write_text(REQUIREMENTS)
    for number in range(REVISIONS):
        (root / "fan" / "specgate.yaml").write_text(PROJECT.format(number=number, lag=lag(number)))
        git(root, "add", ".")
        git(root, "commit", "--quiet", "-m", f"Revision {number}")
        git(root, "tag", f"r{number}")
    (root / "fan" / "specgate.yaml").write_text("never committed")
    (root / "fan" / "link.yaml").symlink_to("specgate.yaml")
    return root


def state(root: Path) -> dict[str, tuple[bytes, int]]:
    """All files of a repository, the index and the references among them, with their bytes and times."""
    files = (path for path in root.rglob("*") if path.is_file())
    return {str(path.relative_to(root)): (path.read_bytes(), path.stat().st_mtime_ns) for path in files}


def test_fifty_revisions_pair_by_pair(history: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(history)
    before = state(history)
    reviews: list[Review] = [side(f"r{number}:fan").review for number in range(REVISIONS)]
    for number, (old, new) in enumerate(pairwise(reviews)):
        found = differences(old, new, TOOL)
        was, now = lag(number), lag(number + 1)
        assert [(c.name, c.old, c.new) for c in found.changes] == [
            ("project", str(number), str(number + 1)),
            ("lag", f"{was} ms", f"{now} ms"),
        ]
        assert [each.because for each in found.requirements] == [("parameter lag",)]
        fell = 3 * was <= 500 < 3 * now  # ln(20) = 2.9957 lags: no lag of the history lies between
        assert [w.kind for w in found.worse] == (["gate", "verdict"] if fell else [])
    assert state(history) == before


def test_paths_count_from_the_root_or_from_here(history: Path) -> None:
    texts = ["r3:fan", "r3:fan/", "r3:./fan/", "r3:fan/specgate.yaml", "r3:./fan/specgate.yaml"]
    found = [revision(text, history) for text in texts] + [revision("r3:.", history / "fan")]
    contents = {one.source.read(one.entry or "specgate.yaml") for one in found}
    assert contents == {PROJECT.format(number=3, lag=lag(3)).encode()}
    assert revision("r3:", history).source.glob("**/*.yaml") == ["fan/requirements/flow.yaml", "fan/specgate.yaml"]


@pytest.mark.parametrize("pattern", ["requirements/*.yaml", "**/*.yaml", "*", "specgate.yaml", "no*", "re*/f?ow.yaml"])
def test_a_revision_matches_as_a_folder_does(history: Path, tmp_path: Path, pattern: str) -> None:
    git(history, "worktree", "add", "--quiet", "--detach", str(tmp_path / "tree"), "r9")
    try:
        assert revision("r9:fan", history).source.glob(pattern) == FolderSource(tmp_path / "tree" / "fan").glob(pattern)
    finally:
        git(history, "worktree", "remove", "--force", str(tmp_path / "tree"))


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("r99:fan", "`r99` is no revision"),
        ("--help:fan", "`--help` is no revision"),
        ("r1:fin", "the revision r1 has no `fin`"),
        ("r1:../other", "leads out of the git repository"),
        ("r1:/etc", "leads out of the git repository"),
    ],
)
def test_what_is_unknown_is_said(history: Path, text: str, said: str) -> None:
    with pytest.raises(UnusableProblem, match=said):
        revision(text, history)


def test_no_repository_is_said(tmp_path: Path) -> None:
    with pytest.raises(UnusableProblem, match="no git repository here"):
        revision("main:fan", tmp_path)


def test_links_in_a_revision_are_not_followed(history: Path) -> None:
    git(history, "add", "fan/link.yaml")
    git(history, "commit", "--quiet", "-m", "A link")
    try:
        with pytest.raises(SourceError, match="is a symbolic link"):
            revision("HEAD:fan", history).source.read("link.yaml")
    finally:
        git(history, "reset", "--quiet", "--soft", "HEAD~1")

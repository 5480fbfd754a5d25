"""Files of a project: found by patterns, never outside its folder."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import pytest

from specgate.terms import sources
from specgate.terms.sources import FolderSource, SourceError


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    root = tmp_path / "project"
    for name in ("specgate.yaml", "b/two.yaml", "b/one.yaml", "b/c/deep.yaml", "b/note.txt", ".hidden/x.yaml"):
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        (root / name).write_text(name)
    (tmp_path / "outside.yaml").write_text("secret")
    return root


@pytest.mark.parametrize(
    ("pattern", "expected"),
    [
        ("b/*.yaml", ["b/one.yaml", "b/two.yaml"]),
        ("./b/*.yaml", ["b/one.yaml", "b/two.yaml"]),
        ("b/**/*.yaml", ["b/c/deep.yaml", "b/one.yaml", "b/two.yaml"]),
        ("**/*.yaml", ["b/c/deep.yaml", "b/one.yaml", "b/two.yaml", "specgate.yaml"]),
        ("*", ["specgate.yaml"]),
        ("b/[ot]*.yaml", ["b/one.yaml", "b/two.yaml"]),
        ("b/t?o.yaml", ["b/two.yaml"]),
        ("b/one.yaml", ["b/one.yaml"]),
        ("b/none.yaml", []),
        ("b", []),
        ("nowhere/*.yaml", []),
    ],
)
def test_patterns(folder: Path, pattern: str, expected: list[str]) -> None:
    assert FolderSource(folder).glob(pattern) == expected


@pytest.mark.parametrize(
    "path", ["../outside.yaml", "b/../../outside.yaml", "/etc/passwd", "b\\one.yaml", "", "a\0b", "b//c"]
)
def test_paths_that_lead_out_are_refused(folder: Path, path: str) -> None:
    source = FolderSource(folder)
    with pytest.raises(SourceError):
        source.read(path)
    with pytest.raises(SourceError):
        source.glob(path)


def test_links_do_not_lead_out(folder: Path) -> None:
    (folder / "link.yaml").symlink_to(folder.parent / "outside.yaml")
    (folder / "away").symlink_to(folder.parent)
    source = FolderSource(folder)
    with pytest.raises(SourceError, match="leads out"):
        source.read("link.yaml")
    with pytest.raises(SourceError, match="leads out"):
        source.read("away/outside.yaml")
    assert "away/outside.yaml" not in source.glob("**/*.yaml")


def test_links_inside_are_followed_but_not_in_circles(folder: Path) -> None:
    (folder / "same.yaml").symlink_to(folder / "b/one.yaml")
    (folder / "round").symlink_to(folder)
    (folder / "self.yaml").symlink_to(folder / "self.yaml")
    source = FolderSource(folder)
    assert source.read("same.yaml") == b"b/one.yaml"
    assert source.glob("**/one.yaml") == ["b/one.yaml"]
    with pytest.raises(SourceError):
        source.read("self.yaml")


def test_what_is_no_file_is_refused(folder: Path) -> None:
    os.mkfifo(folder / "pipe.yaml")
    source = FolderSource(folder)
    for path, message in (("b", "is not a file"), ("pipe.yaml", "is not a file"), ("none.yaml", "there is no file")):
        with pytest.raises(SourceError, match=message):
            source.read(path)


def test_a_huge_file_is_not_read(folder: Path) -> None:
    with (folder / "huge.yaml").open("wb") as file:
        file.truncate(sources.LARGEST_FILE + 1)
    with pytest.raises(SourceError, match="larger than"):
        FolderSource(folder).read("huge.yaml")


def test_a_pattern_is_not_tried_on_a_whole_disk(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sources, "MOST_FILES", 3)
    with pytest.raises(SourceError, match="more than 3 files"):
        FolderSource(folder).glob("**/*.yaml")


def test_a_hostile_pattern_is_little_work(folder: Path, work: Callable[[Callable[[], object]], int]) -> None:
    (folder / ("a" * 200)).write_text("")

    def look() -> None:
        assert FolderSource(folder).glob("*a" * 100 + "b") == []
        assert FolderSource(folder).glob("/".join(["**"] * 80 + ["x"])) == []
        with pytest.raises(SourceError):
            FolderSource(folder).glob("**/" * 200 + "*.yaml")

    assert work(look) < 40_000

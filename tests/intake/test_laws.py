"""Laws: whatever stands in a file, reading it ends in a Project or in findings; the order of keys says nothing."""

from __future__ import annotations

import random
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from specgate.intake.load import Problems, load_source
from specgate.project.types import Project
from specgate.terms.sources import SourceError

TESTS = Path(__file__).parents[1]
EXAMPLE = (TESTS / "examples" / "spec_format" / "specgate.yaml").read_text(encoding="utf-8")
WHOLE = {
    path.relative_to(TESTS / "intake" / "whole").as_posix(): path.read_text(encoding="utf-8")
    for path in (TESTS / "intake" / "whole").rglob("*.yaml")
}
QUICK = settings(max_examples=25, deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])

SCALARS = [
    "3",
    "-1",
    "0",
    "true",
    "null",
    "x",
    "2 %",
    "1 m",
    "1/0",
    "''",
    "[]",
    "{}",
    "[1, {a: b}]",
    "{value: 1 s}",
    "9e99",
]


class Bytes:
    """A source of files that are only bytes."""

    def __init__(self, **files: bytes) -> None:
        self.files = files

    def read(self, path: str) -> bytes:
        if path not in self.files:
            raise SourceError(f"there is no file `{path}`")
        return self.files[path]

    def glob(self, pattern: str) -> list[str]:
        return [path for path in self.files if path == pattern]


def checked(data: bytes) -> Project | Problems:
    found = load_source(Bytes(**{"specgate.yaml": data}))
    if isinstance(found, Problems):
        assert found.findings
        assert all(finding.message and finding.place.line >= 1 for finding in found.findings)
        places = [(f.place.path, f.place.line, f.place.column) for f in found.findings]
        assert places == sorted(places)
    return found


def whole_in_one_file() -> str:
    """Write the project with every key as one file."""
    parts = [WHOLE["specgate.yaml"].replace('include: ["subsystems/*.yaml", records.yaml]\n', "")]
    return "\n".join([*parts, WHOLE["records.yaml"], WHOLE["subsystems/blocks.yaml"]])


def tree_of(text: str) -> Any:
    """Return the plain tree of a YAML text, by YAML 1.2: BaseLoader makes everything a text, so give kinds back."""

    def typed(node: Any) -> Any:
        if isinstance(node, dict):
            return {key: typed(value) for key, value in node.items()}
        if isinstance(node, list):
            return [typed(item) for item in node]
        if node in ("true", "false"):
            return node == "true"
        if re.fullmatch(r"-?[0-9]+", node):
            return int(node)
        return float(node) if re.fullmatch(r"-?[0-9]+\.[0-9]+", node) else node

    return typed(yaml.load(text, Loader=yaml.BaseLoader))


def test_the_examples_are_read() -> None:
    assert isinstance(checked(EXAMPLE.encode()), Project)
    assert isinstance(checked(whole_in_one_file().encode()), Project)


@QUICK
@given(st.binary(max_size=300))
def test_any_bytes_end_in_findings(data: bytes) -> None:
    assert isinstance(checked(data), Problems)


@QUICK
@given(st.text(st.sampled_from("{}[]:,-# \n'\"|>&*!%@`ab1.e~?\t"), max_size=120))
def test_any_yaml_ends_in_findings(text: str) -> None:
    assert isinstance(checked(text.encode()), Problems)


@QUICK
@given(st.data())
def test_a_damaged_project_never_breaks_the_reader(data: st.DataObject) -> None:
    """Replace what stands at a random place of a project by something else, or leave a line out, or repeat it."""
    text = data.draw(st.sampled_from([EXAMPLE, whole_in_one_file()]))
    for _ in range(data.draw(st.integers(1, 3))):
        lines = text.split("\n")
        at = data.draw(st.integers(0, len(lines) - 1))
        line = lines[at]
        change = data.draw(st.sampled_from(["value", "drop", "repeat", "swap", "cut", "rename"]))
        if change == "value" and ":" in line:
            lines[at] = f"{line.split(':')[0]}: {data.draw(st.sampled_from(SCALARS))}"
        elif change == "drop":
            del lines[at]
        elif change == "repeat":
            lines.insert(at, line)
        elif change == "swap":
            other = data.draw(st.integers(0, len(lines) - 1))
            lines[at], lines[other] = lines[other], lines[at]
        elif change == "cut":
            lines[at] = line[: data.draw(st.integers(0, len(line)))]
        elif change == "rename":
            words = line.split(" ")
            words[data.draw(st.integers(0, len(words) - 1))] = data.draw(
                st.sampled_from(["at_most:", "zzz", "1", "m/s"])
            )
            lines[at] = " ".join(words)
        text = "\n".join(lines)
    checked(text.encode())


@QUICK
@given(st.data())
def test_a_damaged_tree_never_breaks_the_reader(data: st.DataObject) -> None:
    """Replace a random node of a project by a node of another kind: the YAML stays right, the shape does not."""
    tree = tree_of(data.draw(st.sampled_from([EXAMPLE, whole_in_one_file()])))
    node: Any = tree
    while True:
        keys = list(node) if isinstance(node, dict) else list(range(len(node)))
        key = data.draw(st.sampled_from(keys))
        inner = node[key]
        if not isinstance(inner, dict | list) or not inner or data.draw(st.integers(0, 3)) == 0:
            break
        node = inner
    node[key] = data.draw(st.sampled_from([[], {}, "x", "3 s", ["x"], {"x": "y"}, [["1"]], {"value": "2 s"}, ""]))
    checked(yaml.safe_dump(tree, sort_keys=False, allow_unicode=True).encode())


def shuffled(node: Any, chance: random.Random) -> Any:
    if isinstance(node, dict):
        keys = list(node)
        chance.shuffle(keys)
        return {key: shuffled(node[key], chance) for key in keys}
    return [shuffled(item, chance) for item in node] if isinstance(node, list) else node


def essence(node: Any) -> Any:
    """Return a Project without places and without the order of its names."""
    if isinstance(node, dict):
        return sorted((str(key), essence(value)) for key, value in node.items())
    if isinstance(node, tuple | list):
        return [essence(item) for item in node]
    if hasattr(node, "__dataclass_fields__"):
        fields = [name for name in node.__dataclass_fields__ if not name.endswith("place") and name != "inputs"]
        return [type(node).__name__, *[(name, essence(getattr(node, name))) for name in fields if name != "units"]]
    return repr(node)


@pytest.mark.parametrize("seed", range(5))
@pytest.mark.parametrize("text", [EXAMPLE, whole_in_one_file()], ids=["example", "whole"])
def test_the_order_of_keys_says_nothing(seed: int, text: str) -> None:
    tree = tree_of(text)

    def read(written: Any) -> Any:
        found = checked(yaml.safe_dump(written, sort_keys=False, allow_unicode=True).encode())
        assert isinstance(found, Project), [(str(f.place), f.message) for f in found.findings]
        return essence(found)

    assert read(shuffled(tree, random.Random(seed))) == read(tree)


def test_the_same_files_give_the_same_findings(load: Callable[..., Project | Problems], bench: str) -> None:
    text = bench.replace("settling_time", "setling_time").replace("lags: [lag]", "lags: [lagg]").replace("3 s}", "3 x}")
    assert load(text) == load(text)

"""Hostile files end in one clear message and 200 MB each, and nothing in them is ever run.

All are read in one process of its own, whose address space is limited, which is killed where one of them does not come
to an end, and which reports the most memory that it ever held. How long each takes: `tests/benchmarks/hostile.py`.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from specgate.intake.collect import MOST, Collector
from specgate.intake.nodes import Origin
from specgate.intake.reader import MOST_NODES, Allowance, read

HANGS = 600
"""Seconds after which reading does not end, on the slowest of machines; an idle one needs four for all files."""
MEGABYTES = 200

_MARKER = "executed"


def _bomb(_: Path) -> bytes:
    levels = ["a0: &a0 [x, x, x, x, x, x, x, x, x]"]
    levels += [f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 9)}]" for i in range(1, 12)]
    return "\n".join(levels).encode()


def _project(line: str) -> bytes:
    return f"specgate: 1\nproject: {{id: X, title: X, revision: A}}\n{line}\n".encode()


HOSTILE: dict[str, tuple[Callable[[Path], bytes], str]] = {
    "alias_bomb": (_bomb, "alias"),
    "alias_of_itself": (lambda _: b"a: &a [*a]\n", "alias"),
    "deep_lists": (lambda _: b"[" * 3000 + b"]" * 3000, "nested"),
    "deep_blocks": (lambda _: "\n".join(" " * i + "a:" for i in range(3000)).encode(), "nested"),
    "deep_dashes": (lambda _: b"- " * 3000 + b"x", "nested"),
    "deep_tables": (lambda _: b"{a: " * 3000 + b"}" * 3000, "nested"),
    "exponent": (lambda _: _project("parameters: {x: 1e999999999}"), "out of reach"),
    "negative_exponent": (lambda _: _project("parameters: {x: 1e-999999999 m}"), "out of reach"),
    "many_digits": (lambda _: _project("parameters: {x: " + "1" * 200_000 + "}"), "digits"),
    "many_digits_in_a_text": (lambda _: _project("parameters: {x: " + "1" * 200_000 + " m}"), "1000 characters"),
    "many_digits_as_a_key": (lambda _: _project("parameters: {" + "1" * 100_000 + ": 1}"), ""),
    "tower": (lambda _: _project("parameters: {x: 9**9**9**9}"), "power"),
    "tower_in_brackets": (lambda _: _project("parameters: {x: ((9**64)**64)**64}"), "too large"),
    "tower_by_parameters": (
        lambda _: _project("parameters:\n  x0: 9\n" + "\n".join(f"  x{i}: x{i - 1}**9" for i in range(1, 60))),
        "too large",
    ),
    "many_brackets": (lambda _: _project("parameters: {x: " + "(" * 480 + "1" + ")" * 480 + "}"), "brackets"),
    "many_signs": (lambda _: _project("parameters: {x: " + "-" * 900 + "1}"), "brackets and signs"),
    "long_sum": (lambda _: _project("parameters: {x: " + "+".join(["1"] * 100_000) + "}"), "1000 characters"),
    "python_tag": (
        lambda folder: _project(f"title: !!python/object/apply:os.mkdir ['{folder / _MARKER}']"),
        "tag",
    ),
    "python_in_an_expression": (
        lambda folder: _project(f"parameters: {{x: \"__import__('os').mkdir('{folder / _MARKER}')\"}}"),
        "operator is wanted",
    ),
    "python_in_a_template": (
        lambda folder: _project(
            'templates: {t: {text: "{a.__class__.__mro__}", verification: analysis}}\n'
            "requirements: {R: {use: t, with: {a: x}}}"
        ),
        "no placeholder",
    ),
    "password_file": (lambda _: _project("include: ../../../../../../etc/passwd"), "out of the project folder"),
    "password_file_from_the_root": (lambda _: _project("include: [/etc/passwd]"), "relative"),
    "password_file_by_pattern": (
        lambda _: _project("include: ['../*/../../../etc/pass*']"),
        "out of the project folder",
    ),
    "password_file_by_link": (lambda _: _project("include: [link.yaml]"), "out of the project folder"),
    "folder_by_link": (lambda _: _project("include: ['linked/*.yaml']"), ""),
    "pattern_without_end": (lambda _: _project("include: ['" + "*a" * 140 + "']"), "no file matches"),
    "nul_bytes": (lambda _: b"\0" * 1000, "NUL"),
    "not_utf_8": (lambda _: bytes(range(128, 256)), "UTF-8"),
    "half_a_character": (lambda _: _project("x: ").rstrip() + b" \xe2\x82", "UTF-8"),
    "control_characters": (lambda _: _project("title: \x1b[2J"), "control character"),
    "too_large": (lambda _: b"#" * (17 * 1024**2), "larger than"),
    "many_values": (lambda _: _project("parameters: [" + "1," * 1_000_000 + "]"), "values"),
    "many_keys": (lambda _: _project("\n".join(f"k{i}: 1" for i in range(60_000))), "is not a key"),
    "many_equal_keys": (lambda _: _project("gate: {hold_on: []}\n" * 50_000), "twice"),
    "many_unknown_names": (
        lambda _: _project("parameters:\n" + "\n".join(f"  p{i}: {{formula: q{i}}}" for i in range(3_000))),
        "no parameter",
    ),
    "many_parameters_in_a_row": (
        lambda _: _project("parameters:\n" + "\n".join(f"  p{i}: p{i + 1} + 1" for i in range(3_000))),
        "",
    ),
    "long_line": (lambda _: _project("title: " + "x" * 8_000_000), "is not a key"),
    "long_wire": (
        lambda _: _project(
            "loops: {a: {inputs: {u: {unit: m}}, signals: {y: "
            + "+".join(["u"] * 1500)
            + ", z: "
            + "(" * 300
            + "u"
            + ")" * 300
            + "}}}"
        ),
        "",
    ),
    "quadratic_text": (lambda _: _project("parameters: {x: " + "1 m*" * 240 + "}"), ""),
    "regular_expression": (lambda _: _project("requirements: {" + "a" * 150 + "!: {text: " + "{a" * 50_000 + "}}"), ""),
}

_READ = """
import json, resource, sys
from pathlib import Path
resource.setrlimit(resource.RLIMIT_AS, (3 << 30, 3 << 30))
from specgate.intake.load import load, Problems
load(Path(sys.argv[1]))
results = {}


def megabytes():
    # ru_maxrss would count what the parent used before this program was put in its place
    status = Path("/proc/self/status")
    if status.exists():
        return int(status.read_text().partition("VmHWM:")[2].split()[0]) / 1024
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


for name in sys.argv[2:]:
    found = load(Path(name))
    results[name] = {
        "messages": [f.message for f in found.findings] if isinstance(found, Problems) else [],
        "unusable": isinstance(found, Problems),
        "megabytes": megabytes(),
    }
print(json.dumps(results))
"""


@pytest.fixture(scope="module")
def outcome(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Any]:
    """Read every hostile file in one process; return what was found by name."""
    folder = tmp_path_factory.mktemp("hostile")
    (folder / "outside").mkdir()
    (folder / "outside" / "secret.yaml").write_text("parameters: {secret: 42}\n")
    projects = {}
    for name, (make, _) in HOSTILE.items():
        home = folder / "projects" / name
        home.mkdir(parents=True)
        (home / "link.yaml").symlink_to("/etc/passwd")
        (home / "linked").symlink_to(folder / "outside")
        (home / "specgate.yaml").write_bytes(make(folder))
        projects[name] = str(home)
    warm = folder / "warm.yaml"
    warm.write_text("specgate: 1\n")
    command = [sys.executable, "-c", _READ, str(warm), *projects.values()]
    root = str(Path(__file__).parents[2])
    run = subprocess.run(
        command, capture_output=True, text=True, timeout=HANGS, check=False, env={**os.environ, "PYTHONPATH": root}
    )
    assert run.returncode == 0, run.stderr
    assert not (folder / _MARKER).exists(), "something in a file was run"
    results: dict[str, Any] = json.loads(run.stdout)
    return {name: results[path] for name, path in projects.items()}


@pytest.mark.parametrize("name", HOSTILE)
def test_it_is_refused_clearly(name: str, outcome: dict[str, Any]) -> None:
    found = outcome[name]
    assert found["unusable"]
    assert found["messages"]
    assert any(HOSTILE[name][1] in message for message in found["messages"]), found["messages"][:3]
    assert all(len(message) < 600 for message in found["messages"])


def test_memory(outcome: dict[str, Any]) -> None:
    assert max(found["megabytes"] for found in outcome.values()) < MEGABYTES


def test_most_end_in_a_single_message(outcome: dict[str, Any]) -> None:
    several = {name for name, found in outcome.items() if len(found["messages"]) > 1}
    assert several <= {"many_keys", "many_equal_keys", "many_unknown_names", "long_wire", "many_digits_as_a_key"}


def test_nothing_outside_the_project_is_told(outcome: dict[str, Any]) -> None:
    text = json.dumps([found["messages"] for found in outcome.values()])
    assert "root:" not in text
    assert "secret" not in text


def test_reading_ends_where_nobody_would_read_on(tmp_path: Path) -> None:
    # of 50,000 equal keys the 300th repetition is the last that is reported
    allowance, collector = Allowance(), Collector()
    read(HOSTILE["many_equal_keys"][0](tmp_path), Origin("file.yaml"), allowance, collector)
    assert len(collector.findings) == MOST
    assert MOST_NODES - allowance.nodes < 5 * MOST  # three values a line, and the beginning

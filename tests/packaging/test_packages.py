"""The package list, the version and the start-up path are what they claim to be."""

from __future__ import annotations

import subprocess
import sys
import tomllib
from pathlib import Path

import specgate

ROOT = Path(__file__).resolve().parents[2]
PYPROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text())


def test_packages_match_the_disk() -> None:
    on_disk = {".".join(init.parent.relative_to(ROOT).parts) for init in (ROOT / "specgate").rglob("__init__.py")} | {
        "specgate.schemas",
        "specgate.templates",
    }
    assert set(PYPROJECT["tool"]["setuptools"]["packages"]) == on_disk


def test_every_kind_of_template_file_ships() -> None:
    patterns = PYPROJECT["tool"]["setuptools"]["package-data"]["specgate.templates"]
    shipped = {path for pattern in patterns for path in (ROOT / "templates").glob(pattern)}
    files = {
        path
        for path in (ROOT / "templates").rglob("*")
        if path.is_file() and "__pycache__" not in path.parts and path.suffix != ".py"
    }
    assert files - shipped == set()


def test_version_is_stated_once() -> None:
    assert PYPROJECT["project"]["version"] == specgate.__version__


def _modules_after(*arguments: str) -> set[str]:
    code = (
        "import sys\n"
        "from specgate.cli.main import main\n"
        f"main({list(arguments)!r})\n"
        "print('\\n'.join(sys.modules), file=sys.stderr)"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=ROOT)
    return {name.split(".")[0] for name in run.stderr.splitlines()}


def test_help_imports_nothing_from_outside() -> None:
    assert not _modules_after("--help") & {"numpy", "scipy", "flint", "jinja2", "jsonschema", "weasyprint", "yaml"}


def test_check_never_imports_the_slow_ones() -> None:
    example = str(ROOT / "tests" / "examples" / "spec_format")
    modules = _modules_after("check", example)
    assert "flint" in modules
    assert not modules & {"scipy", "weasyprint", "jinja2", "pint", "matplotlib"}

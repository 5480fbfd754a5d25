"""Build the wheel, compare it with the checkout both ways, install it elsewhere and run it from `/`."""

from __future__ import annotations

import shutil
import subprocess
import sys
import tempfile
import venv
import zipfile
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
SHIPPED = {"specgate": "specgate", "schemas": "specgate/schemas", "templates": "specgate/templates"}


def expected() -> set[str]:
    """Names that the wheel must hold, from the files that git tracks."""
    tracked = subprocess.run(
        ["git", "ls-files", "-z", *SHIPPED], cwd=ROOT, check=True, capture_output=True, text=True
    ).stdout.split("\0")
    names = set()
    for name in filter(None, tracked):
        top, rest = name.split("/", 1)
        names.add(f"{SHIPPED[top]}/{rest}")
    return names


def build(folder: Path) -> Path:
    """Build the wheel; an old build folder would ship renamed files."""
    shutil.rmtree(ROOT / "build", ignore_errors=True)
    subprocess.run(
        [sys.executable, "-m", "build", "--wheel", "--outdir", str(folder), str(ROOT)],
        check=True,
        stdout=subprocess.DEVNULL,
    )
    (wheel,) = folder.glob("*.whl")
    return wheel


def compare(wheel: Path) -> None:
    """Fail on any file that is missing from the wheel or has no source in the checkout."""
    with zipfile.ZipFile(wheel) as archive:
        held = {name for name in archive.namelist() if ".dist-info/" not in name}
    missing, surplus = sorted(expected() - held), sorted(held - expected())
    if missing or surplus:
        sys.exit(f"wheel and checkout differ: missing {missing}, surplus {surplus}")
    print(f"{wheel.name}: {len(held)} files, the same as in the checkout")


def run_elsewhere(wheel: Path, folder: Path) -> None:
    """Install into a fresh environment and check an example from `/`; the checkout must say the same."""
    venv.create(folder / "env", with_pip=True)
    python = folder / "env" / "bin" / "python"
    subprocess.run([python, "-m", "pip", "install", "-q", "--disable-pip-version-check", str(wheel)], check=True)
    example = next(iter(sorted((ROOT / "example_projects").glob("*/rev_b"))))
    outputs = []
    for interpreter in (python, Path(sys.executable)):
        run = subprocess.run(
            [interpreter, "-m", "specgate", "check", str(example), "--format", "json"],
            cwd="/",
            capture_output=True,
            text=True,
            check=False,
        )
        if run.returncode not in (0, 1):
            sys.exit(f"{interpreter}: exit {run.returncode}\n{run.stderr}")
        outputs.append(run.stdout)
    if outputs[0] != outputs[1]:
        sys.exit("the installed wheel and the checkout give different results")
    print(f"installed elsewhere and run from /: the same {len(outputs[0])} bytes as the checkout")


def main() -> None:
    """Run all three."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        wheel = build(folder)
        compare(wheel)
        run_elsewhere(wheel, folder)


if __name__ == "__main__":
    main()

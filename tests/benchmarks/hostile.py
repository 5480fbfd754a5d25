"""What it costs to refuse hostile input: `python tests/benchmarks/hostile.py`.

The processor time (best of three) to read each hostile file of `tests/intake/test_hostile.py`, and the worst of the
hostile expressions of `tests/terms/test_hostile_expressions.py`, and what each is held to on an idle machine.
"""

from __future__ import annotations

import contextlib
from collections.abc import Callable
from pathlib import Path
from runpy import run_path
from tempfile import TemporaryDirectory
from time import process_time

from specgate.intake.load import Problems, load
from specgate.terms.expressions import ExpressionError, evaluate, parse
from specgate.terms.units import UnitTable

TESTS = Path(__file__).resolve().parents[1]
RUNS = 3
FILE, EXPRESSION = 1000.0, 250.0
"""Milliseconds that a file and an expression are held to."""


def price(action: Callable[[], object]) -> float:
    """Return milliseconds."""
    times = []
    for _ in range(RUNS):
        start = process_time()
        action()
        times.append(process_time() - start)
    return 1000 * min(times)


def row(name: str, milliseconds: float, held_to: float, findings: int | None = None) -> str:
    """Return a line of the table."""
    over = "  over" if milliseconds > held_to else ""
    return f"{name:30}{milliseconds:8.1f}{held_to:9.0f}{'' if findings is None else findings:>10}{over}"


def files() -> None:
    """Print what each hostile file costs."""
    table = run_path(str(TESTS / "intake" / "test_hostile.py"))["HOSTILE"]
    with TemporaryDirectory() as name:
        folder = Path(name)
        for kind, (make, _) in table.items():
            entry = folder / f"{kind}.yaml"
            entry.write_bytes(make(folder))
            milliseconds = price(lambda entry=entry: load(entry))  # type: ignore[misc]
            found = load(entry)
            print(row(kind, milliseconds, FILE, len(found.findings) if isinstance(found, Problems) else 0))


def expressions() -> None:
    """Print what the most expensive of the hostile expressions costs."""
    units = UnitTable.standard()

    def read(text: str) -> None:
        with contextlib.suppress(ExpressionError):
            evaluate(parse(text, units), {})

    texts = run_path(str(TESTS / "terms" / "test_hostile_expressions.py"))["HOSTILE"]
    print(row("worst expression", max(price(lambda text=text: read(text)) for text in texts), EXPRESSION))  # type: ignore[misc]


def main() -> None:
    """Print the table."""
    print(f"{'input':30}{'ms':>8}{'held to':>9}{'findings':>10}")
    files()
    expressions()


if __name__ == "__main__":
    main()

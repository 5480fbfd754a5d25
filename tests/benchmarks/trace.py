"""Checking a specification with a great trace: `python tests/benchmarks/trace.py [requirements] [levels] [every]`.

Writes a project of so many requirements (20,000 unless told otherwise) on so many levels (8), checks it as the
command line does, and prints wall time, processor time and peak memory of the whole process. Every so many-th
requirement of the last level (20; 1: all) has a limit on a loop; the others are shown by a test that is due later, as
in a specification of a whole system, of which control is a part.
"""

from __future__ import annotations

import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

HEAD = """\
specgate: 1
project: {id: BEN-1, title: A great trace, revision: A, date: 2026-11-02, stage: CDR, stages: [CDR, acceptance]}
subsystems:
  vane:
    input: {unit: V}
    output: {unit: mm}
    parameters: {gain: {value: 2 mm/V, source: BEN-2}, lag: {value: 500 ms, source: BEN-2}}
    model: {numerator: [gain], denominator: [lag, 1]}
loops:
  louvre:
    inputs: {order: {unit: V}}
    signals: {opening: vane(order)}
    responses: {open: {from: order, to: opening, input: step, size: 3 V}}
requirements:
"""


def project(requirements: int, levels: int, every: int = 20) -> str:
    """Return the text of a project; each need of a level has the same number of children, as nearly as it goes."""
    spread = max(2.0, requirements ** (1 / (levels - 1)) * 0.8)
    lines, above, number = [HEAD], [""], 0
    for level in range(levels):
        last = level == levels - 1
        left = requirements - number
        size = left if last else min(left - (levels - level - 1), max(1, round(spread**level)))
        here = []
        for index in range(size):
            number += 1
            name = f"R-{level}-{index:05}"
            here.append(name)
            parent = above[index * len(above) // size]
            if not last:
                lines.append(_need(name, parent))
            else:
                lines.append(_limit(name, parent, 2000 + number) if index % every == 0 else _shown(name, parent))
        above = here
    return "".join(lines)


def _need(name: str, parent: str) -> str:
    link = f"    derived_from: [{parent}]\n" if parent else ""
    return (
        f"  {name}:\n    text: The plant shall do what {name} asks.\n{link}    decided_by: derived\n"
        "    coverage: {complete: true, by: Systems, on: 2026-10-30}\n"
    )


def _shown(name: str, parent: str) -> str:
    return (
        f"  {name}:\n    text: The louvre shall bear what {name} asks.\n    derived_from: [{parent}]\n"
        "    allocated_to: [louvre]\n    decided_by: evidence\n    verification: [{method: test, stage: acceptance}]\n"
    )


def _limit(name: str, parent: str, milliseconds: int) -> str:
    return (
        f"  {name}:\n    text: The louvre shall settle within 2 % in no more than {milliseconds} ms.\n"
        f"    derived_from: [{parent}]\n    allocated_to: [louvre]\n    verification: analysis\n"
        f"    criterion: {{response: louvre.open, measure: settling_time, band: 2 %, at_most: {milliseconds} ms}}\n"
    )


def main() -> None:
    """Write, check, print."""
    requirements = int(sys.argv[1]) if len(sys.argv) > 1 else 20_000
    levels = int(sys.argv[2]) if len(sys.argv) > 2 else 8
    every = int(sys.argv[3]) if len(sys.argv) > 3 else 20
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "specgate.yaml"
        path.write_text(project(requirements, levels, every), encoding="utf-8")
        start = time.perf_counter()
        done = subprocess.run(
            [sys.executable, "-m", "specgate", "check", str(path), "-o", str(Path(folder) / "out.txt")],
            check=False,
            capture_output=True,
            text=True,
        )
        wall = time.perf_counter() - start
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    print(f"{requirements} requirements on {levels} levels: exit status {done.returncode} {done.stderr[-300:]}")
    print(f"wall {wall:.2f} s, processor {used.ru_utime + used.ru_stime:.2f} s, memory {used.ru_maxrss / 1024:.0f} MB")


if __name__ == "__main__":
    main()

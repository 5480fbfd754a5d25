"""How the price of all measures of a response grows: `python tests/benchmarks/growth.py`.

With order, with 1/damping, with the ratio of two poles, and with the horizon over the dead time of a loop. Every point
is the median of a few systems, each the best of three runs, answered from scratch and enclosed to 64 bits; bars are
logarithmic, a mark every factor of ten.
"""

from __future__ import annotations

import random
import tempfile
import time
from collections.abc import Callable, Iterable, Sequence
from fractions import Fraction
from math import log10
from pathlib import Path
from statistics import median

from flint import fmpq, fmpq_poly
from step_responses import lag, of_order, pair

from specgate.analysis.analyse import analyse
from specgate.analysis.analyses import Missing
from specgate.intake.load import Problems, load
from specgate.measures.subjects import ResponseSubject
from specgate.project.types import Project
from specgate.response.answers import Absent
from specgate.response.questions import TimeResponse
from specgate.response.step import StepResponse
from specgate.systems import roots

RUNS = 3
SYSTEMS = 5
SHORTEST = 0.1
"""Where bars begin, ms."""
DECADE = 12
"""Characters that a factor of ten takes."""

Work = Callable[[], None]

DELAYED = """\
specgate: 1
project: {{id: G, title: Growth with the horizon, revision: A}}
subsystems:
  regulator: {{input: {{unit: 1}}, output: {{unit: 1}}, model: {{numerator: [{gain}], denominator: [1]}}}}
  duct:
    input: {{unit: 1}}
    output: {{unit: 1}}
    model: {{numerator: [1], denominator: [1, {rate}], dead_time: 1 s}}
loops:
  loop:
    inputs: {{demand: {{unit: 1}}}}
    signals: {{flow: duct(regulator(demand - flow))}}
    responses: {{follow: {{from: demand, to: flow, input: step, size: 1}}}}
"""
"""A loop whose slowest mode decays with about `gain + rate`, through a dead time of one second."""


def ask(response: TimeResponse) -> None:
    """Ask for both extremes and their times, settling to 2 % and 5 %, arrivals at 10, 50 and 90 % of the change."""
    final = response.final_value().exact
    assert final is not None
    answers = [extreme for found in (response.greatest(), response.least()) for extreme in (found.value, found.time)]
    answers += [response.settling(abs(final) / 50), response.settling(abs(final) / 20)]
    answers += [response.first_arrival(final * share) for share in (fmpq(1, 10), fmpq(1, 2), fmpq(9, 10))]
    for found in answers:
        if found.absent is None:
            found.enclose(64)


def rational(system: tuple[fmpq_poly, fmpq_poly]) -> Work:
    """Return the work on a step response of a transfer function."""

    def work() -> None:
        roots._at_precision.cache_clear()
        ask(StepResponse(*system, fmpq(1)))

    return work


def delayed(horizon: int) -> Work:
    """Return the work on a loop with a dead time of one second that settles to 2 % after about `horizon` seconds."""
    share = Fraction(4, horizon)
    text = DELAYED.format(gain=f"{float(share / 2):.4g}", rate=f"{float(share / 2):.4g}")
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "specgate.yaml"
        path.write_text(text)
        project = load(path)
    if isinstance(project, Problems):
        raise ValueError(project.findings[0].message)
    return lambda: ask(_response(project))


def _response(project: Project) -> TimeResponse:
    subject = analyse(project).nominal.loops["loop"].responses["follow"].subject
    if isinstance(subject, Missing):
        raise ValueError(subject.reason)
    assert isinstance(subject, ResponseSubject)
    if isinstance(subject.response, Absent):
        raise ValueError(subject.response.reason)
    return subject.response


def price(work: Work) -> float:
    """Return the CPU time of the best of a few runs, ms."""
    best = float("inf")
    for _ in range(RUNS):
        before = time.process_time()
        work()
        best = min(best, time.process_time() - before)
    return 1e3 * best


def plot(title: str, points: Iterable[tuple[str, Sequence[Work]]]) -> None:
    """Print a bar for every point."""
    print(f"\n{title}")
    for label, works in points:
        found = median(price(work) for work in works)
        length = max(1, round(DECADE * log10(max(found, SHORTEST) / SHORTEST)))
        bar = "".join("|" if (place + 1) % DECADE == 0 else "=" for place in range(length))
        print(f"{label:>10} {found:9.2f} ms {bar}")


def of_damping(exponent: int) -> list[Work]:
    """Return work on systems with one pair of damping 10^-exponent beside a lag."""
    damping = Fraction(1, 10**exponent)
    drawn = (random.Random(f"damping {seed}") for seed in range(SYSTEMS))
    return [
        rational((fmpq_poly([1]), pair(10 ** r.uniform(-1, 1), damping) * lag(10 ** r.uniform(-1, 1)))) for r in drawn
    ]


def of_ratio(exponent: int) -> list[Work]:
    """Return work on systems with two poles 10^exponent apart."""
    drawn = (10 ** random.Random(f"ratio {seed}").uniform(-1, 1) for seed in range(SYSTEMS))
    return [rational((fmpq_poly([1]), lag(slow) * lag(slow * 10.0**exponent))) for slow in drawn]


def of_size(order: int) -> list[Work]:
    """Return work on systems of one order, poles within a factor of 30."""
    return [rational(of_order(order)(random.Random(f"order {seed}"))) for seed in range(SYSTEMS)]


def main() -> None:
    """Print four plots."""
    of_size(4)[0]()
    plot("order", ((str(n), of_size(n)) for n in (2, 4, 6, 10, 15, 20, 30)))
    plot("1 / damping", ((f"1e{k}", of_damping(k)) for k in (1, 2, 3, 4, 6, 8, 10, 12)))
    plot("ratio of two poles", ((f"1e{k}", of_ratio(k)) for k in (1, 2, 4, 6, 8, 10)))
    plot("horizon over dead time", ((str(n), [delayed(n)]) for n in (4, 20, 60, 200, 600, 2000)))


if __name__ == "__main__":
    main()

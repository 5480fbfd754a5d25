"""Margins of loops with dead time: reference cases, printed figures, and scans in 40 digits on loops drawn by lot."""

from __future__ import annotations

import math
import random
from typing import Any

import mpmath
import pytest
from flint import arb, fmpq

from specgate.delays.gain import DelayedGain
from specgate.delays.magnitude import DelayedMagnitude
from specgate.delays.open_loop import DelayedLoop
from specgate.response.answers import Answer
from specgate.systems.delayed_network import DelayedTransfer
from specgate.systems.polynomials import highest_first
from specgate.systems.quasi import Quasi
from specgate.systems.quasi_stability import is_stable

from .conftest import closed, exact, late, value

NEAR = mpmath.mpf(10) ** -12


def loop_of(transfer: DelayedTransfer) -> DelayedLoop:
    return DelayedLoop(transfer, is_stable(transfer.numerator + transfer.denominator))


def number(answer: Answer) -> mpmath.mpf:
    ball = answer.enclose(80)
    assert ball.rad() < arb(2) ** -50 * abs(ball).max(arb(1))
    return mpmath.mpf(ball.mid().str(30, radius=False))


# --- reference cases: 60-digit numbers on a scan ------------------------------------------------------------

CASES = [
    {
        "loop": (["2"], ["5", "1"], "1"),
        "crossovers": ["0.34641016151377546"],
        "up": "4.251212494222509199615419",
        "at": "1.688682689958469033156667",
        "phase": "100.1521597648154862175922",
        "peak": ("1.3633854754030414416", "1.30133922699334"),
        "bandwidth": "1.120684665632483090949597",
    },
    {
        "loop": (["1.6", "0.8"], ["20", "2", "0"], "4"),
        "crossovers": ["0.19555173105244601"],
        "up": "1.130262166288797476741854",
        "at": "0.2104938502099971210688927",
        "phase": "3.627489684159521489098451",
        "peak": ("17.983149138998945101", "0.198755337391177"),
        "bandwidth": "0.3210655611314073570334763",
    },
]


@pytest.mark.parametrize("case", CASES, ids=lambda case: str(case["loop"]))
def test_reference_loops(case: dict[str, Any]) -> None:
    above, below, delay = case["loop"]
    transfer = late([exact(c) for c in above], [exact(c) for c in below], exact(delay))
    loop = loop_of(transfer)
    assert loop.gain_margin_down().absent is not None
    up, peak = loop.gain_margin_up(), loop.sensitivity_peak()
    assert up.at is not None
    assert peak.at is not None
    gains = [one for one in loop.crossings() if one.kind == "gain"]
    assert [one.direction for one in gains] == ["lag"]
    for found, wanted in (
        *((one.frequency, other) for one, other in zip(gains, case["crossovers"], strict=True)),
        (up, case["up"]),
        (up.at["frequency"], case["at"]),
        (peak, case["peak"][0]),
        (peak.at["frequency"], case["peak"][1]),
        (DelayedGain(closed(transfer)).bandwidth(), case["bandwidth"]),
    ):
        assert abs(number(found) / mpmath.mpf(wanted) - 1) < NEAR
    assert abs(number(loop.phase_margin()) * 180 / mpmath.pi / mpmath.mpf(case["phase"]) - 1) < NEAR


# --- printed figures ------------------------------------------------------------------------------------------

SIMC = "S. Skogestad, Simple analytic rules for model reduction and PID controller tuning, J. Process Control 13 (2003)"
LAG = ([fmpq(1, 2)], [1, 0])
DOUBLE = ([4, fmpq(1, 2)], [8, 0, 0])
E10_PI = ([84, fmpq(21, 4)], [640, 352, 16, 0])
E10_PID = ([160, 100, 10], [320, 176, 8, 0])
E11_PID = ([-18, 9, 8, 1], [144, 168, 60, 6, 0])
PRINTED = [
    (LAG, "sensitivity_peak", "1.59", "1.59049023319", f"{SIMC}, table 1"),
    (LAG, "delay_margin", "2.14", "2.14159265359", f"{SIMC}, table 1"),
    (LAG, "crossover_frequency", "0.50", "0.5", f"{SIMC}, table 1"),
    (DOUBLE, "sensitivity_peak", "1.70", "1.70352169041", f"{SIMC}, table 1, integrating process"),
    (DOUBLE, "delay_margin", "1.59", "1.58963681313", f"{SIMC}, table 1, integrating process"),
    (E10_PI, "sensitivity_peak", "1.72", "1.71556568123", f"{SIMC}, table 4, E10"),
    (E10_PID, "sensitivity_peak", "1.65", "1.651239947", f"{SIMC}, table 4, E10"),
    (E11_PID, "sensitivity_peak", "1.66", "1.65657779383", f"{SIMC}, table 4, E11"),
]


@pytest.mark.parametrize(("loop", "measure", "printed", "recomputed", "source"), PRINTED)
def test_printed_figures(loop: Any, measure: str, printed: str, recomputed: str, source: str) -> None:
    found = number(getattr(loop_of(late(*loop, fmpq(1))), measure)())
    assert abs(found - mpmath.mpf(printed)) <= mpmath.mpf("0.0051"), source
    assert abs(found / mpmath.mpf(recomputed) - 1) < mpmath.mpf("1e-10")


def test_ultimate_frequency_of_a_lag_with_equal_dead_time() -> None:
    """2.03 rad/s (W. L. Luyben, Process Modeling, Simulation and Control)."""
    found = number(loop_of(late([1], [1, 1], fmpq(1))).phase_crossover_frequency())
    assert abs(found - mpmath.mpf("2.02875783811")) < 1e-10


def test_integrator_with_dead_time_in_closed_form() -> None:
    """k/s e^(-s t): gain margin pi/(2 k t), phase margin pi/2 - k t, delay margin pi/(2 k) - t."""
    gain, delay = fmpq(3, 7), fmpq(5, 4)
    loop = loop_of(late([gain], [1, 0], delay))
    k, t = mpmath.mpf(3) / 7, mpmath.mpf(5) / 4
    assert abs(number(loop.gain_margin()) - mpmath.pi / (2 * k * t)) < NEAR
    assert abs(number(loop.phase_margin()) - (mpmath.pi / 2 - k * t)) < NEAR
    assert abs(number(loop.delay_margin()) - (mpmath.pi / (2 * k) - t)) < NEAR
    assert abs(number(loop.phase_at(fmpq(9))) - (-mpmath.pi / 2 - 9 * t)) < NEAR


# --- scans on loops drawn by lot ------------------------------------------------------------------------------


def drawn(seed: int) -> DelayedTransfer:
    lot = random.Random(seed)
    factors = [[1, fmpq(lot.randint(1, 40), 10)] for _ in range(lot.randint(1, 3))]
    below: list[Any] = [1] + [0] * lot.randint(0, 1)
    for factor in factors:
        below = _times(below, factor)
    above = [fmpq(lot.randint(1, 20), 10) for _ in range(lot.randint(1, len(below) - 1))]
    if above[-1] == below[-1]:
        above[-1] += 1  # the scan does not see a crossing at zero frequency
    return late(above, below, fmpq(lot.randint(1, 300), 100))


def _times(p: list[Any], q: list[Any]) -> list[Any]:
    result = [fmpq(0)] * (len(p) + len(q) - 1)
    for i, a in enumerate(p):
        for j, b in enumerate(q):
            result[i + j] += a * b
    return result


def scanned(transfer: DelayedTransfer) -> dict[str, mpmath.mpf | None]:
    """Return margins by a scan in floats, sharpened in mpmath."""

    def at(w: mpmath.mpf) -> mpmath.mpc:
        return value(transfer.numerator, 1j * w) / value(transfer.denominator, 1j * w)

    import numpy as np

    grid = np.geomspace(1e-3, 60.0, 40_000)
    total = np.array(_floats(transfer, grid))
    gains = _roots(grid, np.abs(total) - 1, lambda w: abs(at(w)) - 1)
    phases = [w for w in _roots(grid, total.imag, lambda w: at(w).imag) if at(w).real < 0]
    lags = [(mpmath.arg(-at(w)), w) for w in gains]
    peak = grid[np.argmax(1 / np.abs(1 + total))]
    best = mpmath.findroot(
        lambda w: mpmath.diff(lambda v: abs(1 + at(v)) ** 2, w), (peak * 0.9999, peak * 1.0001), solver="secant"
    )
    return {
        "gain_margin_up": min((-1 / at(w).real for w in phases if at(w).real > -1), default=None),
        "gain_margin_down": min((-at(w).real for w in phases if at(w).real < -1), default=None),
        "phase_margin": min((abs(lag) for lag, _ in lags), default=None),
        "delay_margin": min(((lag % (2 * mpmath.pi)) / w for lag, w in lags), default=None),
        "sensitivity_peak": max(1 / abs(1 + at(best)), mpmath.mpf(1)),
    }


def _floats(transfer: DelayedTransfer, grid: Any) -> Any:
    import numpy as np

    def of(quasi: Quasi) -> Any:
        s = 1j * grid
        return sum(
            np.polyval([int(c.p) / int(c.q) for c in reversed(p.coeffs())], s) * np.exp(-s * int(d.p) / int(d.q))
            for d, p in quasi.terms
        )

    return of(transfer.numerator) / of(transfer.denominator)


def _roots(grid: Any, values: Any, function: Any) -> list[mpmath.mpf]:
    import numpy as np

    changes = np.nonzero(values[:-1] * values[1:] < 0)[0]
    return [mpmath.findroot(function, (grid[i], grid[i + 1]), solver="anderson", tol=1e-25) for i in changes]


@pytest.mark.parametrize("seed", range(24))
def test_margins_of_loops_drawn_by_lot(seed: int) -> None:
    transfer = drawn(seed)
    loop = loop_of(transfer)
    with mpmath.workdps(40):
        if not is_stable(transfer.numerator + transfer.denominator):
            assert loop.gain_margin().absent is not None
            assert loop.crossings()
            return
        for name, wanted in scanned(transfer).items():
            answer = getattr(loop, name)()
            if wanted is None:
                assert answer.absent is not None, name
                assert answer.absent.infinite, name
            else:
                assert abs(number(answer) / wanted - 1) < NEAR, name


def test_a_dead_time_inside_the_loop_is_no_factor_of_it() -> None:
    """L = 2 / (s + 1 + e^(-s/2)/2): gain crossings are isolated in balls."""
    below = Quasi.of({fmpq(0): _poly([1, 1]), fmpq(1, 2): _poly([fmpq(1, 2)])})
    above = Quasi.of({fmpq(1, 5): _poly([2])})
    transfer = DelayedTransfer(above, below, ((below, 1),))
    loop = loop_of(transfer)
    with mpmath.workdps(40):
        for name, wanted in scanned(transfer).items():
            answer = getattr(loop, name)()
            assert wanted is not None or answer.absent is not None, name
            assert wanted is None or abs(number(answer) / wanted - 1) < NEAR, name


def _poly(coefficients: list[Any]) -> Any:
    from specgate.systems.polynomials import highest_first

    return highest_first(coefficients)


def test_added_dead_time_uses_up_the_delay_margin() -> None:
    """The loop is stable just below the margin and unstable just above: decided by counting roots."""
    transfer = late([fmpq(9, 10), fmpq(1, 2)], [2, 1, 0], fmpq(1))
    margin = loop_of(transfer).delay_margin().enclose(64).mid().fmpq()
    for factor, stable in ((1 - fmpq(1, 10**6), True), (1 + fmpq(1, 10**6), False)):
        more = late([fmpq(9, 10), fmpq(1, 2)], [2, 1, 0], 1 + margin * factor)
        assert is_stable(more.numerator + more.denominator) is stable


def test_more_gain_uses_up_the_gain_margin() -> None:
    transfer = late([fmpq(9, 10), fmpq(1, 2)], [2, 1, 0], fmpq(1))
    margin = loop_of(transfer).gain_margin_up().enclose(64).mid().fmpq()
    for factor, stable in ((1 - fmpq(1, 10**6), True), (1 + fmpq(1, 10**6), False)):
        assert is_stable(transfer.numerator.scaled(margin * factor) + transfer.denominator) is stable


def test_an_unstable_loop_has_no_margins_but_crossings() -> None:
    loop = loop_of(late([4], [1, 0], fmpq(1)))
    assert loop.phase_margin().absent is not None
    assert [one.kind for one in loop.crossings()] == ["phase", "gain", "phase"]


def test_a_gain_that_does_not_fall_below_one_has_no_delay_margin() -> None:
    assert loop_of(late([2, 1], [1, 5], fmpq(1))).delay_margin().absent is not None
    assert math.isfinite(float(loop_of(late([fmpq(1, 2), 1], [1, 5], fmpq(1))).gain_at(fmpq(1)).enclose(64).mid()))


def test_a_gain_that_stays_at_high_frequency_limits_the_gain_margin() -> None:
    """L = 0.6 (s + 0.1)/(s + 4) e^(-s): endless crossings come nearer to the factor 1/0.6 and never reach it."""
    found = loop_of(late([fmpq(3, 5), fmpq(3, 50)], [1, 4], fmpq(1))).gain_margin_up()
    assert found.exact == fmpq(5, 3)


def test_ranges_restrict_what_is_looked_at() -> None:
    loop = loop_of(late([2], [5, 1], fmpq(1)))
    assert loop.gain_margin_up((fmpq(1), fmpq(2))).enclose(64).overlaps(loop.gain_margin_up().enclose(64))
    assert loop.gain_margin_up((fmpq(1, 10), fmpq(1))).absent is not None
    further = loop.gain_margin_up((fmpq(2), fmpq(10))).enclose(64)
    assert bool(further > loop.gain_margin_up().enclose(64))
    assert loop.phase_margin((fmpq(1), fmpq(2))).absent is not None


def test_a_margin_near_a_tangency_is_fragile() -> None:
    """A resonance behind the dead time peaks a little below one: 1 % of gain would bring about a nearer crossing."""
    damping = fmpq(1, 20)
    low, high = (
        late([fmpq(99_400, 10**6)], [1, 2 * damping, 1], fmpq(1, 2)),
        late([fmpq(90, 1000)], [1, 2 * damping, 1], fmpq(1, 2)),
    )
    near, far = (loop_of(one).delay_margin() for one in (low, high))
    assert near.fragile is not None
    assert "brings about" in near.fragile.reason
    assert far.fragile is None


def test_a_margin_near_a_tangency_inside_is_fragile() -> None:
    """The same with a second way round without the dead time, so that it is no factor of L."""
    below = highest_first([1, fmpq(1, 10), 1])
    quasi = Quasi.of({fmpq(0): below, fmpq(1, 2): highest_first([fmpq(1, 1000)])})
    peak = DelayedMagnitude(Quasi.rational(highest_first([1])), quasi).supremum().enclose(80).mid().fmpq()
    for share, warned in ((fmpq(995, 1000), True), (fmpq(9, 10), False)):
        gain = Quasi.of({fmpq(1, 2): highest_first([share / peak])})
        found = loop_of(DelayedTransfer(gain, quasi, ((quasi, 1),))).phase_margin()
        assert (found.fragile is not None) is warned


def test_what_a_margin_rests_on_is_told() -> None:
    loop = loop_of(late([2], [5, 1], fmpq(1)))
    for answer in (loop.gain_margin(), loop.phase_margin(), loop.delay_margin(), loop.sensitivity_peak()):
        assert answer.how is not None
        account = answer.how()
        assert account.footing is not None
        assert account.method

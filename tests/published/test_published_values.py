"""Figures printed in textbooks, reports and test suites, each with its source in `tests/data/published_values.yaml`.

A printed figure must agree to its last digit; one that the recomputation shows to be off is held to the recomputed
value, and must be seen to disagree. Recomputed values are independent of specgate and have 12 digits.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from math import factorial
from pathlib import Path
from typing import Any

import pytest
import yaml
from flint import arb, fmpq, fmpq_mat, fmpq_poly
from mpmath import findroot, mp, mpf, pi, sin, workdps

from specgate.measures.measure import Arguments, Band
from specgate.measures.subjects import LoopSubject, ResponseSubject
from specgate.measures.table import MEASURES
from specgate.response.answers import Absent
from specgate.response.step import StepResponse
from specgate.systems.blocks import Block, Instance, LinearForm, OutputRef, SignalRef, Wiring
from specgate.systems.polynomials import highest_first
from specgate.systems.solution import solve
from specgate.systems.transfer import TransferFunction

DATA = Path(__file__).resolve().parents[1] / "data" / "published_values.yaml"
ROWS: list[dict[str, Any]] = yaml.safe_load(DATA.read_text())
DIGITS = 40
RECOMPUTED_TO = fmpq(1, 10**9)
"""State matrices and filter cutoffs are given to 10 digits."""


def exact(number: float | str) -> fmpq:
    """Return the decimal as it is written."""
    mantissa, _, exponent = str(number).lower().partition("e")
    whole, _, decimals = mantissa.partition(".")
    value = fmpq(int(whole + decimals), 10 ** len(decimals))
    return value * fmpq(10) ** int(exponent or 0)


def polynomial(coefficients: list[float]) -> fmpq_poly:
    return highest_first([exact(c) for c in coefficients])


def butterworth(order: int) -> fmpq_poly:
    """Return the denominator of an even-order Butterworth filter of cutoff 1 rad/s, coefficients to 40 digits."""
    result = fmpq_poly([1])
    with workdps(DIGITS + 10):
        for k in range(order // 2):
            twice_damping = 2 * sin((2 * k + 1) * pi / (2 * order))
            result *= fmpq_poly([1, _rational(twice_damping), 1])
    return result


def bessel(order: int) -> fmpq_poly:
    """Return the reverse Bessel polynomial: the denominator of a filter with unit delay at zero frequency."""
    return fmpq_poly(
        [
            fmpq(factorial(2 * order - k), 2 ** (order - k) * factorial(k) * factorial(order - k))
            for k in range(order + 1)
        ]
    )


def cutoff(denominator: fmpq_poly) -> fmpq:
    """Return the frequency (rad/s) at which the gain of 1/denominator is 1/sqrt(2) of that at zero, to 40 digits."""
    with workdps(DIGITS + 10):
        coefficients = [mpf(int(c.p)) / int(c.q) for c in denominator.coeffs()]

        def excess(frequency: mpf) -> mpf:
            value = sum(c * mp.mpc(0, frequency) ** k for k, c in enumerate(coefficients))
            return abs(value) ** 2 - 2 * coefficients[0] ** 2

        return _rational(findroot(excess, (mpf(1), mpf(3)), solver="anderson"))


def _rational(number: mpf) -> fmpq:
    scale = 10**DIGITS
    return fmpq(int(mp.nint(number * scale)), scale)


@cache
def _filter(form: str, order: int) -> fmpq_poly:
    return butterworth(order) if form == "butterworth" else bessel(order)


def response(system: dict[str, Any]) -> StepResponse:
    if system["form"] in ("butterworth", "bessel"):
        denominator = _filter(system["form"], system["order"])
        return StepResponse(fmpq_poly([denominator[0]]), denominator, fmpq(1))
    return StepResponse(polynomial(system["num"]), polynomial(system["den"]), fmpq(1))


def read(measure: str, system: dict[str, Any], **arguments: Any) -> arb:
    answer_of = MEASURES[measure].read
    assert answer_of is not None
    step = response(system)
    subject = ResponseSubject(
        TransferFunction(step.numerator, step.denominator), fmpq(1), step, Absent("no reference is named")
    )
    return answer_of(subject, Arguments(**arguments)).enclose(128)


def settling(band: fmpq) -> Callable[[dict[str, Any]], arb]:
    return lambda system: read("settling_time", system, band=Band(band, relative=True))


def arrival(level: Callable[[StepResponse], fmpq]) -> Callable[[dict[str, Any]], arb]:
    def value(system: dict[str, Any]) -> arb:
        step = response(system)
        return step.first_arrival(level(step)).enclose(128)

    return value


def _final(step: StepResponse) -> fmpq:
    final = step.final_value().exact
    assert final is not None
    return final


def times_cutoff(time: Callable[[dict[str, Any]], arb]) -> Callable[[dict[str, Any]], arb]:
    """Times of filter tables are in periods of the cutoff frequency."""
    return lambda system: time(system) * cutoff(_filter(system["form"], system["order"])) / (2 * arb.pi())


def loop(denominator: fmpq_poly) -> LoopSubject:
    """Return a loop whose modes are the roots of a polynomial."""
    block = Block("plant", ("u",), ("y",), {("y", "u"): fmpq_poly([1])}, denominator)
    instance = Instance("plant", block, {"u": LinearForm(((fmpq(1), SignalRef("u")),))})
    signals = {"y": LinearForm(((fmpq(1), OutputRef("plant", "y")),))}
    return LoopSubject(solve(Wiring(("u",), (instance,), signals)))


def state_loop(system: dict[str, Any]) -> LoopSubject:
    matrix = fmpq_mat([[exact(entry) for entry in row] for row in system["A"]])
    return loop(matrix.charpoly())


def of_loop(measure: str) -> Callable[[dict[str, Any]], arb]:
    answer_of = MEASURES[measure].read
    assert answer_of is not None
    return lambda system: answer_of(state_loop(system), Arguments()).enclose(128)


def real_modes(system: dict[str, Any]) -> list[arb]:
    """Return minus the real poles of a state matrix, slowest first."""
    characteristic = state_loop(system).solution.determinant
    poles = StepResponse(fmpq_poly([1]), characteristic, fmpq(1)).poles
    return sorted((-pole.value.real for pole in poles if pole.value.imag.is_zero()), key=lambda ball: float(ball.mid()))


def largest_frequency(system: dict[str, Any]) -> arb:
    characteristic = state_loop(system).solution.determinant
    poles = StepResponse(fmpq_poly([1]), characteristic, fmpq(1)).poles
    return max((abs(pole.value) for pole in poles), key=lambda ball: float(ball.mid()))


def real_pole(system: dict[str, Any]) -> arb:
    return next(pole.value.real for pole in response(system).poles if pole.value.imag.is_zero())


def lasting_error(system: dict[str, Any]) -> arb:
    """Return the error that unity feedback leaves of a unit step, in per cent."""
    numerator, denominator = polynomial(system["num"]), polynomial(system["den"])
    closed, error = numerator + denominator, StepResponse(denominator, numerator + denominator, fmpq(1))
    subject = ResponseSubject(TransferFunction(numerator, closed), fmpq(1), Absent("not asked for"), error)
    answer_of = MEASURES["steady_state_error"].read
    assert answer_of is not None
    return 100 * answer_of(subject, Arguments()).enclose(128)


READ: dict[str, Callable[[dict[str, Any]], arb]] = {
    "overshoot_pct": lambda system: 100 * read("overshoot", system),
    "undershoot_pct": lambda system: 100 * read("undershoot", system),
    "peak_value": lambda system: read("maximum_value", system),
    "peak_time": lambda system: read("peak_time", system),
    "rise_time_10_90": lambda system: read("rise_time", system),
    "settling_time_2pct": settling(fmpq(1, 50)),
    "settling_time_1pct_times_fc": times_cutoff(settling(fmpq(1, 100))),
    "rise_time_0_90_times_fc": times_cutoff(arrival(lambda step: _final(step) * fmpq(9, 10))),
    "time_to_90pct": arrival(lambda step: _final(step) * fmpq(9, 10)),
    "time_to_0.9_of_reference": arrival(lambda _: fmpq(9, 10)),
    "pole_real": real_pole,
    "steady_state_error_pct": lasting_error,
    "phugoid_wn": of_loop("natural_frequency"),
    "short_period_wn": largest_frequency,
    "dutch_roll_zeta": of_loop("damping_ratio"),
    "spiral_root": lambda system: real_modes(system)[0],
    "roll_root": lambda system: real_modes(system)[-1],
}


@pytest.mark.parametrize("row", [row for row in ROWS if row["quantity"] in READ], ids=lambda row: row["id"])
def test_published_value(row: dict[str, Any]) -> None:
    value = READ[row["quantity"]](row["system"])
    recomputed, printed, tolerance = exact(row["recomputed"]), exact(row["printed"]), exact(row["tolerance"])
    assert abs(value - recomputed) < RECOMPUTED_TO * max(1, abs(recomputed)), (value, row["source"])
    if row["verdict"] == "agrees":
        assert abs(value - printed) < tolerance * (1 + RECOMPUTED_TO), (value, row["source"])
    else:
        assert abs(value - printed) > tolerance, (value, row["source"])


def test_ultimate_gain() -> None:
    """Astrom, Haegglund 2000: the gain at which unity feedback around 1/(s+1)^4 stops being stable is 4, exactly."""
    plant = fmpq_poly([1, 1]) ** 4
    stable = MEASURES["stable"].read
    assert stable is not None
    row = next(row for row in ROWS if row["quantity"] == "ultimate_gain")
    gain = exact(row["printed"])
    just_less = gain - fmpq(1, 10**30)
    assert stable(loop(plant + just_less), Arguments()).truth is True
    assert stable(loop(plant + gain), Arguments()).truth is False


def test_every_row_is_read() -> None:
    assert {row["quantity"] for row in ROWS} == {*READ, "ultimate_gain"}
    assert len(ROWS) == 61
